#!/usr/bin/env python3
"""An independent reference for ebbvolt's engine: the same figures by another route, at 120 digits.

  reference.py one FILE              one bank's figures as JSON
  reference.py make                  figures.json from all of banks/*.yaml
  reference.py check                 make them again and compare; exit status 1 on a difference
  reference.py random SEED N FOLDER  N random bank files

Numbers are decimal strings of 25 significant digits, null is "never". A voltage, charge or energy at a moment that is
under 1e-15 of what the bank could show at isolation is given as 0. In "steps" `until_s` is
an `until` before it is rounded up, `inside` lists the figures whose worst is off the corners; "recovery" is over the box
too. `slope_v_per_s` is d|v|/dt where the wait ends,
`inside` the factors on the parts where a worst case lies off the corners of the tolerance box. Of a fault's two times
(long before isolation, at isolation) the worse is given, and both under `variants` where they differ.

Before any figure is written, the nominal ones are checked: all by computing again with 200 digits (`digits_proven`);
waits by Rolle's recursion over derivatives, by an inverse Laplace transform of the node equations, and by SciPy where
the bank is not stiff; charge by reciprocity and by the balance of charges. A worst case is evaluated as exactly, but its
place in the box is searched for, not proven (search.py).

Readings of the bank file's description, where its words leave room:
- "Every value at its middle" is the value as stated, also where the tolerance is not the same both ways.
- `slowest` is at the `highest` voltage even where capacitors' own voltages make a lower one slower.
- A capacitor's own `charged_to` is across the whole part, all units in series. Only a shorted capacitor drops it, and
  then that of every capacitor.
- A capacitor with one unit shorted has the healthy bank's voltages at isolation; only the dynamics see its new value.
  (A capacitor that is not across the terminals and has units in series has both faults: shorted, then one unit shorted.)
- An absent leakage path was never there: the voltages have settled without it.
- A limit with several alternatives is met if one of them holds over the whole box; each fault is judged by itself, and
  in both its times. The energy of a limit is all that is stored in what any always-connected part joins to the pair.
- A limit without `within` holds from isolation. `use:` is passed over.
- `capacitance_f` is over `charged_to`, also where a capacitor's own voltage makes the terminals' voltage another.
- Absorption: a floating group divides by capacitance with all branches in it; a shorted capacitor loses its own branches,
  one unit shorted scales them with the value. More readings, for procedures, stand in steps.py.
- Between two nodes that nothing joins a voltage is undefined; the figures say so, and no bank here has it.
Needs requirements.txt.
"""
import os

for _name in ('OPENBLAS_NUM_THREADS', 'OMP_NUM_THREADS', 'MKL_NUM_THREADS'):
    os.environ.setdefault(_name, '1')          # one process per core does better than threads on small matrices

import glob
import json
import multiprocessing
import platform
import sys

import mpmath as mp
import numpy
import scipy
import yaml

import crosscheck
import exact
import laplace
import steps
from bank import Refused, read
from network import Scenario, Topology, scenarios
from search import Worst, figure_value, worst

HERE = os.path.dirname(os.path.abspath(__file__))
SHOWN = 25
PROCEDURE = -2
mp.mp.dps = exact.DIGITS


def show(x):
    return None if x is None else mp.nstr(mp.mpf(x), SHOWN, strip_zeros=True, min_fixed=-4, max_fixed=16)


def _limit_pairs(bank, limit):
    return [limit.at] if limit.at else bank.pairs


TEST_OF = {'voltage': lambda pair, amount, within: ('wait', pair, amount),
           'charge': lambda pair, amount, within: ('charge wait', pair, amount),
           'energy': lambda pair, amount, within: ('energy', pair, within),     # stored energy never grows
           'initial_charge': lambda pair, amount, within: ('charge', pair, 0)}


def figures_of(bank, healthy):
    """The figures that a scenario is asked for, as (kind, pair, level or time)."""
    found = {}
    for pair in bank.pairs:
        found[('wait', pair, bank.touch)] = found[('settles', pair, 0)] = True
    if healthy:
        found[('energy', None, 0)] = found[('charge', bank.terminals, 0)] = True
    for limit in bank.limits:
        for pair in _limit_pairs(bank, limit):
            for kind, amount in limit.alternatives:
                found[TEST_OF[kind](pair, amount, limit.within)] = True
            if healthy:
                for kind in ('voltage', 'charge', 'energy'):
                    found[(kind, pair, limit.within)] = True
    return list(found)


def alternative_met(kind, pair, amount, within, got):
    """Does this alternative of a limit hold from `within` on, over the whole box? A wait that ends in time says so for
    a voltage or charge; energy only falls, so its value at `within` does."""
    w = got[TEST_OF[kind](pair, amount, within)]
    if w.undefined or w.value is None:
        return False
    bound = within if kind in ('voltage', 'charge') else amount
    return w.value <= exact.number(bound)


# A limit is met where at least ONE of its alternatives holds over the whole box (and not: at each point of the box some
# alternative). That is the cautious reading; a fault is judged in the same way, by itself.
def met(limit, pair, got):
    return any(alternative_met(kind, pair, amount, limit.within, got) for kind, amount in limit.alternatives)


def nominal(bank):
    """Nominal figures, each proven by the other route or the higher precision where there is one."""
    topology = Topology(bank, Scenario())
    circuit = exact.Exact(topology, [mp.mpf(1)] * len(bank.parts), bank.nominal)
    pair = topology.pair(bank.terminals)
    terms = circuit.charge(pair)
    charge = abs(exact.value_at(terms, 0))
    by_balance = abs(circuit.charge_by_balance(pair))
    all_charge = circuit.scale * max(row[k] for k, row in enumerate(circuit.c))
    assert abs(charge - by_balance) <= all_charge * mp.mpf(10)**-50, 'two ways to the charge differ'
    stored = circuit.stored()
    assert abs(stored - circuit.energy(0)) <= stored * mp.mpf(10)**-50, 'stored energy: capacitors and modes differ'
    waits = []
    for names in bank.pairs:
        figure = ('wait', names, bank.touch)
        if not topology.defined(*topology.pair(names)):
            waits.append(Worst(None, undefined=True))
            continue
        x, slope = figure_value(circuit, figure, True)
        rest, terms = circuit.voltage(topology.pair(names))
        level = exact.number(bank.touch)
        sides = [exact.last_above_by_rolle(s * rest - level, [(s * a, r) for a, r in terms]) for s in (1, -1)]
        other = None if None in sides else max(sides)
        least = mp.mpf(10)**-30 / max([r for _, r in terms], default=1)
        assert (x is None) == (other is None) and (x is None or abs(x - other) <= mp.mpf(10)**-30 * x + least), \
            'two ways to the last crossing differ'
        waits.append(Worst(x, slope=slope))
    return circuit, stored, charge, waits


def nominal_block(bank):
    circuit, stored, charge, waits = nominal(bank)
    mp.mp.dps = 200
    again, stored2, charge2, waits2 = nominal(bank)
    pairs = list(zip([stored, charge] + [w.value for w in waits] + circuit.rates,
                     [stored2, charge2] + [w.value for w in waits2] + again.rates))
    gaps = [abs(x - y) / abs(y) for x, y in pairs if x is not None and y]
    digits = min([mp.mpf(exact.DIGITS)] + [-mp.log10(g) for g in gaps if g])
    mp.mp.dps = exact.DIGITS
    assert digits > 50, f'only {digits} digits'
    volt = exact.number(bank.nominal)
    word = crosscheck.nominal_waits(bank, circuit.rates)
    for s, w in zip(word or [], waits):
        assert w.undefined or crosscheck.agrees(s, w.value, circuit.rates), f'SciPy says otherwise: {word}'
    if circuit.t.islands.count == 1:
        for names, w in zip(bank.pairs, waits):
            assert not w.value or laplace.gap(bank, names, w.value) < 1e-12, f'the transform says otherwise: {names}'
    return {
        'energy_nominal_j': show(stored), 'charge_nominal_c': show(charge),
        # over the terminals' `charged_to`, also where a capacitor's own voltage makes the terminals' another
        'capacitance_f': show(charge / volt) if volt else None,
        'time_constants_s': [show(1 / r) for r in circuit.rates],
        'trapped_modes': circuit.t.trapped,
        'digits_proven': int(digits),
        'waits': [(w.value, w.slope, w.undefined) for w in waits],
        'scipy': word,
    }


def task(job):
    """One scenario of one bank; -1 is the nominal block, -2 the procedure. Errors come back as text, so that one bad file names itself."""
    path, k = job
    mp.mp.dps = exact.DIGITS
    try:
        bank = read(path)
        if k == PROCEDURE:
            return steps.compute(bank, show)
        if k < 0:
            return nominal_block(bank)
        return worst(bank, scenarios(bank)[k], figures_of(bank, k == 0), bank.highest)
    except Refused as problem:
        return problem


def jobs_of(path):
    return [(path, k) for k in range(PROCEDURE, len(scenarios(read(path))))]


def _side(got, names, bank):
    w, s = got[('wait', names, bank.touch)], got[('settles', names, 0)]
    out = {'wait_s': show(w.value), 'settles_at_v': show(s.value)}
    if w.undefined:
        out['undefined'] = True
    if w.slope is not None:
        out['slope_v_per_s'] = show(w.slope)
    if w.inside:
        out['inside'] = {k: mp.nstr(v, 17) for k, v in w.at.items()}
    return out


def _worse(sides):
    """Of a fault long before isolation and at isolation; never is worse than any wait."""
    wait = max(sides, key=lambda s: (s['wait_s'] is None, mp.mpf(s['wait_s'] or 0)))
    out = {'wait_s': wait['wait_s'],
           'settles_at_v': max((s['settles_at_v'] for s in sides), key=lambda x: mp.mpf(x or 0))}
    for key in ('slope_v_per_s', 'undefined', 'inside'):
        if key in wait:
            out[key] = wait[key]
    return out


def assemble(path, results):
    bank = read(path)
    for r in results:
        if isinstance(r, Refused):
            raise Refused(f'{path}: {r}')
    procedure, base, healthy, faults = results[0], results[1], results[2], results[3:]
    cases = scenarios(bank)[1:]
    energy, charge = healthy[('energy', None, 0)], healthy[('charge', bank.terminals, 0)]
    out = {
        'tag': bank.tag,
        'stored': {'energy_nominal_j': base['energy_nominal_j'], 'energy_highest_j': show(energy.value),
                   'charge_nominal_c': base['charge_nominal_c'], 'charge_highest_c': show(charge.value),
                   'capacitance_f': base['capacitance_f']},
        'time_constants_s': base['time_constants_s'], 'trapped_modes': base['trapped_modes'],
        'digits_proven': base['digits_proven'],
        # least certain is a double's figure where capacitors of very different size form loops
        'capacitor_loop_ratio': show(exact.number(max(Topology(bank, s).loop_ratio() for s in scenarios(bank)))),
        'waits': [], 'limits': [],
    }
    for k, names in enumerate(bank.pairs):
        value, slope, undefined = base['waits'][k]
        side = _side(healthy, names, bank)
        row = {'across': list(names), 'nominal_s': show(value), 'slowest_s': side.pop('wait_s'),
               'settles_at_v': side.pop('settles_at_v')}
        if slope is not None:
            row['nominal_slope_v_per_s'] = show(slope)
        if 'slope_v_per_s' in side:
            row['slowest_slope_v_per_s'] = side.pop('slope_v_per_s')
        if base['scipy'] is not None:
            row['scipy_nominal_s'] = base['scipy'][k]
        row.update(side)
        row['faults'] = []
        for name in dict.fromkeys(c.fault for c in cases):
            sides = {c.when: _side(got, names, bank) for c, got in zip(cases, faults) if c.fault == name}
            row['faults'].append({'fault': name, **_worse(list(sides.values()))})
            if len(sides) > 1 and sides['before'] != sides['at isolation']:
                row['faults'][-1]['variants'] = sides
        out['waits'].append(row)
    for limit in bank.limits:
        for names in _limit_pairs(bank, limit):
            at = {kind: healthy[(kind, names, limit.within)].value for kind in ('voltage', 'charge', 'energy')}
            # a fault counts in all its variants: one that fails fails the limit
            out['limits'].append({
                'id': limit.id, 'across': list(names), 'within_s': show(exact.number(limit.within)),
                'met': met(limit, names, healthy), 'single_fault_met': all(met(limit, names, got) for got in faults),
                'voltage_v': show(at['voltage']), 'charge_c': show(at['charge']), 'energy_j': show(at['energy'])})
    out.update(procedure or {})
    return out


def compute(paths):
    jobs = [job for path in paths for job in jobs_of(path)]
    order = sorted(jobs, key=lambda job: job[1] != PROCEDURE)      # the longest first
    with multiprocessing.Pool() as pool:
        results = dict(zip(order, pool.map(task, order, chunksize=1)))
    by_path = {}
    for job in jobs:
        by_path.setdefault(job[0], []).append(results[job])
    return {os.path.basename(p)[:-5]: assemble(p, r) for p, r in by_path.items()}


def everything():
    return {
        'made_with': {'python': platform.python_version(), 'mpmath': mp.__version__, 'numpy': numpy.__version__,
                      'scipy': scipy.__version__, 'pyyaml': yaml.__version__, 'digits': exact.DIGITS},
        'banks': compute(sorted(glob.glob(os.path.join(HERE, 'banks', '*.yaml')))),
    }


# Where a figure is worst is no figure: two corners may tie. The proven digits and SciPy's column vary with the machine.
LOOSE = {'inside': None, 'digits_proven': None, 'scipy_nominal_s': 1e-7}


def differences(old, new, path=''):
    if isinstance(old, dict) and isinstance(new, dict):
        for key in sorted(set(old) | set(new)):
            if key in LOOSE:
                a, b = old.get(key), new.get(key)
                if LOOSE[key] and None not in (a, b) and abs(a - b) > LOOSE[key] * abs(b):
                    yield f'{path}/{key}: {a} and {b}'
            elif key not in old or key not in new:
                yield f'{path}/{key}: only in the {"new" if key in new else "old"} figures'
            else:
                yield from differences(old[key], new[key], f'{path}/{key}')
    elif isinstance(old, list) and isinstance(new, list):
        if len(old) != len(new):
            yield f'{path}: {len(old)} and {len(new)} entries'
        for k, (x, y) in enumerate(zip(old, new)):
            yield from differences(x, y, f'{path}/{k}')
    elif old != new:
        try:
            same = abs(mp.mpf(old) - mp.mpf(new)) <= mp.mpf(10)**-15 * abs(mp.mpf(new))
        except (TypeError, ValueError):
            same = False
        if not same:
            yield f'{path}: {old} and {new}'


def main(args):
    target = os.path.join(HERE, 'figures.json')
    if args[:1] == ['one'] and len(args) == 2:
        try:
            (figures,) = compute([args[1]]).values()
        except Refused as problem:
            print(problem, file=sys.stderr)
            return 2
        print(json.dumps(figures, indent=1, ensure_ascii=False))
    elif args == ['make']:
        text = json.dumps(everything(), indent=1, ensure_ascii=False)
        with open(target, 'w', encoding='utf-8') as file:
            file.write(text + '\n')
    elif args == ['check']:
        with open(target, encoding='utf-8') as file:
            old = json.load(file)
        found = list(differences(old['banks'], everything()['banks']))
        print('\n'.join(found) if found else f'{len(old["banks"])} banks: no difference')
        return 1 if found else 0
    elif args[:1] == ['random'] and len(args) == 4:
        import generate
        generate.write(int(args[1]), int(args[2]), args[3])
    else:
        print(__doc__.strip(), file=sys.stderr)
        return 2
    return 0


if __name__ == '__main__':
    sys.exit(main(sys.argv[1:]))
