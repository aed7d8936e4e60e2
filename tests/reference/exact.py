"""The reference proper: node potentials, Schur complements and a symmetric eigenproblem, with mpmath at many digits.

Route, on purpose another than a factored form in doubles:
  C, G      capacitance and conductance matrices over the nodes (Laplacians of the graph)
  v = Z y + U w   y: potentials inside each capacitive group relative to its first node; w: the groups' own potentials
  U'G v = 0       the currents into a group balance at every moment, which gives w = W y
  Cr y' = -S y    Cr = Z'CZ positive definite; S = Z'G(Z + U W), a Schur complement
  L L' = Cr, L^-1 S L^-T = Q diag(rate) Q'
Squaring the scales like this costs digits: with conductances over 16 decades and capacitances over 11 the smallest rate
may sit some 30 decades under the greatest, so at 120 digits about 90 are left. `reference.py` proves it by computing
again with 200.
"""
import math
from fractions import Fraction

import mpmath as mp

from bank import Refused
from eigen import symmetric
from network import Branch, Holding, Pieces

DIGITS = 120
NOISE = 70          # a figure under 1e-NOISE of its own scale is zero by structure
UNSURE = 'unsure'   # what doubles say where their rounding leaves a comparison open


def number(x):
    return mp.mpf(x.numerator) / x.denominator if isinstance(x, Fraction) else mp.mpf(x)


def solve(a, b):
    """Gaussian elimination with partial pivoting on lists of rows; `b` is a list of right-hand sides, as columns."""
    n = len(a)
    rows = [list(a[i]) + [column[i] for column in b] for i in range(n)]
    for k in range(n):
        best = max(range(k, n), key=lambda i: abs(rows[i][k]))
        rows[k], rows[best] = rows[best], rows[k]
        for i in range(k + 1, n):
            if rows[i][k]:
                f = rows[i][k] / rows[k][k]
                rows[i] = rows[i][:k + 1] + [x - f * y for x, y in zip(rows[i][k + 1:], rows[k][k + 1:])]
    out = []
    for c in range(n, n + len(b)):
        x = [mp.mpf(0)] * n
        for i in reversed(range(n)):
            x[i] = (rows[i][c] - mp.fsum(rows[i][j] * x[j] for j in range(i + 1, n))) / rows[i][i]
        out.append(x)
    return out


def laplacian(n, edges):
    m = [[mp.mpf(0)] * n for _ in range(n)]
    for i, j, x in edges:
        m[i][i] += x
        m[j][j] += x
        m[i][j] -= x
        m[j][i] -= x
    return m


def held(holding, n, resistors, capacitors):
    """Potentials with 1 at holding.a and 0 at holding.b: the resistors first, then the capacitances from uncharged."""
    v = [mp.mpf(0)] * n
    v[holding.a] = mp.mpf(1)
    g = laplacian(n, resistors)
    u = holding.driven
    if u:
        x, = solve([[g[i][j] for j in u] for i in u], [[-g[i][holding.a] for i in u]])
        for i, value in zip(u, x):
            v[i] = value
    f = holding.floating
    if f:
        c = laplacian(n, capacitors)
        a = [[mp.fsum(c[i][j] for i in p for j in q) for q in f] for p in f]
        x, = solve(a, [[-mp.fsum(c[i][j] * v[j] for i in p for j in range(n)) for p in f]])
        for p, value in zip(f, x):
            for i in p:
                v[i] = value
    return v


class Exact:
    """One circuit with given factors on its parts' values, charged to `volt`: its modes and what can be asked."""

    def __init__(self, topology, factors, volt):
        t = self.t = topology
        bank = t.bank
        value = [number(p.value) * f for p, f in zip(bank.parts, factors)]
        self.start_c = [(i, j, value[k]) for k, i, j, _ in t.mains]
        self.run_c = [(i, j, value[k] * number(m)) for k, i, j, m in t.capacitors]
        start_r = [(i, j, 1 / (value[k] * number(m))) for k, i, j, m in t.start_r]
        self.run_r = [(i, j, value[k] * m.per_value if isinstance(m, Branch) else 1 / (value[k] * number(m)))
                      for k, i, j, m in t.run_r]

        volt = number(volt)
        v = held(t.holding, t.n, start_r, [(i, j, x * y) for (i, j, x), y in zip(self.start_c, t.whole)])
        self.u0 = [volt * (v[i] - v[j]) for i, j, _ in self.start_c]
        if t.scenario.own:
            for c, (k, *_) in enumerate(t.mains):
                if bank.parts[k].own is not None:
                    self.u0[c] = number(bank.parts[k].own)
        self.u0 = [self.u0[c] for c in t.main_of]
        self.scale = max([abs(x) for x in self.u0] + [mp.mpf(1) / 10**30])
        start = {i: mp.fsum(s * self.u0[c] for c, s in path) for i, path in t.tree.items()}
        for c in t.chords:
            i, j, _ = self.start_c[c]
            if abs(start[i] - start[j] - self.u0[c]) > self.scale / 10**9:
                raise Refused(f'the voltage of {bank.parts[t.capacitors[c][0]].id} contradicts others around a loop')
        self.y0 = [start[i] for i in t.state]

        # Charge that each node's capacitors hold; a resistive piece keeps its sum.
        self.charge0 = [mp.mpf(0)] * t.n
        for (i, j, x), u in zip(self.run_c, self.u0):
            self.charge0[i] += x * u
            self.charge0[j] -= x * u
        self.c = laplacian(t.n, self.run_c)
        self.v_inf = self._settled(t.clusters, t.free_clusters)
        self.y_inf = [self.v_inf[i] - self.v_inf[t.first[t.groups.of[i]]] for i in t.state]
        self._modes()

    def _settled(self, clusters, free):
        """Potentials when all has come to rest: one for each resistive piece, from the charges that can't leave it."""
        v = [mp.mpf(0)] * self.t.n
        if free:
            m = [clusters.members[k] for k in free]
            a = [[mp.fsum(self.c[i][j] for i in p for j in q) for q in m] for p in m]
            x, = solve(a, [[mp.fsum(self.charge0[i] for i in p) for p in m]])
            for p, value in zip(m, x):
                for i in p:
                    v[i] = value if abs(value) > self.scale / mp.mpf(10)**NOISE else mp.mpf(0)
        return v

    def _modes(self):
        t = self.t
        s, free = t.state, t.free_groups
        g = laplacian(t.n, self.run_r)
        groups = [t.groups.members[k] for k in free]
        # W, one column per state: what the free groups' potentials are for a unit of it.
        columns = [[-mp.fsum(g[i][j] for i in p) for p in groups] for j in s]
        between = [[mp.fsum(g[i][j] for i in p for j in q) for q in groups] for p in groups]
        w = solve(between, columns) if groups else [[] for _ in s]
        # node potentials for a unit of each state
        self.unit = []
        for k, j in enumerate(s):
            v = [mp.mpf(0)] * t.n
            v[j] += 1
            for p, value in zip(groups, w[k]):
                for i in p:
                    v[i] += value
            self.unit.append(v)
        m = len(s)
        if not m:
            self.rates, self.shapes, self.b = [], [], []
            return
        schur = [[mp.fsum(g[i][q] * self.unit[k][q] for q in range(t.n)) for k in range(m)] for i in s]
        lower = mp.cholesky(mp.matrix([[self.c[i][j] for j in s] for i in s]))
        low = [[lower[i, j] for j in range(m)] for i in range(m)]

        def forward(x):                       # L^-1 x
            x = list(x)
            for i in range(m):
                x[i] = (x[i] - mp.fsum(low[i][j] * x[j] for j in range(i))) / low[i][i]
            return x

        def backward(x):                      # L^-T x
            x = list(x)
            for i in reversed(range(m)):
                x[i] = (x[i] - mp.fsum(low[j][i] * x[j] for j in range(i + 1, m))) / low[i][i]
            return x

        half = [forward([schur[i][k] for i in range(m)]) for k in range(m)]       # columns of L^-1 S
        a = [forward([half[k][i] for k in range(m)]) for i in range(m)]           # rows of L^-1 S L^-T
        rates, q = symmetric([[(a[i][j] + a[j][i]) / 2 for j in range(m)] for i in range(m)])
        order = sorted(range(m), key=lambda k: abs(rates[k]))
        # the graph says how many do not decay; the numbers have to agree, by far
        fastest = max(g[i][i] / self.c[i][i] for i in s)
        for k in order[:t.trapped]:
            assert abs(rates[k]) <= fastest / mp.mpf(10)**NOISE, 'a trapped mode that decays'
        kept = order[t.trapped:]
        assert all(rates[k] > fastest / mp.mpf(10)**(NOISE - 10) for k in kept), 'a mode that should decay does not'
        vectors = [q[k] for k in kept]
        start = [mp.fsum(low[j][i] * self.y0[j] for j in range(i, m)) for i in range(m)]   # L' y0
        self.rates = [rates[k] for k in kept]
        self.b = [mp.fsum(x * y for x, y in zip(v, start)) for v in vectors]
        self.shapes = [backward(v) for v in vectors]

    # -- functionals of the state ------------------------------------------------------------------------------------

    def _terms(self, row, at_rest):
        """(value at rest, [(amplitude, rate)]) of the figure row.y, without amplitudes that are zero by structure."""
        terms = [(b * mp.fsum(r * x for r, x in zip(row, shape)), rate)
                 for b, shape, rate in zip(self.b, self.shapes, self.rates)]
        weight = mp.fsum(abs(r * y) for r, y in zip(row, self.y0)) + abs(at_rest)
        merged = []                           # rates come in ascending order; equal ones make one term
        for a, rate in terms:
            if merged and rate - merged[-1][1] <= rate / mp.mpf(10)**NOISE:
                merged[-1] = (merged[-1][0] + a, merged[-1][1])
            else:
                merged.append((a, rate))
        return at_rest, [(a, rate) for a, rate in merged if abs(a) > weight / mp.mpf(10)**NOISE]

    def voltage(self, pair):
        """Terms of the voltage across a pair of nodes; None where nothing joins the two."""
        i, j = pair
        if not self.t.defined(i, j):
            return None
        rest = self.v_inf[i] - self.v_inf[j]
        if abs(rest) < self.scale / mp.mpf(10)**NOISE:
            rest = mp.mpf(0)
        return self._terms([u[i] - u[j] for u in self.unit], rest)

    def _response(self, pair):
        """Potentials with one volt held across the pair after isolation: by reciprocity response'C v is the charge that
        a lasting short of the pair passes from state v."""
        i, j = pair
        holding = Holding(self.t.n, self.t.run_r, self.t.capacitors, i, j)
        return held(holding, self.t.n, self.run_r, self.run_c)

    def charge(self, pair):
        """Terms of the charge that a short closed at a moment, and kept, would pass."""
        if pair[0] == pair[1]:
            return mp.mpf(0), []
        z = self._response(pair)
        cz = [mp.fsum(x * y for x, y in zip(row, z)) for row in self.c]
        rest = mp.fsum(x * y for x, y in zip(cz, self.v_inf))
        if abs(rest) < self.size('charge', pair) / mp.mpf(10)**NOISE:
            rest = mp.mpf(0)
        return self._terms([cz[k] for k in self.t.state], rest)

    def size(self, kind, pair):
        """What a voltage or charge of this pair could come to: the yardstick for zero."""
        if kind == 'voltage' or pair[0] == pair[1]:
            return self.scale
        z = self._response(pair)
        return self.scale * mp.fsum(abs(mp.fsum(x * y for x, y in zip(row, z))) for row in self.c)

    def charge_by_balance(self, pair):
        """The charge at isolation once more, straight from its definition: with the short in place, the integrals W of
        the nodes' voltages (less their final values) and the charge Q satisfy  G W + d Q = C (v0 - v_end), d'W = 0."""
        i, j = pair
        t = self.t
        if i == j:
            return mp.mpf(0)
        shorted = Pieces(t.n, [(a, b) for _, a, b, _ in t.run_r] + [(i, j)])
        islands = Pieces(t.n, [(a, b) for a, b, _ in self.run_c] + [(a, b) for a, b, _ in self.run_r] + [(i, j)])
        grounds = {min(shorted.of[k] for k in m) for m in islands.members}
        end = self._settled(shorted, [k for k in range(shorted.count) if k not in grounds])
        moved = [q - mp.fsum(x * y for x, y in zip(row, end)) for q, row in zip(self.charge0, self.c)]
        zero = {m[0] for m in shorted.members}          # one node of each resistive piece is the integrals' zero
        keep = [k for k in range(t.n) if k not in zero]
        d = [mp.mpf((k == i) - (k == j)) for k in range(t.n)]
        g = laplacian(t.n, self.run_r)
        a = [[g[p][q] for q in keep] + [d[p]] for p in keep] + [[d[q] for q in keep] + [mp.mpf(0)]]
        x, = solve(a, [[moved[p] for p in keep] + [mp.mpf(0)]])
        return x[-1]

    def energy(self, time, pair=None):
        """Stored at a moment in all capacitors, or in those joined to the pair through any parts."""
        y = [r + mp.fsum(b * shape[k] * mp.exp(-rate * time) for b, shape, rate in zip(self.b, self.shapes, self.rates))
             for k, r in enumerate(self.y_inf)]
        v = [mp.mpf(0)] * self.t.n
        for k, value in zip(self.t.state, y):
            v[k] = value
        near = None if pair is None else {self.t.islands.of[k] for k in pair}
        return mp.fsum(x * (v[i] - v[j])**2 for i, j, x in self.run_c
                       if near is None or self.t.islands.of[i] in near) / 2

    def stored(self):
        """At isolation, from the capacitors' own voltages."""
        return mp.fsum(x * u**2 for (_, _, x), u in zip(self.run_c, self.u0)) / 2


# -- sums of exponentials --------------------------------------------------------------------------------------------

def value_at(figure, time):
    rest, terms = figure
    return rest + mp.fsum(a * mp.exp(-rate * time) for a, rate in terms)


def slope_at(figure, time):
    return -mp.fsum(a * rate * mp.exp(-rate * time) for a, rate in figure[1])


def last_crossing(figure, level):
    """The least T with |figure(t)| <= level for all t >= T; None if there is none."""
    rest, terms = figure
    worst = mp.mpf(0)
    for sign in (1, -1):
        t = _last_above(sign * rest - level, [(sign * a, rate) for a, rate in terms])
        if t is None:
            return None
        worst = max(worst, t)
    # A figure that starts on the level itself is at or below it from the start: no rounding past that.
    return worst if worst * max([r for _, r in terms], default=1) > mp.mpf(10)**-NOISE else mp.mpf(0)


def _horizon(rest, terms):
    """A time from which rest + sum a exp(-rate t) can't be above zero; None if it is in the end."""
    if rest > 0:
        return None
    if rest == 0:                      # then the slowest term decides
        terms = sorted(terms, key=lambda x: x[1])
        if not terms:
            return mp.mpf(0)
        a0, slow = terms[0]
        if a0 > 0:
            return None
        rest, terms = a0, [(a, rate - slow) for a, rate in terms[1:] if rate > slow]
    up = [(a, rate) for a, rate in terms if a > 0]
    return max([mp.mpf(0)] + [mp.log(len(up) * a / -rest) / rate for a, rate in up])


def _last_above(rest, terms):
    """The last moment at which g(t) = rest + sum a exp(-rate t) leaves the region g > 0 (0 if g <= 0 throughout; None
    if g stays above). Interval pruning from the right: growing and falling parts of g are monotone, so their values at
    an interval's ends bound g and g'. An interval is discarded where the bound proves g <= 0, closed by bisection where
    g' has one sign, and halved otherwise; nothing is skipped without proof."""
    end = _horizon(rest, terms)
    if end is None:
        return None
    if end == 0:
        return mp.mpf(0)

    # First in doubles, with a margin for their rounding in every comparison; what they can't decide, at all digits.
    fast = [(float(a), float(rate)) for a, rate in terms]
    size = abs(float(rest)) + sum(abs(a) for a, _ in fast)
    push = sum(abs(a * rate) for a, rate in fast)
    found = _bracket(float(rest), fast, float(end) * (1 + 1e-9), math.exp, 1e-12 * size, 1e-12 * push, 1e-12)
    if found == UNSURE:
        found = _bracket(rest, terms, end * (1 + mp.mpf(10)**-20), mp.exp, 0, 0, mp.mpf(10)**(-mp.mp.dps // 2))
    if found is None:
        return mp.mpf(0)
    low, high = (mp.mpf(x) for x in found)
    return high if low == high else _root(rest, terms, low, high)


def _bracket(rest, terms, end, exp, margin, slope_margin, narrow):
    """An interval that holds the last zero, and in which g is monotone; None if g <= 0 throughout."""
    def look(t):
        up = down = dup = ddown = 0 * rest
        for a, rate in terms:
            x = a * exp(-rate * t)
            if a > 0:
                up += x
                dup += rate * x
            else:
                down += x
                ddown += rate * x
        return t, up, down, dup, ddown

    g = lambda at: rest + at[1] + at[2]
    stack = [(look(0 * rest), look(end))]
    while stack:
        left, right = stack.pop()
        if rest + left[1] + right[2] <= -margin:        # greatest rising part, least falling part
            continue
        falls = -right[3] - left[4] <= -slope_margin    # greatest possible slope
        rises = -left[3] - right[4] >= slope_margin     # least possible slope
        if falls or rises:
            if margin and (abs(g(left)) <= margin or abs(g(right)) <= margin):
                return UNSURE
            if g(right) > 0:
                return right[0], right[0]               # only at an end already proven to be a crossing
            if g(left) > 0:
                return left[0], right[0]
            continue
        if right[0] - left[0] < right[0] * narrow:
            if margin:
                return UNSURE
            if g(left) > 0 or g(right) > 0:             # a graze too fine to resolve: the later end counts
                return right[0], right[0]
            continue
        middle = look((left[0] + right[0]) / 2)
        stack += [(left, middle), (middle, right)]
    return None


def _root(rest, terms, low, high):
    """The zero between low (g > 0) and high (g <= 0) of a monotone g: bisection in doubles for a first value, then
    Newton's steps, kept inside by bisection."""
    r, fast = float(rest), [(float(a), float(rate)) for a, rate in terms]
    lo, hi = float(low), float(high)
    for _ in range(200):
        t = (lo + hi) / 2
        if not lo < t < hi:
            break
        if r + sum(a * math.exp(-rate * t) for a, rate in fast) > 0:
            lo = t
        else:
            hi = t
    start = mp.mpf((lo + hi) / 2)
    if not low < start < high:
        start = (low + high) / 2
    return _close_in(rest, terms, low, high, start, mp.mpf(10)**(8 - mp.mp.dps))


def _close_in(rest, terms, low, high, t, tiny):
    for _ in range(2000):
        x, slope = rest, mp.mpf(0)
        for a, rate in terms:
            e = a * mp.exp(-rate * t)
            x += e
            slope -= rate * e
        if x > 0:
            low = t
        else:
            high = t
        step = t - x / slope if slope else low
        new = step if low <= step <= high else (low + high) / 2
        if abs(new - t) <= abs(t) * tiny or high - low <= abs(high) * tiny:
            return new
        t = new
    raise ArithmeticError('no root')


def last_above_by_rolle(rest, terms):
    """The same by another way, as a check: all zeros of g from those of (g exp(slowest t))', which has one term less;
    between two neighbours of these g exp(slowest t) is monotone and has at most one zero."""
    end = _horizon(rest, terms)
    if end is None:
        return None
    by_rate = {}
    for a, rate in [(rest, mp.mpf(0))] + list(terms):
        near = next((r for r in by_rate if abs(r - rate) <= abs(rate) / mp.mpf(10)**NOISE), rate)
        by_rate[near] = by_rate.get(near, mp.mpf(0)) + a
    whole = sorted((r, a) for r, a in by_rate.items() if a)
    roots = _all_zeros(whole, end * 2 + mp.mpf(10)**-30)
    g = lambda t: mp.fsum(a * mp.exp(-r * t) for r, a in whole)
    for k in reversed(range(len(roots))):
        before = (roots[k - 1] + roots[k]) / 2 if k else roots[k] / 2
        if g(before) > 0:
            return roots[k]
    return mp.mpf(0)


def _all_zeros(terms, end):
    """Zeros in (0, end) of sum a exp(-r t), r ascending."""
    if len(terms) < 2:
        return []
    slow = terms[0][0]
    shifted = [(r - slow, a) for r, a in terms]
    inner = _all_zeros([(r, -a * r) for r, a in shifted[1:]], end)
    g = lambda t: mp.fsum(a * mp.exp(-r * t) for r, a in shifted)
    edges = [mp.mpf(0)] + inner + [end]
    zeros = []
    for low, high in zip(edges, edges[1:]):
        x, y = g(low), g(high)
        if (x > 0) == (y > 0):
            continue
        for _ in range(400):
            t = (low + high) / 2
            if (g(t) > 0) == (x > 0):
                low = t
            else:
                high = t
            if high - low <= high * mp.mpf(10)**-40:
                break
        zeros.append((low + high) / 2)
    return zeros
