#!/usr/bin/env python3
"""The reference for banks that were charged from three phases: figures of three-phase/*.yaml by another route.

  three_phase.py make     three-phase.json from all of three-phase/*.yaml
  three_phase.py check    make it again and compare; exit status 1 on a difference

What the poles leave is found here in the time domain: at a given angle of the sources the potentials of all nodes follow
from the closed poles and from the charges on the nodes that float. A pole opens at the angle at which its charge turns,
with the charge of that moment. Every order of the poles is tried, and both turns of every later one. No phasor is split
into parts, and no state is left out because another one equals it.

The discharge is that of exact.py: node potentials and a symmetric eigenproblem, at 60 digits. Doubles rank the corners of
the tolerance box and search inside it from the best; the figures themselves are then computed exactly at the point found.
Resistors take no part before the last pole has opened. Every capacitor here lies between terminals and earth, so that no
node is without one. Needs requirements.txt.
"""
import os

for _name in ('OPENBLAS_NUM_THREADS', 'OMP_NUM_THREADS', 'MKL_NUM_THREADS'):
    os.environ.setdefault(_name, '1')

import glob
import itertools
import json
import math
import re
import sys
from dataclasses import dataclass
from fractions import Fraction

import mpmath as mp
import numpy as np
import scipy.linalg
import yaml

from bank import _tolerance, quantity
from eigen import symmetric
from exact import last_crossing, laplacian, number, solve

HERE = os.path.dirname(os.path.abspath(__file__))
TARGET = os.path.join(HERE, 'three-phase.json')
SHOWN = 25
mp.mp.dps = 60


@dataclass(frozen=True)
class Leg:
    id: str
    kind: str        # 'C' or 'R'
    a: str
    b: str
    value: object    # an mpf
    low: Fraction
    high: Fraction


@dataclass
class Bank:
    touch: Fraction
    terminals: list
    rms: Fraction
    rise: Fraction
    grounded: bool
    legs: list       # resistors first, each in the file's order

    @property
    def nodes(self):
        found = list(self.terminals)
        for leg in self.legs:
            found += [x for x in (leg.a, leg.b) if x not in found]
        return found

    @property
    def loose(self):
        return [k for k, leg in enumerate(self.legs) if leg.low or leg.high]

    def pairs(self):
        found = list(itertools.combinations(self.terminals, 2))
        for leg in self.legs:
            if leg.kind == 'C' and (leg.a, leg.b) not in found and (leg.b, leg.a) not in found:
                found.append((leg.a, leg.b))
        return found


def plain(text, unit):
    """A number with one of a few units that bank.py does not know."""
    found = re.fullmatch(r'([\d.]+) (k?)' + unit, text)
    return Fraction(found[1]) * (1000 if found[2] else 1)


def farads(given):
    if 'value' in given:
        return number(quantity(given['value'], 'capacitance'))
    plate = given['kvar']
    power, volt = plain(plate['power'], 'var'), quantity(plate['voltage'], 'voltage')
    legs = 3 if given.get('connection') == 'delta' else 1
    return number(power / volt**2 / plain(plate['frequency'], 'Hz') / legs) / (2 * mp.pi)


def places(given, bank, grounded):
    """(suffix of the id, node, node) of every leg."""
    a, b, c = bank
    if 'phases' not in given:
        return [('', *given['across'])]
    star = 'G' if grounded else given['id'] + '.star'
    return {'delta': [(f'.{a}{b}', a, b), (f'.{b}{c}', b, c), (f'.{c}{a}', c, a)],
            'open-delta': [(f'.{a}{b}', a, b), (f'.{b}{c}', b, c)],
            'star': [(f'.{x}', x, star) for x in bank]}[given['connection']]


def read(path):
    with open(path, encoding='utf-8') as file:
        doc = yaml.load(file, Loader=yaml.BaseLoader)
    charged, terminals = doc['charged_to'], doc['terminals']
    grounded = charged['neutral'] == 'grounded'
    legs = []
    for kind, key in (('R', 'resistors'), ('C', 'capacitors')):
        for given in doc[key]:
            value = farads(given) if kind == 'C' else number(quantity(given['value'], 'resistance'))
            for suffix, a, b in places(given, terminals, grounded):
                legs.append(Leg(given['id'] + suffix, kind, a, b, value, *_tolerance(given.get('tolerance'))))
    return Bank(quantity(doc['touch_voltage'], 'voltage'), terminals, quantity(charged['ac_rms'], 'voltage'),
                quantity(charged['rise'], 'share'), grounded, legs)


class Exactly:
    """Linear algebra and functions with mpmath."""
    pi, sqrt, cos, atan2, fsum, number = mp.pi, mp.sqrt, mp.cos, mp.atan2, mp.fsum, staticmethod(number)

    matrix = staticmethod(laplacian)

    @staticmethod
    def solve(a, b):
        return solve(a, [b])[0]

    @staticmethod
    def modes(c, g):
        """Rates and shapes of c v' = -g v, each shape scaled to v'c v = 1."""
        n = len(c)
        low = mp.cholesky(mp.matrix(c))
        inverse = low**-1
        m = inverse * mp.matrix(g) * inverse.T
        values, q = symmetric([[(m[i, j] + m[j, i]) / 2 for j in range(n)] for i in range(n)])
        top = max(values)
        rates = [x if x > top / mp.mpf(10)**40 else mp.mpf(0) for x in values]
        return rates, [[mp.fsum(inverse[j, i] * v[j] for j in range(n)) for i in range(n)] for v in q]

    last = staticmethod(last_crossing)


class Quickly:
    """The same in doubles."""
    pi, sqrt, cos, atan2, fsum, number = math.pi, math.sqrt, math.cos, math.atan2, math.fsum, staticmethod(float)

    @staticmethod
    def matrix(n, edges):
        m = [[0.0] * n for _ in range(n)]
        for i, j, x in edges:
            m[i][i] += x
            m[j][j] += x
            m[i][j] -= x
            m[j][i] -= x
        return m

    @staticmethod
    def solve(a, b):
        return list(np.linalg.solve(np.array(a, float), np.array(b, float)))

    @staticmethod
    def modes(c, g):
        values, shapes = scipy.linalg.eigh(np.array(g, float), np.array(c, float))
        top = max(values)
        return [x if x > 1e-11 * top else 0.0 for x in values], [list(v) for v in shapes.T]

    @staticmethod
    def last(figure, level):
        rest, terms = figure
        if abs(rest) > level:
            return None
        if not terms:
            return 0.0
        value = lambda t: abs(rest + sum(a * math.exp(-r * t) for a, r in terms))
        end = max(math.log(max(len(terms) * abs(a) / max(level - abs(rest), 1e-9), 1.0)) / r for a, r in terms)
        grid = np.linspace(0, end, 300)
        a, r = np.array([x for x, _ in terms]), np.array([x for _, x in terms])
        over = np.abs(rest + (np.exp(-np.outer(grid, r)) * a).sum(1)) > level
        if not over.any():
            return 0.0
        k = np.nonzero(over)[0][-1]
        low, high = grid[k], grid[min(k + 1, len(grid) - 1)]
        for _ in range(60):
            middle = (low + high) / 2
            low, high = (middle, high) if value(middle) > level else (low, middle)
        return high


class Circuit:
    """A bank with given factors on its legs; `open_leg` is not there."""

    def __init__(self, bank, factors, open_leg, with_):
        self.bank, self.w = bank, with_
        self.n = len(bank.nodes)
        at = {name: k for k, name in enumerate(bank.nodes)}
        self.at = at
        self.caps, self.links = [], []
        for k, leg in enumerate(bank.legs):
            if leg.id != open_leg:
                value = with_.number(leg.value) * with_.number(factors[k])      # doubles stay doubles
                edge = (at[leg.a], at[leg.b], value if leg.kind == 'C' else 1 / value)
                (self.caps if leg.kind == 'C' else self.links).append(edge)
        self.c, self.g = (with_.matrix(self.n, x) for x in (self.caps, self.links))
        self.earth = at.get('G') if bank.grounded else None

    def potentials(self, held, charges):
        """All potentials from those of some nodes and the charges on the others."""
        free = [k for k in range(self.n) if k not in held]
        v = [held.get(k, 0) for k in range(self.n)]
        if free:
            right = [charges.get(k, 0) - self.w.fsum(self.c[k][j] * x for j, x in held.items()) for k in free]
            for k, x in zip(free, self.w.solve([[self.c[i][j] for j in free] for i in free], right)):
                v[k] = x
        return v

    def left(self, order, turns, crest):
        """What the poles leave that open in this order, each at one or the other turn of its charge."""
        w = self.w
        closed, charges = [0, 1, 2], {}

        def at_angle(angle):
            held = {k: crest * w.cos(angle - 2 * w.pi * k / 3) for k in closed}
            if self.earth is not None:
                held[self.earth] = 0
            return self.potentials(held, charges)

        def charge(pole, angle):
            v = at_angle(angle)
            return w.fsum(self.c[pole][j] * v[j] for j in range(self.n))

        for pole, turn in zip(order, turns):
            if len(closed) == 1 and self.earth is None:
                break                              # nothing flows through the last pole of an isolated bank
            zero, quarter, half = (charge(pole, x) for x in (w.number(0), w.pi / 2, w.pi))
            mean = (zero + half) / 2
            angle = w.atan2(quarter - mean, zero - mean) + (0 if turn else w.pi)
            kept = charge(pole, angle)
            closed.remove(pole)
            charges[pole] = kept
        held = {self.earth: 0} if self.earth is not None else {closed[0]: 0}
        return self.potentials(held, charges)

    def states(self, crest):
        for order in itertools.permutations(range(3)):
            for turns in itertools.product((True, False), repeat=2):
                yield order, turns, self.left(order, (True,) + turns, crest)

    def discharge(self):
        """Modes over the nodes but the reference."""
        self.reference = self.earth if self.earth is not None else 2
        self.kept = [k for k in range(self.n) if k != self.reference]
        sub = lambda m: [[m[i][j] for j in self.kept] for i in self.kept]
        self.rates, self.shapes = self.w.modes(sub(self.c), sub(self.g))

    def voltage(self, v, pair):
        """(rest, [(amplitude, rate)]) of a pair from these potentials on."""
        w = self.w
        start = [v[k] - v[self.reference] for k in self.kept]
        charge = [w.fsum(self.c[i][j] * x for j, x in zip(self.kept, start)) for i in self.kept]
        place = {k: i for i, k in enumerate(self.kept)}
        i, j = (self.at[name] for name in pair)
        rest, terms = w.number(0), []
        for rate, shape in zip(self.rates, self.shapes):
            amplitude = w.fsum(x * q for x, q in zip(shape, charge))
            seen = (shape[place[i]] if i in place else 0) - (shape[place[j]] if j in place else 0)
            if rate:
                terms.append((amplitude * seen, rate))
            else:
                rest += amplitude * seen
        size = sum(abs(a) for a, _ in terms) + abs(rest)
        if w is Exactly:
            terms = [(a, r) for a, r in terms if abs(a) > size / mp.mpf(10)**45]
            rest = rest if abs(rest) > size / mp.mpf(10)**45 else mp.mpf(0)
        else:
            terms = [(a, r) for a, r in terms if abs(a) > 1e-13 * size]
            rest = rest if abs(rest) > 1e-12 * size else 0.0
        return rest, terms


def figures_at(bank, factors, open_leg, crest, with_, wanted):
    """{(kind, pair): value}, the greatest over all states; infinite for a wait that never ends. Capacitors decide what
    the poles leave, so an open resistor only changes the discharge."""
    circuit = Circuit(bank, factors, open_leg, with_)
    circuit.discharge()
    level = with_.number(bank.touch)
    out = {}
    phase = crest / with_.sqrt(with_.number(3))
    for _, _, v in circuit.states(phase):
        for kind, pair in wanted:
            if kind == 'isolation':
                x = abs(v[circuit.at[pair[0]]] - v[circuit.at[pair[1]]])
            else:
                x = with_.last(circuit.voltage(v, pair), level)
                x = math.inf if x is None else x
            out[kind, pair] = max(out.get((kind, pair), 0), x)
    return out


def worst(bank, open_leg, wanted):
    """{figure: exact value at the worst point that was found}."""
    crest = float(bank.rms) * math.sqrt(2) * float(1 + bank.rise)
    ends = [(float(1 - bank.legs[k].low), float(1 + bank.legs[k].high)) for k in bank.loose]

    def factors(point):
        f = [1.0] * len(bank.legs)
        for k, x in zip(bank.loose, point):
            f[k] = x
        return f

    quick = lambda point, figures: figures_at(bank, factors(point), open_leg, crest, Quickly, figures)
    best = {}
    for corner in itertools.product(*ends):
        for figure, x in quick(corner, wanted).items():
            if x > best.get(figure, (-1,))[0]:
                best[figure] = (x, corner)
    out = {}
    for figure, (value, point) in best.items():
        point = list(point)
        step = 0.5
        while step > 1e-6 and value < math.inf:
            moved = False
            for k, (low, high) in enumerate(ends):
                for way in (-1, 1):
                    x = min(max(point[k] + way * step * (high - low), low), high)
                    other = point[:k] + [x] + point[k + 1:]
                    found = quick(other, [figure])[figure] if x != point[k] else -1
                    if found > value * (1 + 1e-13):
                        value, point, moved = found, other, True
            step = step if moved else step / 4
        exactly = [Fraction(1)] * len(bank.legs)
        for k, x in zip(bank.loose, point):
            leg = bank.legs[k]
            low, high = 1 - leg.low, 1 + leg.high
            exactly[k] = low if x == float(low) else high if x == float(high) else mp.mpf(x)
        exact_crest = number(bank.rms) * mp.sqrt(2) * number(1 + bank.rise)
        x = figures_at(bank, exactly, open_leg, exact_crest, Exactly, [figure])[figure]
        out[figure] = (x, [k for k, y, e in zip(bank.loose, point, ends) if y not in e])
    return out


def show(x):
    return None if x == math.inf else mp.nstr(mp.mpf(x), SHOWN, strip_zeros=True, min_fixed=-4, max_fixed=16)


def compute(path):
    bank = read(path)
    pairs = bank.pairs()
    waits = [('wait', pair) for pair in pairs]
    crest = number(bank.rms) * mp.sqrt(2)
    nominal = figures_at(bank, [Fraction(1)] * len(bank.legs), None, crest, Exactly, waits)
    healthy = worst(bank, None, waits + [('isolation', pair) for pair in pairs])
    faults = {leg.id: worst(bank, leg.id, waits) for leg in bank.legs}
    return {'waits': [{
        'across': list(pair),
        'at_isolation_v': show(healthy['isolation', pair][0]),
        'nominal_s': show(nominal['wait', pair]),
        'slowest_s': show(healthy['wait', pair][0]),
        'inside': [bank.legs[k].id for k in healthy['wait', pair][1]],
        'faults': [{'fault': f'{name} open', 'wait_s': show(found['wait', pair][0])} for name, found in faults.items()],
    } for pair in pairs]}


def main():
    made = {os.path.splitext(os.path.basename(path))[0]: compute(path)
            for path in sorted(glob.glob(os.path.join(HERE, 'three-phase', '*.yaml')))}
    text = json.dumps({'digits': mp.mp.dps, 'mpmath': mp.__version__, 'scipy': scipy.__version__, 'banks': made},
                      indent=1) + '\n'
    if sys.argv[1:] == ['make']:
        with open(TARGET, 'w', encoding='utf-8') as file:
            file.write(text)
        return 0
    if sys.argv[1:] != ['check']:
        print(__doc__)
        return 2
    with open(TARGET, encoding='utf-8') as file:
        known = json.load(file)['banks']

    def same(x, y):
        """Up to 1e-12: where a worst point lies inside the box its last digits rest on doubles."""
        if isinstance(x, dict):
            return isinstance(y, dict) and x.keys() == y.keys() and all(same(x[k], y[k]) for k in x if k != 'inside')
        if isinstance(x, list):
            return isinstance(y, list) and len(x) == len(y) and all(same(a, b) for a, b in zip(x, y))
        if isinstance(x, str) and re.fullmatch(r'[\d.e+-]+', x):
            return abs(mp.mpf(x) - mp.mpf(y)) <= mp.mpf(10)**-12 * abs(mp.mpf(x))
        return x == y

    differing = [name for name in known.keys() | made.keys() if not same(known.get(name), made.get(name))]
    print(f'{len(made)} three-phase banks: ' + (', '.join(differing) + ' differ' if differing else 'no difference'))
    return 1 if differing else 0


if __name__ == '__main__':
    sys.exit(main())
