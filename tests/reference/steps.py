"""Procedures: a bank's figures step by step, and what comes back after the last.

Readings of the bank file's description, where its words leave room:
- A step that connects a supply: each of the three trials starts as if isolated from that voltage across the terminals,
  own voltages of capacitors dropped, absorption fully charged; the step's actual start is not among them.
- A supply's figures are its `series` resistance's: that current, the power and energy in that resistance.
- A capacitive group that no resistor joins to a terminal divides by the main capacitances; absorption is charged to that.
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
        self.branches = []                          # (capacitor, its node, inner node, other node, share, tau)
        n = self.outer
        for c, (k, i, j) in enumerate(self.main):
            if self.parts[k].absorption:
                x = absorption.share(self.parts[k])
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
        self.hold = held(plan.holding, plan.outer, links, self.caps[:len(plan.main)])
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
        self.points, self.lasts = {}, []

    def point(self, u):
        u = tuple(u)
        if u not in self.points:
            self.points[u] = Point(self.plan, u, self.plan.bank.highest)
        p = self.points[u]
        for k, x in enumerate(self.lasts):
            p.finish(k, x)
        return p

    def worst(self, what):
        """(value, extra)"""
        best = None
        for u in self.corners:
            got = figure(self.point(u), what)
            if best is None or (got[0] is not None and got[0] > best[0]):
                best = got
            if got[0] is None:
                return got
        return best

    def solve(self):
        """Durations of all steps, and (raw until) of those that have one."""
        raw = []
        for k, step in enumerate(self.plan.bank.steps):
            x = None
            if step.lasts is None:
                x, _ = self.worst(('until', k, None))
                if x is None:
                    raise Refused(f'step {k + 1}: its until never comes')
            raw.append(x)
            self.lasts.append(step.lasts if step.lasts is not None else keepable(x))
        return raw


def compute(bank, show):
    if not bank.steps:
        return None
    plan = Plan(bank)
    box = Box(plan)
    raw = box.solve()
    middle = Point(plan, [p.low / (p.low + p.high) for p in (plan.parts[k] for k in plan.loose)], bank.nominal)
    for k, x in enumerate(box.lasts):
        middle.finish(k, x)
    v_scale = max([box.point(box.corners[0]).scale, number(bank.highest)] +
                  [number(p.volt) for p in bank.extra if p.kind == 'S'])
    cut = lambda x: x if x is None or x > FLOOR * v_scale else mp.mpf(0)
    got = {what: box.worst(what) for what in figures_of(plan)}
    out, start = [], Fraction(0)
    for k, step in enumerate(bank.steps):
        end = start + box.lasts[k]
        row = {'step': step.name, 'start_s': show(number(start)), 'end_s': show(number(end))}
        if raw[k] is not None:
            row['until_s'] = show(raw[k])
        row['test_points'] = [{'across': list(names), 'nominal_v': show(cut(figure(middle, ('voltage', k, p))[0])),
                               'highest_v': show(cut(got[('voltage', k, p)][0]))} for p, names in enumerate(bank.pairs)]
        row['parts'] = [{'id': plan.parts[x].id, 'peak_current_a': show(got[('current', k, x)][0]),
                         'peak_power_w': show(got[('power', k, x)][0]),
                         'energy_j': show(got[('energy', k, x)][0])} for x in plan.connected[k]]
        out.append(row)
        start = end
    recovery = []
    for p, names in enumerate(bank.pairs):
        x, t = got[('recovery', 0, p)]
        recovery.append({'across': list(names), 'voltage_v': show(cut(x)), 'at_s': show(t)})
    return {'steps': out, 'recovery': recovery}
