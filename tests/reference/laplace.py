"""A third route to the nominal waits, with no modes and no graph theory: the voltage at the wait's end, from a numerical
inversion of the Laplace transform, has to be the touch voltage.

  V(s) = (G + s C)^-1 C v(0)      node potentials, the reference node struck out
The operating point comes by a limit instead of by pieces of the graph: with the terminals held, (G + e C) v = 0 at all
other nodes for a vanishing e, since a conductance proportional to each capacitance divides as the capacitances do.
"""
import mpmath as mp

from exact import laplacian, number, solve
from network import Branch, Scenario, Topology

DIGITS = 60
TINY = 120         # e = 10^-TINY


def gap(bank, names, time):
    """| |v(time)| - touch | over touch, nominal."""
    t = Topology(bank, Scenario())          # only to number the nodes
    value = [number(p.value) for p in bank.parts]
    c_edges = [(i, j, value[k] * number(m)) for k, i, j, m in t.capacitors]
    r_edges = [(i, j, 1 / value[k]) for k, i, j, _ in t.start_r]
    with mp.workdps(2 * TINY + 20):
        g, c = laplacian(t.outer, r_edges), laplacian(t.outer, [(i, j, x * w) for (i, j, x), w in zip(c_edges, t.whole)])
        a = [[x + y / mp.mpf(10)**TINY for x, y in zip(*rows)] for rows in zip(g, c)]
        others = [i for i in range(t.outer) if i not in (t.top, t.ref)]
        v = [mp.mpf(0)] * t.outer
        v[t.top] = number(bank.nominal)
        if others:
            found, = solve([[a[i][j] for j in others] for i in others], [[-a[i][t.top] * v[t.top] for i in others]])
            for i, x in zip(others, found):
                v[i] = x
    charge = [mp.mpf(0)] * t.n
    for (k, i, j, _), (_, _, x), main in zip(t.capacitors, c_edges, t.main_of):
        own = bank.parts[k].own
        _, p, q, _ = t.mains[main]
        u = v[p] - v[q] if own is None else number(own)
        charge[i] += x * u
        charge[j] -= x * u
    rest = [i for i in range(t.n) if i != t.ref]
    i, j = t.pair(names)
    r_edges += [(a, b, value[k] * m.per_value) for k, a, b, m in t.run_r if isinstance(m, Branch)]
    g, c = laplacian(t.n, r_edges), laplacian(t.n, c_edges)

    def transform(s):
        x, = solve([[g[p][q] + s * c[p][q] for q in rest] for p in rest], [[charge[p] for p in rest]])
        at = dict(zip(rest, x))
        return at.get(i, 0) - at.get(j, 0)

    with mp.workdps(DIGITS):
        touch = number(bank.touch)
        return abs(abs(mp.invertlaplace(transform, time, method='talbot', degree=32)) - touch) / touch
