"""Dielectric absorption: how much capacitance sits in the branches, so that the simulated standard test returns d."""
import functools

import mpmath as mp

from exact import number
from phase import Graph, Phase, peak

TIMES = (1, 10, 100, 1000, 10000)
SLOW = (100000, 1000000)


def times(part):
    return TIMES + (SLOW if part.slow else ())


def returned(share, unit, taus):
    """What the test returns of its voltage, with `share` of C in EACH branch: charged for 60 min from empty by a stiff
    source, shorted for 10 s through 5 ohm (ideally, where 5 ohm times C is over 0.1 s), the greatest voltage in the 15
    min that follow."""
    n = len(taus) + 2
    branches = [unit * share] * len(taus)
    caps = [(1, 0, unit)] + [(k + 2, 0, c) for k, c in enumerate(branches)]
    inner = [(1, k + 2, c / tau, mp.mpf(0)) for k, (c, tau) in enumerate(zip(branches, taus))]
    held = [-mp.expm1(-mp.mpf(3600) / tau) for tau in taus]
    ends = lambda edges: [(e[0], e[1]) for e in edges]
    if 5 * unit > mp.mpf(1) / 10:
        y = [mp.mpf(0)] + [x * mp.exp(-mp.mpf(10) / tau) for x, tau in zip(held, taus)]
    else:
        short = inner + [(1, 0, mp.mpf(1) / 5, mp.mpf(0))]
        y = Phase(Graph(n, ends(caps), ends(short)), caps, short).run([mp.mpf(1)] + held).state(mp.mpf(10))
    run = Phase(Graph(n, ends(caps), ends(inner)), caps, inner).run(y)
    return peak(run.voltage((1, 0)), mp.mpf(900))[0]


@functools.lru_cache(maxsize=None)
def _share(d, unit, taus, digits):
    gap = lambda x: returned(x, number(unit), taus) - number(d)
    low, high = mp.mpf(0), number(d)
    f_low, f_high = -number(d), gap(high)
    while f_high < 0:
        low, f_low = high, f_high
        high *= 2
        f_high = gap(high)
    x, f = low, f_low
    other, f_other = high, f_high
    for _ in range(60):                                   # secant, kept inside by bisection
        new = x - f * (x - other) / (f - f_other) if f != f_other else (low + high) / 2
        if not low < new < high:
            new = (low + high) / 2
        other, f_other = x, f
        x, f = new, gap(new)
        if f > 0:
            high = x
        else:
            low = x
        if abs(x - other) <= x * mp.mpf(10)**-38:
            break
    return x


def share(part):
    """c_j over C, the same for each branch; `unit` is one unit's nominal capacitance."""
    unit = part.value * part.series / part.parallel
    return _share(part.absorption, unit, times(part), mp.mp.dps)
