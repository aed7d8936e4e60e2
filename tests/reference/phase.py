"""A linear circuit between two events, with sources: its modes, carried from any state to any later one.

As exact.py, node potentials v = Z y + U w + v_s, with y the potentials inside each capacitive group relative to its
first node (the state, the same in every phase), w the groups' own potentials from the balance of currents, and v_s what
the sources add. C y' = -S y + f then splits into modes; how many never decay is counted on the graph.
"""
import mpmath as mp
import numpy as np

from eigen import symmetric
from exact import laplacian, solve
from network import Pieces

ZERO = 50          # a coefficient under 1e-ZERO of its scale is zero by structure


class Graph:
    """`caps`, `links`: pairs of nodes."""

    def __init__(self, n, caps, links):
        self.n = n
        self.groups = Pieces(n, caps)
        self.first = [m[0] for m in self.groups.members]
        self.state = [i for i in range(n) if i not in self.first]
        self.islands = Pieces(n, list(caps) + list(links))
        self.clusters = Pieces(n, links)
        grounds = {min(self.groups.of[i] for i in m) for m in self.islands.members}
        self.free = [m for k, m in enumerate(self.groups.members) if k not in grounds]
        self.trapped = self.clusters.count - self.islands.count

    def defined(self, pair):
        return self.islands.of[pair[0]] == self.islands.of[pair[1]]


class Phase:
    """`caps`: (i, j, C); `links`: (i, j, G, E), a conductance with a source of E in series that drives towards i."""

    def __init__(self, graph, caps, links):
        t = self.t = graph
        n, s, free = t.n, t.state, t.free
        g = laplacian(n, [(i, j, x) for i, j, x, _ in links])
        drive = [mp.mpf(0)] * n
        for i, j, x, e in links:
            if e:
                drive[i] += x * e
                drive[j] -= x * e
        driven = any(drive)
        columns = [[-mp.fsum(g[i][j] for i in p) for p in free] for j in s]
        columns.append([mp.fsum(drive[i] for i in p) for p in free])
        between = [[mp.fsum(g[i][j] for i in p for j in q) for q in free] for p in free]
        w = solve(between, columns) if free else [[] for _ in columns]

        def spread(values):
            v = [mp.mpf(0)] * n
            for p, x in zip(free, values):
                for i in p:
                    v[i] += x
            return v

        self.unit = [spread(x) for x in w[:-1]]
        for v, j in zip(self.unit, s):
            v[j] += 1
        self.added = spread(w[-1])
        m = self.m = len(s)
        self.low = _cholesky([[c[j] for j in s] for c in (laplacian(n, caps)[i] for i in s)])
        times = lambda i, v: mp.fsum(x * y for x, y in zip(g[i], v) if x and y)
        schur = [[times(i, self.unit[k]) for k in range(m)] for i in s]
        force = [drive[i] - times(i, self.added) for i in s] if driven else None
        half = [self._forward([schur[i][k] for i in range(m)]) for k in range(m)]
        a = [self._forward([half[k][i] for k in range(m)]) for i in range(m)]
        values, q = symmetric([[(a[i][j] + a[j][i]) / 2 for j in range(m)] for i in range(m)]) if m else ([], [])
        order = sorted(range(m), key=lambda k: abs(values[k]))
        top = max([abs(x) for x in values], default=mp.mpf(0))
        assert all(abs(values[k]) <= top / mp.mpf(10)**70 for k in order[:t.trapped]), 'a trapped mode decays'
        assert all(values[k] > top / mp.mpf(10)**60 for k in order[t.trapped:]), 'a mode should decay and does not'
        self.rates = [mp.mpf(0) if k in order[:t.trapped] else values[k] for k in order]
        self.q = [q[k] for k in order]
        self.shapes = [self._backward(v) for v in self.q]
        f = self._forward(force) if force else None
        self.rest = [mp.fsum(x * y for x, y in zip(v, f)) / r if f and r else mp.mpf(0) for v, r in zip(self.q, self.rates)]
        self.driven = driven

    def _forward(self, x):
        x = list(x)
        for i in range(len(x)):
            x[i] = (x[i] - mp.fsum(self.low[i][j] * x[j] for j in range(i))) / self.low[i][i]
        return x

    def _backward(self, x):
        x = list(x)
        for i in reversed(range(len(x))):
            x[i] = (x[i] - mp.fsum(self.low[j][i] * x[j] for j in range(i + 1, len(x)))) / self.low[i][i]
        return x

    def run(self, y0):
        """From a state: a Run."""
        m = self.m
        start = [mp.fsum(self.low[j][i] * y0[j] for j in range(i, m)) for i in range(m)]
        z0 = [mp.fsum(x * y for x, y in zip(v, start)) for v in self.q]
        return Run(self, y0, z0)


class Run:
    def __init__(self, phase, y0, z0):
        self.phase, self.y0 = phase, y0
        # a trapped mode stays where it is
        self.rest = [r if rate else z for r, rate, z in zip(phase.rest, phase.rates, z0)]
        self.move = [z - r if rate else mp.mpf(0) for z, r, rate in zip(z0, phase.rest, phase.rates)]

    def state(self, time):
        p = self.phase
        if time == 0:
            return list(self.y0)
        z = [r + x * mp.exp(-rate * time) for r, x, rate in zip(self.rest, self.move, p.rates)]
        return [mp.fsum(x * shape[i] for x, shape in zip(z, p.shapes)) for i in range(p.m)]

    def voltage(self, pair):
        """(value at rest, [(amplitude, rate)]), or None where nothing joins the two."""
        p, (i, j) = self.phase, pair
        if not p.t.defined(pair):
            return None
        row = [u[i] - u[j] for u in p.unit]
        weights = [mp.fsum(x * y for x, y in zip(row, shape) if x) for shape in p.shapes]
        parts = [p.added[i] - p.added[j]] + [w * r for w, r in zip(weights, self.rest)]
        rest = mp.fsum(parts)
        terms = [(w * x, rate) for w, x, rate in zip(weights, self.move, p.rates) if rate]
        scale = mp.fsum(abs(x) for x in parts) + mp.fsum(abs(a) for a, _ in terms)
        if not p.driven and p.t.clusters.of[i] == p.t.clusters.of[j]:
            assert abs(rest) <= scale / mp.mpf(10)**ZERO
            rest = mp.mpf(0)
        if abs(rest) <= scale / mp.mpf(10)**ZERO:
            rest = mp.mpf(0)
        return rest, [(a, rate) for a, rate in terms if abs(a) > scale / mp.mpf(10)**ZERO]


def _cholesky(a):
    n = len(a)
    low = [[mp.mpf(0)] * n for _ in range(n)]
    for i in range(n):
        for j in range(i + 1):
            x = a[i][j] - mp.fsum(low[i][k] * low[j][k] for k in range(j))
            low[i][j] = mp.sqrt(x) if i == j else x / low[j][j]
    return low


# -- what is asked of a sum of exponentials over [0, end] -------------------------------------------------------------

def at(figure, time):
    rest, terms = figure
    return rest + mp.fsum(a * mp.exp(-rate * time) for a, rate in terms)


def squared(figure, end):
    """The integral of its square over [0, end]."""
    rest, terms = figure
    total = rest**2 * end
    for a, rate in terms:
        total += -2 * rest * a * mp.expm1(-rate * end) / rate
        for b, other in terms:
            total += -a * b * mp.expm1(-(rate + other) * end) / (rate + other)
    return total


def peak(figure, end=None):
    """(greatest |value| over [0, end], when); `end` None is for ever, and then `when` None is "never quite reached".
    Candidates: both ends, and every turn of the derivative that a fine logarithmic grid of time shows, each made exact
    by Newton's steps on the derivative."""
    rest, terms = figure
    best = (abs(at(figure, mp.mpf(0))), mp.mpf(0))
    if not terms or end == 0:
        return best
    slow, fast = min(r for _, r in terms), max(r for _, r in terms)
    last = 400 / slow if end is None else min(end, 400 / slow)
    if end is None:
        others = [(abs(rest), None)]
    else:
        others = [(abs(at(figure, end)), end)]
    first = min(mp.mpf(1) / 1000 / fast, last / 100)
    count = int(60 * mp.log10(last / first)) + 2
    grid = np.concatenate([[0.0], np.geomspace(float(first), float(last), count)])
    a, r = (np.array([float(x[k]) for x in terms]) for k in (0, 1))
    with np.errstate(all='ignore'):
        slope = -(np.exp(-np.outer(grid, r)) * (a * r)).sum(1)
        value = np.abs(float(rest) + (np.exp(-np.outer(grid, r)) * a).sum(1))
    turns = np.nonzero(slope[:-1] * slope[1:] < 0)[0]
    top = max([value.max()] + [float(x) for x, _ in others + [best]])
    for k in turns:
        if max(value[k], value[k + 1]) > top * 0.98:
            t = _turn(terms, mp.mpf(grid[k]), mp.mpf(grid[k + 1]))
            if t is not None:
                others.append((abs(at(figure, t)), t))
    for x, t in others:
        if x > best[0] * (1 + mp.mpf(10)**-40):
            best = (x, t)
    return best


def _turn(terms, low, high):
    slope = lambda t: mp.fsum(a * r * mp.exp(-r * t) for a, r in terms)
    up = slope(low)
    if up * slope(high) > 0:
        return None
    t = (low + high) / 2
    for _ in range(300):
        x = slope(t)
        bend = -mp.fsum(a * r * r * mp.exp(-r * t) for a, r in terms)
        if x * up > 0:
            low = t
        else:
            high = t
        new = t - x / bend if bend else low
        if not low < new < high:
            new = (low + high) / 2
        if abs(new - t) <= t * mp.mpf(10)**-45:
            return new
        t = new
    return t
