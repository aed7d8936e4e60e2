"""Random bank files from a seed: any graph, all parts, about half of them over the whole range of values.

Same seed, same Python, same files. Every file is valid by the format's description; draws that contradict themselves or
leave a test point without a defined voltage under a fault are thrown away and drawn again.
"""
import math
import os
import random

import mpmath as mp

import exact
from bank import Refused, read
from network import Topology, scenarios

OHMS = [(-3, 'mohm'), (0, 'ohm'), (3, 'kohm'), (6, 'Mohm'), (9, 'Gohm'), (12, 'Tohm')]
FARADS = [(-12, 'pF'), (-9, 'nF'), (-6, 'uF'), (0, 'F')]


def _text(value, units):
    """Two or three digits with a unit, as a plate would have them."""
    value = float(f'{value:.{random_digits(value)}g}')
    power, unit = max((u for u in units if value >= 10.0**u[0] * 0.999999), default=units[0])
    return f'{value / 10.0**power:.6g} {unit}'


def random_digits(value):
    return 2 + int(value * 1e15) % 2


def _log_uniform(rng, low, high):
    return math.exp(rng.uniform(math.log(low), math.log(high)))


def _edges(rng, nodes):
    """A connected graph on the nodes with a few loops; every node has two edges at least."""
    edges, joined = [], [nodes[0]]
    for node in nodes[1:]:
        edges.append((rng.choice(joined), node))
        joined.append(node)
    for _ in range(rng.randint(1, len(nodes))):
        edges.append(tuple(rng.sample(nodes, 2)))
    for node in nodes:
        while sum(node in e for e in edges) < 2:
            edges.append((node, rng.choice([x for x in nodes if x != node])))
    return edges


def _draw(rng, number, seed):
    wide = number % 2 == 0
    count = rng.randint(3, 12) if wide else rng.randint(3, 7)
    nodes = ['P', 'N'] + [f'K{k}' for k in range(1, count - 1)]
    edges = _edges(rng, nodes)
    share = rng.choice([0.35, 0.5, 0.65])            # of capacitors
    kinds = ['C' if rng.random() < share else 'R' for _ in edges]
    kinds[rng.randrange(len(kinds))] = 'C'
    if 'R' not in kinds:
        kinds.append('R')
        edges.append(('P', 'N'))
    ohms = (1e-3, 3e12) if wide else (50, 2e6)
    farads = (1e-9, 100) if wide else (1e-6, 1e-2)
    loose = 0 if wide else rng.randint(2, 6)
    tight = set(rng.sample(range(len(edges)), max(0, len(edges) - loose)))
    highest = rng.choice([120, 325, 565, 900, 2000])
    lines = ['ebbvolt: 1', f'tag: SM-{seed}-{number:02}', 'location: Saltmarsh pumping station (invented)',
             f'notes: drawn at random, seed {seed}, number {number}', f'touch_voltage: {rng.choice([50, 60, 34])} V',
             f'charged_to: {{nominal: {round(highest * rng.uniform(0.6, 1))} V, highest: {highest} V}}']
    caps, resistors = [], []
    for k, ((a, b), kind) in enumerate(zip(edges, kinds)):
        tolerance = '' if k in tight else rng.choice(
            [', tolerance: 5 %', ', tolerance: 10 %', ', tolerance: 20 %', ', tolerance: {low: 10 %, high: 30 %}'])
        if kind == 'C':
            group = ''
            if rng.random() < 0.2:
                group = f', units: {{series: {rng.randint(1, 3)}, parallel: {rng.randint(1, 3)}}}'
            own = f', charged_to: {rng.randint(0, highest)} V' if rng.random() < 0.12 else ''
            caps.append(f'  - {{id: C{len(caps) + 1}, value: {_text(_log_uniform(rng, *farads), FARADS)}{tolerance}, '
                        f'across: [{a}, {b}]{group}{own}}}')
        else:
            group = ''
            if rng.random() < 0.2:
                group = f', array: {{series: {rng.randint(1, 3)}, parallel: {rng.randint(1, 3)}}}'
            role = rng.choice(['bleeder', 'balancing', 'series', 'bleeder', 'leakage'])
            resistors.append(f'  - {{id: R{len(resistors) + 1}, role: {role}, '
                             f'value: {_text(_log_uniform(rng, *ohms), OHMS)}{tolerance}, across: [{a}, {b}]{group}}}')
    lines += ['capacitors:'] + caps + ['resistors:'] + resistors
    if rng.random() < 0.4:
        pairs = [['P', 'N']]
        for _ in range(3):
            pair = rng.sample(nodes, 2)
            if pair not in pairs and pair[::-1] not in pairs:
                pairs.append(pair)
        lines.append('test_points: [' + ', '.join(f'[{a}, {b}]' for a, b in pairs) + ']')
    if rng.random() < 0.5:
        lines += ['limits:',
                  f'  - {{id: site-rule, voltage: {rng.choice([50, 60, 75])} V, '
                  f'within: {rng.choice([1, 5])} min, single_fault: true}}',
                  '  - {id: exempt, any_of: {voltage: 60 V, charge: 50 uC, energy: 0.2 J}, within: 5 s, at: [P, N]}']
    return '\n'.join(lines) + '\n'


def _usable(path):
    try:
        bank = read(path)
        for scenario in scenarios(bank):
            topology = Topology(bank, scenario)
            pairs = bank.pairs + [limit.at for limit in bank.limits if limit.at]
            if not all(topology.defined(*topology.pair(names)) for names in pairs):
                return False
        healthy = Topology(bank, scenarios(bank)[0])
        for volt in (bank.nominal, bank.highest):
            exact.Exact(healthy, [mp.mpf(1)] * len(bank.parts), volt)
    except Refused:
        return False
    return healthy.islands.count == 1


def write(seed, count, folder):
    os.makedirs(folder, exist_ok=True)
    rng = random.Random(seed)
    for number in range(count):
        path = os.path.join(folder, f'random-{seed}-{number:02}.yaml')
        while True:
            with open(path, 'w', encoding='utf-8') as file:
                file.write(_draw(rng, number, seed))
            if _usable(path):
                break
