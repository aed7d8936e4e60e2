"""The worst of a figure over the tolerance box, inside it too.

1. All corners, the middle and random points of box and faces, in doubles.
2. From the best few of them a pattern search (steps along each parameter, halved when none helps).
3. The points found, and every corner that comes near the best, in exact arithmetic; a point inside, or on a face, is
   polished by Newton's method there, so that its figure is right to more digits than are published.
Nothing here proves that a box has no higher peak elsewhere; the tool under test searches in its own way, and two
independent searches agreeing is the evidence.
"""
import itertools
from dataclasses import dataclass
from fractions import Fraction

import mpmath as mp
import numpy as np

from exact import Exact, last_crossing, number, slope_at, value_at
from fast import Fast
from network import Topology

STIFF = 1e9        # fastest over slowest rate past which doubles are not trusted to rank the points
FLOOR = mp.mpf(10)**-15    # a figure at a moment under this share of what the bank could show at isolation is given as 0
SMALL = mp.mpf(10)**-5     # under this share the ranking of corners by doubles is checked exactly, end by end
CORNERS = 10       # up to so many loose parameters all corners are tried


@dataclass
class Worst:
    value: object             # an mpf; None for a wait that never ends
    at: dict | None = None    # factors on the loose parts
    inside: bool = False      # not at a corner
    slope: object = None      # of a wait: d|v|/dt at the crossing
    undefined: bool = False   # nothing joins the two nodes


def figure_value(circuit, figure, with_slope=False):
    kind, names, level = figure
    level = number(level)
    if kind == 'energy':
        x = circuit.energy(level, None if names is None else circuit.t.pair(names))
        x = x if x > FLOOR * circuit.stored() else mp.mpf(0)
        return (x, None) if with_slope else x
    pair = circuit.t.pair(names)
    terms = circuit.charge(pair) if kind.startswith('charge') else circuit.voltage(pair)
    slope = None
    if kind in ('wait', 'charge wait'):
        x = last_crossing(terms, level)
        if x:
            slope = slope_at(terms, x) * mp.sign(value_at(terms, x))
    elif kind == 'settles':
        x = abs(terms[0])
    else:
        x = abs(value_at(terms, level))
        x = x if x > FLOOR * circuit.size(kind, pair) else mp.mpf(0)
    return (x, slope) if with_slope else x


class Box:
    """Points are lists of numbers from 0 to 1, one for each loose part that is in the circuit at all."""

    def __init__(self, bank, topology):
        self.parts = bank.parts
        used = {k for k, *_ in topology.capacitors + topology.run_r + topology.start_r}
        self.loose = [k for k in bank.loose if k in used]

    def exact_factors(self, u):
        f = [Fraction(1)] * len(self.parts)
        for k, x in zip(self.loose, u):
            p = self.parts[k]
            f[k] = 1 - p.low if x == 0 else 1 + p.high if x == 1 else number(1 - p.low) + number(p.low + p.high) * x
        return [number(x) for x in f]

    def fast_factors(self, points):
        f = np.ones((len(points), len(self.parts)))
        for c, k in enumerate(self.loose):
            p = self.parts[k]
            f[:, k] = float(1 - p.low) + float(p.low + p.high) * points[:, c]
        return f

    def middle(self):
        return [float(self.parts[k].low / (self.parts[k].low + self.parts[k].high)) for k in self.loose]


class Doubles:
    def __init__(self, topology, box, volt, figures):
        self.fast, self.box, self.figures = Fast(topology, volt), box, figures

    def all(self, points):
        return self.fast.values(self.figures, self.box.fast_factors(points))

    def one(self, points, which):
        blocks = [slice(k, k + 4096) for k in range(0, len(points), 4096)]
        factors = self.box.fast_factors(points)
        return np.concatenate([self.fast.values(self.figures, factors[b], which[b]) for b in blocks])


class Slow:
    """The same questions put to exact circuits, for networks too stiff for doubles."""

    def __init__(self, circuit_at, figures):
        self.circuit_at, self.figures = circuit_at, figures

    def _value(self, u, f):
        x = figure_value(self.circuit_at(tuple(u)), self.figures[f])
        return np.inf if x is None else float(x)

    def all(self, points):
        return np.array([[self._value(u, f) for f in range(len(self.figures))] for u in points])

    def one(self, points, which):
        return np.array([self._value(u, f) for u, f in zip(points, which)])


def worst(bank, scenario, figures, volt, topology=None):
    """{figure: Worst} over the box, charged to `volt`."""
    t = topology or Topology(bank, scenario)
    box = Box(bank, t)
    d = len(box.loose)
    known = {}

    def circuit_at(u):
        if u not in known:
            if len(known) > 3000:
                known.clear()
            known[u] = Exact(t, box.exact_factors(u), volt)
        return known[u]

    out = {}
    todo = []
    for figure in figures:
        names = figure[1]
        if names is not None and not t.defined(*t.pair(names)):
            out[figure] = Worst(None, undefined=True)
        else:
            todo.append(figure)
    if d == 0:
        circuit = circuit_at(())
        for figure in todo:
            x, slope = figure_value(circuit, figure, True)
            out[figure] = Worst(x, {}, False, slope)
        return out

    rng = np.random.default_rng(20240229)
    corners = np.array(list(itertools.product((0.0, 1.0), repeat=d))) if d <= CORNERS \
        else rng.integers(0, 2, (2**CORNERS, d)).astype(float)
    stiff = True
    with np.errstate(all='ignore'):
        try:
            rates = Fast(t, volt).circuits(box.fast_factors(corners))['rates']
            stiff = rates.size > 0 and not rates.max() < STIFF * rates.min()
        except np.linalg.LinAlgError:
            pass
    ask = Slow(circuit_at, todo) if stiff else Doubles(t, box, volt, todo)
    count = 3 * d if stiff else 200 + 40 * d
    inner = rng.random((count, d))
    half = inner[count // 2:]                              # of these, most parameters go to an end
    half[:] = np.where(rng.random(half.shape) < 0.6, np.round(half), half)
    points = np.vstack([corners, [box.middle()], inner])
    values = ask.all(points)
    found = _climb(ask, points, values, len(corners), stiff)
    for f, figure in enumerate(todo):
        if np.isinf(values[:, f]).any():
            u = points[np.nonzero(np.isinf(values[:, f]))[0][0]]
            out[figure] = Worst(None, _at(bank, box, u), not set(u) <= {0.0, 1.0})
            continue
        out[figure] = _exact_best(bank, box, circuit_at, figure, corners, values[:len(corners), f], found[f],
                                  1e-6 if not stiff else 1e-12)
    return out


def _climb(ask, points, values, corners, stiff):
    """Pattern search for all figures together; for each figure a list of (point, value, greatest relative change seen
    along each parameter)."""
    d = points.shape[1]
    starts = []                                   # (figure, point, value)
    for f in range(values.shape[1]):
        v = values[:, f]
        if np.isinf(v).any():
            continue
        order = np.argsort(-v, kind='stable')
        picks = [order[0]]
        if not stiff:
            picks += [order[order < corners][0]] + list(order[order >= corners][:2])
        for k in dict.fromkeys(picks):
            starts.append((f, points[k], v[k]))
    n = len(starts)
    found = [[] for _ in range(values.shape[1])]
    if not n:
        return found
    which = np.array([s[0] for s in starts])
    x = np.array([s[1] for s in starts])
    best = np.array([s[2] for s in starts])
    step = np.full(n, 0.5)
    last = 2.0**-5 if stiff else 2.0**-14
    swing = np.zeros((n, d))                      # the greatest relative change seen along each parameter
    for _ in range(120):
        live = np.nonzero(step >= last)[0]
        if not len(live):
            break
        trial, owner, along = [], [], []
        for k in live:
            for i in range(d):
                for sign in (-1, 1):
                    y = min(1.0, max(0.0, x[k, i] + sign * step[k]))
                    if y != x[k, i]:
                        p = x[k].copy()
                        p[i] = y
                        trial.append(p)
                        owner.append(k)
                        along.append(i)
        trial, owner, along = np.array(trial), np.array(owner), np.array(along)
        got = ask.one(trial, which[owner])
        for k in live:
            mine = np.nonzero(owner == k)[0]
            change = got[mine] - best[k]
            np.maximum.at(swing[k], along[mine], np.abs(change) / max(abs(best[k]), 1e-300))
            top = mine[np.argmax(got[mine])]
            if got[top] > best[k] * (1 + 1e-13) + 1e-300:
                x[k], best[k] = trial[top], got[top]
            else:
                step[k] /= 2 if not stiff else 4
    for k in range(n):
        found[which[k]].append((x[k], best[k], swing[k]))
    return found


def _at(bank, box, u):
    f = box.exact_factors([x if x in (0, 1) else mp.mpf(x) for x in u])
    return {bank.parts[k].id: f[k] for k in box.loose}


def _exact_best(bank, box, circuit_at, figure, corners, corner_values, found, near):
    """Exact figures at the candidates, those inside polished; the greatest counts."""
    top = max([f[1] for f in found] + [corner_values.max()])
    swing = max((f for f in found), key=lambda f: f[1])[2]
    candidates = []
    for k in np.argsort(-corner_values, kind='stable')[:4]:
        if corner_values[k] >= top * (1 - near):
            candidates.append((corners[k], []))
    peaks = []
    for x, value, moves in sorted(found, key=lambda f: -f[1]):
        # starts that climbed to one peak count once; a parameter that does not matter goes to its nearest end
        flat = moves < 1e-11
        x = np.where(flat, np.round(x), x)
        if value >= top * (1 - 1e-6) and not any(np.abs(x - y)[~flat].max(initial=0) < 2e-3 for y in peaks):
            peaks.append(x)
            candidates.append((x, [i for i, v in enumerate(x) if 0 < v < 1]))
    best = None
    value = lambda w: figure_value(circuit_at(tuple(w)), figure)

    def consider(u, free):
        nonlocal best
        got, slope = figure_value(circuit_at(tuple(u)), figure, True)
        if got is None:
            best = Worst(None, _at(bank, box, u), bool(free))
        elif best is None or got > best.value * (1 + mp.mpf(10)**-40):
            best = Worst(got, _at(bank, box, u), any(0 < u[i] < 1 for i in free), slope)
            return True
        return False

    chosen = None
    for x, free in candidates:
        u = [mp.mpf(float(v)) for v in x]
        if free:
            u = _newton(value, u, free)
        if consider(u, free):
            chosen = u, free
        if best.value is None:
            return best
    # Parameters whose effect drowns in the rounding of doubles: their better end, exactly.
    u, free = chosen
    kind, names, level = figure
    small = kind in ('voltage', 'charge', 'energy') and level and best.value
    if small:
        circuit = circuit_at(tuple(u))
        size = circuit.stored() if kind == 'energy' else circuit.size(kind, circuit.t.pair(names))
        small = best.value < SMALL * size
    for i in [i for i in range(len(u)) if (small or swing[i] < 1e-8) and i not in free]:
        other = list(u)
        other[i] = 1 - u[i]
        if consider(other, free):
            u = other
        if best.value is None:
            return best
    return best


def _newton(value, u, free):
    """Climb to the stationary point near u over the free parameters, to some 30 digits; ends of the box pin."""
    h = mp.mpf(10)**-24
    u, free = list(u), list(free)
    now = value(u)
    if now is None:
        return u
    for _ in range(40):
        if not free:
            break

        def moved(*steps):
            w = list(u)
            for i, s in steps:
                w[i] += s
            return value(w)

        up = {i: moved((i, h)) for i in free}
        down = {i: moved((i, -h)) for i in free}
        if any(x is None for x in list(up.values()) + list(down.values())):
            return u
        grad = [(up[i] - down[i]) / (2 * h) for i in free]
        hess = [[mp.mpf(0)] * len(free) for _ in free]
        for a, i in enumerate(free):
            hess[a][a] = (up[i] - 2 * now + down[i]) / h**2
            for b in range(a):
                j = free[b]
                both = moved((i, h), (j, h))
                hess[a][b] = hess[b][a] = (both - up[i] - up[j] + now) / h**2
        size = abs(now) + mp.mpf(10)**-300
        dead = [i for a, i in enumerate(free) if abs(grad[a]) + abs(hess[a][a]) < size * mp.mpf(10)**-20]
        if dead:                                          # does not matter at all
            free = [i for i in free if i not in dead]
            continue
        try:
            # a ridge or saddle: lift the curvature until the step climbs
            shift = max([mp.mpf(0)] + list(mp.eigsy(mp.matrix(hess), eigvals_only=True)))
            bend = mp.matrix(hess) - (2 * shift if shift > 0 else 0) * mp.eye(len(free))
            step = mp.lu_solve(bend, -mp.matrix(grad))
        except ZeroDivisionError:
            return u
        scale, pinned = mp.mpf(1), None
        for a, i in enumerate(free):                      # stay inside the box
            for end in (0, 1):
                if step[a] and (end - u[i]) / step[a] >= 0 and (end - u[i]) / step[a] < scale:
                    scale, pinned = (end - u[i]) / step[a], (i, end)
        moved_by = mp.mpf(0)
        for _ in range(60):
            w = list(u)
            for a, i in enumerate(free):
                w[i] += scale * step[a]
            if pinned:
                w[pinned[0]] = mp.mpf(pinned[1])
            new = value(w)
            if new is None:
                return w
            if new >= now:
                moved_by = max(abs(w[i] - u[i]) for i in free)
                u, now = w, new
                break
            scale, pinned = scale / 2, None
        else:
            return u
        if pinned:
            free = [i for i in free if i != pinned[0]]
        elif moved_by < mp.mpf(10)**-28:
            break
    return u
