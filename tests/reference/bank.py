"""Reads a bank file: the part of the format that the reference computes, with every number kept as an exact fraction.

Written from the format's description alone; it shares nothing with the tool under test. It is no validator: it refuses
what it can't compute (three phases, sinks, published limits by name) and lets other mistakes pass.
"""
import json
import os
import re
from dataclasses import dataclass, field
from fractions import Fraction

import yaml


DIELECTRICS = os.path.join(os.path.dirname(os.path.abspath(__file__)), '..', '..', 'data', 'dielectrics.json')


class Refused(Exception):
    """The file is outside the subset that the reference computes, or contradicts itself."""


SCALE = {'p': -12, 'n': -9, 'u': -6, '\u00b5': -6, '\u03bc': -6, 'm': -3, '': 0, 'k': 3, 'M': 6, 'G': 9, 'T': 12}
OHM = ('ohm', 'Ohm', 'R', '\u03a9', '\u2126')


def _units(bases, prefixes='pnu\u00b5\u03bcmkMGT'):
    return {p + b: Fraction(10) ** SCALE[p] for b in bases for p in [''] + list(prefixes)}


UNITS = {
    'resistance': _units(OHM) | {'K' + o: Fraction(1000) for o in OHM},
    'capacitance': _units(['F'], 'pnu\u00b5\u03bcm') | {'MFD': Fraction(1, 10**6), 'mfd': Fraction(1, 10**6)},
    'voltage': _units(['V']),
    'charge': _units(['C']),
    'energy': _units(['J']),
    'time': {'us': Fraction(1, 10**6), 'ms': Fraction(1, 1000), 's': Fraction(1), 'min': Fraction(60),
             'h': Fraction(3600), 'd': Fraction(86400)},
    'share': {'%': Fraction(1, 100)},
}
NUMBER = re.compile(r'([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(\S+)')
CODE = re.compile(r'(\d*)([pnu\u00b5\u03bcmRrkKMGT])(\d*)')    # IEC 60062: 4k7, R47, 470u


def quantity(text, kind):
    """One quantity as an exact fraction in SI base units; `kind` is a key of UNITS."""
    if not isinstance(text, str):
        raise Refused(f'expected a {kind}, found {text!r}')
    text = text.strip()
    found = NUMBER.fullmatch(text)
    if found and found[2] in UNITS[kind]:
        value = Fraction(found[1]) * UNITS[kind][found[2]]
    else:
        found = CODE.fullmatch(text)
        if kind not in ('resistance', 'capacitance') or not found or not (found[1] or found[3]):
            raise Refused(f'{text!r} is no {kind}')
        letter = {'R': '', 'r': '', 'K': 'k'}.get(found[2], found[2])
        value = Fraction(f'{found[1] or 0}.{found[3] or 0}') * Fraction(10) ** SCALE[letter]
    if value < 0 or (kind in ('resistance', 'capacitance') and value == 0):
        raise Refused(f'{text!r} is out of range')
    return value


@dataclass(frozen=True)
class Part:
    """A capacitor or resistor, lumped: `value` is the whole part's, and its factor runs from 1-low to 1+high."""
    id: str
    kind: str                     # 'C' or 'R'
    role: str
    a: str
    b: str
    value: Fraction
    low: Fraction = Fraction(0)
    high: Fraction = Fraction(0)
    own: Fraction | None = None   # a capacitor's own voltage at isolation, from a to b
    series: int = 1
    parallel: int = 1
    absorption: Fraction | None = None   # of a capacitor: the share that the standard test returns
    slow: bool = False            # does its absorption have the branches of an electrolytic?
    volt: Fraction | None = None  # of a supply (kind 'S', whose `value` is its series resistance)

    @property
    def loose(self):
        return self.low > 0 or self.high > 0


@dataclass(frozen=True)
class Step:
    name: str
    connect: tuple
    disconnect: tuple
    lasts: Fraction | None        # None: `until`
    below: Fraction | None = None
    at: tuple | None = None


@dataclass(frozen=True)
class Limit:
    id: str
    alternatives: tuple           # of (kind, amount), kind: voltage | charge | energy | initial_charge
    within: Fraction
    at: tuple | None


@dataclass
class Bank:
    tag: str
    touch: Fraction
    terminals: tuple
    nominal: Fraction
    highest: Fraction
    parts: list                   # resistors first, then capacitors, each in the file's order
    pairs: list                   # test points
    limits: list = field(default_factory=list)
    extra: list = field(default_factory=list)     # what only a step connects: tools, straps, meters, then supplies
    steps: list = field(default_factory=list)

    @property
    def loose(self):
        return [k for k, p in enumerate(self.parts) if p.loose]


def _tolerance(given):
    if given is None:
        return Fraction(0), Fraction(0)
    if isinstance(given, dict):
        low, high = (quantity(given.get(k, '0 %'), 'share') for k in ('low', 'high'))
    else:
        low = high = quantity(given, 'share')
    if low >= 1:
        raise Refused('a tolerance of 100 % or more downwards')
    return low, high


def _counts(given):
    given = given or {}
    return int(given.get('series', 1)), int(given.get('parallel', 1))


def _absorption(given):
    """A capacitor's absorption, by default its dielectric's typical one at the high end; and does it have slow branches?"""
    kind = given.get('dielectric')
    typical = None
    if kind is not None:
        with open(DIELECTRICS, encoding='utf-8') as file:
            typical = next((x['absorption']['high'] for x in json.load(file) if x['id'] == kind), None)
    share = given.get('absorption', typical)
    share = None if share is None else quantity(share, 'share')
    return share or None, kind == 'aluminium-electrolytic'


def _limit(k, given):
    known = {'id', 'voltage', 'charge', 'energy', 'initial_charge', 'any_of', 'within', 'at', 'single_fault'}
    if 'use' in given or set(given) - known:
        raise Refused(f'limit {given}: not in the subset')
    named = given.get('any_of') or {x: given[x] for x in ('voltage', 'charge', 'energy', 'initial_charge') if x in given}
    if not named or ('any_of' not in given and len(named) > 1):
        raise Refused(f'limit {given}: one figure, or any_of')
    kind = {'initial_charge': 'charge'}
    # A limit without `within` is taken to hold from isolation on.
    return Limit(given.get('id', f'limit {k + 1}'),
                 tuple((x, quantity(y, kind.get(x, x))) for x, y in named.items()),
                 quantity(given.get('within', '0 s'), 'time'), tuple(given['at']) if 'at' in given else None)


def read(path):
    with open(path, encoding='utf-8') as file:
        doc = yaml.load(file, Loader=yaml.BaseLoader)     # BaseLoader: every scalar stays text, a node named 1 too
    if doc.get('ebbvolt') != '1':
        raise Refused('ebbvolt: 1 is missing')
    for key in ('sinks', 'hold_energy'):
        if doc.get(key):
            raise Refused(f'{key}: not in the subset')
    terminals = tuple(doc.get('terminals', ['P', 'N']))
    if len(terminals) != 2:
        raise Refused('two terminals only')
    charged = doc['charged_to']
    if isinstance(charged, str):
        nominal = highest = quantity(charged, 'voltage')
    elif set(charged) == {'nominal', 'highest'}:
        nominal, highest = quantity(charged['nominal'], 'voltage'), quantity(charged['highest'], 'voltage')
    else:
        raise Refused(f'charged_to: {charged}: not in the subset')

    parts, extra = [], []
    for given in doc.get('resistors') or []:
        if 'phases' in given:
            raise Refused('phases: not in the subset')
        series, parallel = _counts(given.get('array'))
        a, b = given.get('across', terminals)
        by_step = given['role'] in ('tool', 'strap', 'meter')
        (extra if by_step else parts).append(Part(given['id'], 'R', given['role'], a, b,
                          quantity(given['value'], 'resistance') * series / parallel,
                          *_tolerance(given.get('tolerance')), None, series, parallel))
    for given in doc.get('supplies') or []:
        if 'array' in given:
            raise Refused('array of a supply: not in the subset')
        a, b = given.get('across', terminals)
        extra.append(Part(given['id'], 'S', 'supply', a, b, quantity(given['series'], 'resistance'),
                          *_tolerance(given.get('tolerance')), volt=quantity(given['voltage'], 'voltage')))
    for given in doc['capacitors']:
        for key in ('kvar', 'phases'):
            if key in given:
                raise Refused(f'{key}: not in the subset')
        series, parallel = _counts(given.get('units'))
        a, b = given.get('across', terminals)
        # `charged_to` is read as the voltage across the whole part, all its units in series together.
        own = quantity(given['charged_to'], 'voltage') if 'charged_to' in given else None
        parts.append(Part(given['id'], 'C', 'capacitor', a, b,
                          quantity(given['value'], 'capacitance') * parallel / series,
                          *_tolerance(given.get('tolerance')), own, series, parallel, *_absorption(given)))

    if 'test_points' in doc:
        pairs = [tuple(p) for p in doc['test_points']]
    else:                                                 # the terminals, then each capacitor's own pair, none twice
        pairs = [terminals]
        for part in parts:
            if part.kind == 'C' and (part.a, part.b) not in pairs and (part.b, part.a) not in pairs:
                pairs.append((part.a, part.b))
    nodes = {x for p in parts for x in (p.a, p.b)} | set(terminals)
    limits = [_limit(k, x) for k, x in enumerate(doc.get('limits') or []) if 'use' not in x]
    for pair in pairs + [x.at for x in limits if x.at]:
        if not set(pair) <= nodes or pair[0] == pair[1]:
            raise Refused(f'test point {pair}: an unknown node')
    for part in parts:
        if part.a == part.b:
            raise Refused(f'{part.id} is across one node')
    steps = []
    for given in doc.get('procedure') or []:
        names = [tuple(given.get(key) or ()) for key in ('connect', 'disconnect')]
        if 'until' in given:
            until = given['until']
            steps.append(Step(given['step'], *names, None, quantity(until['below'], 'voltage'),
                              tuple(until.get('at', terminals))))
        else:
            steps.append(Step(given['step'], *names, quantity(given.get('for', '0 s'), 'time')))
    return Bank(doc['tag'], quantity(doc['touch_voltage'], 'voltage'), terminals, nominal, highest, parts, pairs, limits,
                extra, steps)
