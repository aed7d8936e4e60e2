"""Procedures: a bank's figures step by step, and what comes back after the last.

Readings of the bank file's description, where its words leave room:
- A step that connects a supply: each of the three trials starts as if isolated from that voltage across the terminals,
  own voltages of capacitors dropped, absorption fully charged; the step's actual start is not among them.
- A supply's figures are its `series` resistance's: that current, the power and energy in that resistance.
- A capacitive group that no resistor joins to a terminal divides by capacitance with all absorption branches in it, as
  long charging from empty would leave it: its net charge is zero.
- A step's times are found on the healthy bank; the voltage of a test point at a step's end is with that step's parts.
"""
import itertools
from fractions import Fraction

import mpmath as mp
import numpy as np

import absorption
from bank import Refused
from exact import held, last_crossing, number
from network import Holding, Pieces, Scenario, Topology
from phase import Graph, Phase, at, peak, squared
from search import _newton
from steps_fast import Quick

FLOOR = mp.mpf(10)**-15      # a figure under this share of what the bank could show at isolation is given as 0


def keepable(x):
    """A time rounded up to one that people can keep."""
    if x is None:
        return None
    for under, unit in ((120, 1), (1200, 10), (None, 60)):
        if under is None or x < under:
            return Fraction(int(mp.ceil(x / unit)) * unit)


class Plan:
    """The procedure's circuits, without values."""

    def __init__(self, bank):
        self.bank = bank
        self.parts = bank.parts + bank.extra
        names = list(bank.terminals)
        for part in self.parts:
            names += [x for x in (part.a, part.b) if x not in names]
        self.index = {x: k for k, x in enumerate(names)}
        self.outer = len(names)                     # nodes from here on are inside capacitors
        ends = lambda k: (self.index[self.parts[k].a], self.index[self.parts[k].b])
        self.main = [(k, *ends(k)) for k, p in enumerate(self.parts) if p.kind == 'C']
        self.whole = [1] * len(self.main)           # C with all its branches, over C
        self.branches = []                          # (capacitor, its node, inner node, other node, share, tau)
        n = self.outer
        for c, (k, i, j) in enumerate(self.main):
            if self.parts[k].absorption:
                x = absorption.share(self.parts[k])
                self.whole[c] = 1 + len(absorption.times(self.parts[k])) * x
                for tau in absorption.times(self.parts[k]):
                    self.branches.append((c, i, n, j, x, tau))
                    n += 1
        self.n = n
        self.cap_ends = [(i, j) for _, i, j in self.main] + [(x, j) for _, _, x, j, _, _ in self.branches]
        self.always = [k for k, p in enumerate(bank.parts) if p.kind == 'R']
        self.by_id = {p.id: k for k, p in enumerate(self.parts)}
        self.connected, now = [], set()
        for step in bank.steps:
            now = (now | {self.by_id[x] for x in step.connect}) - {self.by_id[x] for x in step.disconnect}
            self.connected.append(tuple(sorted(self.always + list(now))))
        self.pairs = [tuple(self.index[x] for x in p) for p in bank.pairs]
        self.loose = [k for k, p in enumerate(self.parts) if p.loose]
        self.graphs = {}
        resistors = [(None, *ends(k), None) for k in self.always]
        self.holding = Holding(self.outer, resistors, [(None, i, j, None) for _, i, j in self.main],
                               self.index[bank.terminals[0]], self.index[bank.terminals[-1]])
        self.links = lambda on: [ends(k) for k in on] + [(i, x) for _, i, x, _, _, _ in self.branches]

    def graph(self, on):
        if on not in self.graphs:
            self.graphs[on] = Graph(self.n, self.cap_ends, self.links(on))
        return self.graphs[on]

    def paths(self):
        """For each state node the capacitors on its way to its group's first node, own voltages first."""
        order = sorted(range(len(self.cap_ends)), key=lambda c: self._own(c) is None)
        joined, tree = Pieces(self.n, []), []
        for c in order:
            i, j = self.cap_ends[c]
            if joined.find(i) != joined.find(j):
                joined.parent[joined.find(i)] = joined.find(j)
                tree.append(c)
        g = self.graph(tuple(self.always))
        found = {f: [] for f in g.first}
        while len(found) < self.n:
            for c in tree:
                i, j = self.cap_ends[c]
                if i in found and j not in found:
                    found[j] = found[i] + [(c, -1)]
                elif j in found and i not in found:
                    found[i] = found[j] + [(c, 1)]
        return [found[i] for i in g.state]

    def _own(self, c):
        c = c if c < len(self.main) else self.branches[c - len(self.main)][0]
        return self.parts[self.main[c][0]].own


class Point:
    """A procedure at one point of the tolerance box."""

    def __init__(self, plan, u, volt):
        self.plan, self.volt = plan, number(volt)
        f = [Fraction(1)] * len(plan.parts)
        for k, x in zip(plan.loose, u):
            p = plan.parts[k]
            f[k] = 1 - p.low if x == 0 else 1 + p.high if x == 1 else number(1 - p.low) + number(p.low + p.high) * x
        self.value = [number(p.value) * number(x) for p, x in zip(plan.parts, f)]
        v = self.value
        self.caps = [(i, j, v[k]) for k, i, j in plan.main]
        self.caps += [(x, j, v[plan.main[c][0]] * s) for c, _, x, j, s, _ in plan.branches]
        self.inner = [(i, x, v[plan.main[c][0]] * s / tau, mp.mpf(0)) for c, i, x, _, s, tau in plan.branches]
        links = [(plan.index[plan.parts[k].a], plan.index[plan.parts[k].b], 1 / v[k]) for k in plan.always]
        whole = [(i, j, v[k] * plan.whole[c]) for c, (k, i, j) in enumerate(plan.main)]
        self.hold = held(plan.holding, plan.outer, links, whole)
        self.start = self.charged(self.volt, True)
        self.scale = max(abs(x) for x in self.u0)
        self.runs, self.states, self.lasts = [], [self.start], []
        self.phases = {}

    def charged(self, volt, own):
        u = [volt * (self.hold[i] - self.hold[j]) for _, i, j in self.plan.main]
        if own:
            u = [x if self.plan._own(c) is None else number(self.plan._own(c)) for c, x in enumerate(u)]
        u += [u[c] for c, *_ in self.plan.branches]
        self.u0 = u
        return [mp.fsum(s * u[c] for c, s in path) for path in self.plan.paths()]

    def phase(self, on):
        if on not in self.phases:
            p = self.plan
            links = [(p.index[p.parts[k].a], p.index[p.parts[k].b], 1 / self.value[k],
                      number(p.parts[k].volt) if p.parts[k].kind == 'S' else mp.mpf(0)) for k in on]
            self.phases[on] = Phase(p.graph(on), self.caps, links + self.inner)
        return self.phases[on]

    def begin(self, k):
        """The run of step k; all before must be known."""
        if len(self.runs) == k:
            self.runs.append(self.phase(self.plan.connected[k]).run(self.states[k]))
        return self.runs[k]

    def finish(self, k, lasts):
        if len(self.states) == k + 1:
            self.lasts.append(number(lasts))
            self.states.append(self.begin(k).state(self.lasts[k]))

    def trials(self, k):
        """The runs of step k that count for its parts."""
        p = self.plan
        if any(p.parts[p.by_id[x]].kind == 'S' for x in p.bank.steps[k].connect):
            phase = self.phase(p.connected[k])
            return [phase.run(self.charged(number(v), False)) for v in (0, p.bank.nominal, p.bank.highest)]
        return [self.begin(k)]


def currents(point, run, part):
    """Terms of the current through the whole part."""
    p = point.plan
    rest, terms = run.voltage((p.index[part.a], p.index[part.b]))
    r = point.value[p.by_id[part.id]]
    if part.kind == 'S':
        rest, terms = number(part.volt) - rest, [(-a, x) for a, x in terms]
        # at rest a lone supply carries nothing: what is left is rounding
        rest = mp.mpf(0) if abs(rest) < number(part.volt) / mp.mpf(10)**50 else rest
    return rest / r, [(a / r, x) for a, x in terms]


def figure(point, what):
    """One figure at a point, as (value, extra)."""
    kind, k, which = what
    if kind == 'until':
        step = point.plan.bank.steps[k]
        terms = point.begin(k).voltage(tuple(point.plan.index[x] for x in step.at))
        return last_crossing(terms, number(step.below)), None
    if kind == 'voltage':
        run = point.begin(k)
        terms = run.voltage(point.plan.pairs[which])
        return (None if terms is None else abs(at(terms, point.lasts[k]))), None
    if kind == 'recovery':
        run = point.phase(point.plan.connected[-1]).run(point.states[-1])
        terms = run.voltage(point.plan.pairs[which])
        if terms is None:
            return None, None
        x, t = peak(terms)
        return x, None if t is None else mp.fsum(point.lasts) + t
    part, best = point.plan.parts[which], mp.mpf(0)
    for run in point.trials(k):
        terms = currents(point, run, part)
        if kind == 'energy':
            x = point.value[which] * squared(terms, point.lasts[k]) / (part.series * part.parallel)
        else:
            x = peak(terms, point.lasts[k])[0]
            x = x / part.parallel if kind == 'current' else point.value[which] * x**2 / (part.series * part.parallel)
        best = max(best, x)
    return best, None


def figures_of(plan):
    out = []
    for k, on in enumerate(plan.connected):
        out += [('voltage', k, p) for p in range(len(plan.pairs))]
        out += [(kind, k, part) for part in on for kind in ('current', 'power', 'energy')]
    return out + [('recovery', 0, p) for p in range(len(plan.pairs))]


class Box:
    def __init__(self, plan):
        self.plan, self.d = plan, len(plan.loose)
        self.corners = list(itertools.product((0, 1), repeat=self.d))
        self.points, self.lasts, self.volt = {}, [], number(plan.bank.highest)

    def point(self, u, what):
        """A point, run as far as this figure needs."""
        u = tuple(u)
        if u not in self.points:
            self.points[u] = Point(self.plan, u, self.plan.bank.highest)
        p = self.points[u]
        kind, last, _ = what
        for k, x in enumerate(self.lasts if kind == 'recovery' else self.lasts[:last] if kind == 'until'
                              else self.lasts[:last + 1]):
            p.finish(k, x)
        return p

    def worst(self, whats):
        """{figure: (value, extra, inside)}: all corners exactly; in doubles a search of the inside from the best corner
        and the best of random points. Where the exact slopes at the best corner point into the box, or doubles find
        more than a corner by far, what they found is polished exactly."""
        best, values = {}, {}
        for what in whats:
            got = [figure(self.point(u, what), what) for u in self.corners]
            values[what] = [x for x, _ in got]
            k = next((i for i, (x, _) in enumerate(got) if x is None),
                     None if not got else max(range(len(got)), key=lambda i: mp.mpf(-1) if got[i][0] is None else got[i][0]))
            best[what] = (*got[k], None, self.corners[k])
        if not self.d:
            return {w: b[:3] for w, b in best.items()}
        quick = Quick(self.plan, self.lasts)
        rng = np.random.default_rng(20261201)
        cloud = rng.random((20 * self.d + 20, self.d))
        half = cloud[len(cloud) // 2:]                   # of these, most parameters go to an end
        half[:] = np.where(rng.random(half.shape) < 0.6, np.round(half), half)
        known = {}

        def ask(u, what):
            u = tuple(float(x) for x in u)
            if u not in known:
                known[u] = quick.point(u)
            return known[u].value_of(what)

        todo = [w for w in whats if best[w][0] is not None and best[w][0] > self.tiny(w)]
        found = {}
        with np.errstate(all='ignore'):
            for what in todo:
                top = best[what][3]
                seen = [(ask(u, what), tuple(u)) for u in cloud]
                for value, u in [(ask(top, what), top), max(seen)]:
                    step = 0.5
                    while step >= 2.0**-10:
                        near = [tuple(min(1.0, max(0.0, x + s * step)) if i == k else x for i, x in enumerate(u))
                                for k in range(self.d) for s in (-1, 1)]
                        new = max((ask(w, what), w) for w in near)
                        if new[0] > value * (1 + 1e-12):
                            value, u = new
                        else:
                            step /= 2
                    found.setdefault(what, []).append((value, u))
                low = ask(top, what)
                best_inside = max(((v, u) for v, u in found[what] if any(0 < x < 1 for x in u)), default=(0, None))
                rises = self.rises(what, top, best[what][0])
                if rises and best_inside[0] <= low:
                    raise ArithmeticError(f'{what}: rises from its best corner {top} into the box, and no way was found')
                # what doubles call greater where the exact slopes say otherwise is their rounding, unless it is far off
                if best_inside[0] > low * (1 + (0 if rises else 1e-7)):
                    u = best_inside[1]
                    free = [i for i, x in enumerate(u) if 0 < x < 1]
                    w = _newton(lambda v: figure(self.point(v, what), what)[0], [mp.mpf(x) for x in u], free)
                    got = figure(self.point(w, what), what)
                    if got[0] > best[what][0] * (1 + mp.mpf(10)**-40):
                        best[what] = (*got, [mp.nstr(x, 17) for x in w], tuple(w))
                    elif rises:
                        raise ArithmeticError(f'{what}: rises from its best corner {top} into the box')
        self.points = {u: p for u, p in self.points.items() if u in self.corners}
        return {w: b[:3] for w, b in best.items()}

    def rises(self, what, corner, value):
        """Is there, exactly, a way up from this corner into the box along one parameter?"""
        h = mp.mpf(10)**-24
        for k in range(self.d):
            w = [mp.mpf(x) for x in corner]
            w[k] += h if w[k] == 0 else -h
            if figure(self.point(w, what), what)[0] > value * (1 + h * mp.mpf(10)**-12):
                return True
        return False

    def tiny(self, what):
        """Under this the corners alone are searched."""
        kind, k, which = what
        if kind == 'until':
            return mp.mpf(0)
        part = self.plan.parts[which]
        v = self.volt / mp.mpf(10)**9
        if kind in ('voltage', 'recovery'):
            return v
        r = number(part.value)
        return v / r if kind == 'current' else v * v / r * (1 if kind == 'power' else number(self.lasts[k]))

    def solve(self):
        """Durations of all steps, and (raw until) of those that have one."""
        raw = []
        for k, step in enumerate(self.plan.bank.steps):
            x = None
            if step.lasts is None:
                what = ('until', k, None)
                x = self.worst([what])[what][0]
                if x is None:
                    raise Refused(f'step {k + 1}: its until never comes')
            raw.append(x)
            self.lasts.append(step.lasts if step.lasts is not None else keepable(x))
        return raw


def nominal(plan, lasts):
    middle = Point(plan, [p.low / (p.low + p.high) for p in (plan.parts[k] for k in plan.loose)], plan.bank.nominal)
    for k, x in enumerate(lasts):
        middle.finish(k, x)
    return middle


def balance(point):
    """Energy stored at a step's start and from its sources = stored at its end and turned into heat."""
    p = point.plan

    def stored(y):
        v = [mp.mpf(0)] * p.n
        for i, x in zip(p.graph(tuple(p.always)).state, y):
            v[i] = x
        return mp.fsum(c * (v[i] - v[j])**2 for i, j, c in point.caps) / 2

    for k, lasts in enumerate(point.lasts):
        run, heat, given = point.begin(k), mp.mpf(0), mp.mpf(0)
        for x in p.connected[k]:
            rest, terms = currents(point, run, p.parts[x])
            heat += point.value[x] * squared((rest, terms), lasts)
            if p.parts[x].kind == 'S':
                charge = rest * lasts - mp.fsum(a * mp.expm1(-r * lasts) / r for a, r in terms)
                given += number(p.parts[x].volt) * charge
        heat += mp.fsum(g * squared(run.voltage((i, x)), lasts) for i, x, g, _ in point.inner)
        before, after = stored(point.states[k]), stored(point.states[k + 1])
        assert abs(before + given - after - heat) <= (before + abs(given)) * mp.mpf(10)**-40, 'energy out of balance'


def compute(bank, show):
    if not bank.steps:
        return None
    plan = Plan(bank)
    box = Box(plan)
    raw = box.solve()
    got = box.worst(figures_of(plan))
    middle = nominal(plan, box.lasts)
    mp.mp.dps += 60
    try:
        again = nominal(Plan(bank), box.lasts)
        for what in figures_of(plan):
            x, y = figure(middle, what)[0], figure(again, what)[0]
            assert x is None or abs(x - y) <= y * mp.mpf(10)**-30 or y < box.tiny(what) / 10**12, f'few digits: {what}'
        balance(again)
    finally:
        mp.mp.dps -= 60
    v_scale = max([next(iter(box.points.values())).scale, number(bank.highest)] +
                  [number(p.volt) for p in bank.extra if p.kind == 'S'])
    cut = lambda x: x if x is None or x > FLOOR * v_scale else mp.mpf(0)

    def shown(kind, k, x):
        """A part's figure; 0 where the voltage across it would be under FLOOR."""
        r, least = number(plan.parts[x].value), FLOOR * v_scale
        floor = {'current': least / r, 'power': least**2 / r, 'energy': least**2 / r * number(box.lasts[k])}[kind]
        value = got[(kind, k, x)][0]
        return show(value if value > floor else mp.mpf(0))

    out, start = [], Fraction(0)
    for k, step in enumerate(bank.steps):
        end = start + box.lasts[k]
        row = {'step': step.name, 'start_s': show(number(start)), 'end_s': show(number(end))}
        if raw[k] is not None:
            row['until_s'] = show(raw[k])
        row['test_points'] = [{'across': list(names), 'nominal_v': show(cut(figure(middle, ('voltage', k, p))[0])),
                               'highest_v': show(cut(got[('voltage', k, p)][0]))} for p, names in enumerate(bank.pairs)]
        inside = [w[0] + ' ' + (plan.parts[w[2]].id if w[0] != 'voltage' else '-'.join(bank.pairs[w[2]]))
                  for w, (_, _, u) in got.items() if u and w[1] == k and w[0] != 'recovery']
        if inside:
            row['inside'] = inside
        row['parts'] = [{'id': plan.parts[x].id, 'peak_current_a': shown('current', k, x),
                         'peak_power_w': shown('power', k, x),
                         'energy_j': shown('energy', k, x)} for x in plan.connected[k]]
        out.append(row)
        start = end
    recovery = []
    for p, names in enumerate(bank.pairs):
        x, t, _ = got[('recovery', 0, p)]
        recovery.append({'across': list(names), 'voltage_v': show(cut(x)), 'at_s': show(t)})
    return {'steps': out, 'recovery': recovery}
