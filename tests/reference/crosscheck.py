"""SciPy's word on the nominal waits: the matrix exponential of a state matrix in doubles, on banks that are not stiff.

Own matrices from the parts' stamps (pseudo-inverse instead of elimination by groups), stepping on a grid of time and
refining each change of side; so it shares neither matrices nor root finding with exact.py.
"""
import numpy as np
from scipy.linalg import expm
from scipy.optimize import brentq, minimize_scalar

from network import Scenario, Topology

STIFF = 1e5        # of the rates
WIDE = 1e6         # of the resistances, and of the capacitances
STEPS = 4000       # on the grid; a pair of crossings closer than this is not seen, nor needed for a cross check


def nominal_waits(bank, rates):
    """A wait for each test point (None: never), or None for a bank too stiff for this, or with absorption."""
    if any(p.absorption for p in bank.parts) or not rates or rates[-1] > STIFF * rates[0]:
        return None
    for kind in 'RC':
        values = [p.value for p in bank.parts if p.kind == kind]
        if values and max(values) > WIDE * min(values):
            return None
    t = Topology(bank, Scenario())
    g = np.zeros((t.n, t.n))
    a = np.zeros((len(t.capacitors), t.n))            # capacitor voltages from node potentials
    c = np.diag([float(bank.parts[k].value) for k, *_ in t.capacitors])
    for row, (_, i, j, _) in enumerate(t.capacitors):
        a[row, i], a[row, j] = 1, -1
    for k, i, j, _ in t.run_r:
        d = np.zeros(t.n)
        d[i], d[j] = 1, -1
        g += np.outer(d, d) / float(bank.parts[k].value)
    volt = float(bank.nominal)
    # The operating point by least squares on two laws at once:
    fixed = [t.top, t.ref]
    rest = [i for i in range(t.n) if i not in fixed]
    lap = a.T @ c @ a
    v = np.zeros(t.n)
    v[t.top] = volt
    if rest:
        # currents balance at every node, and charge balances on what no resistor joins to a terminal
        null = np.linalg.svd(g[np.ix_(rest, rest)])
        flat = null[2][null[1] < 1e-9 * max(null[1].max(), 1e-300)] if len(rest) else np.zeros((0, 0))
        g_scale = np.abs(np.diag(g)[rest])
        g_scale[g_scale == 0] = 1
        rows = [g[rest][:, rest] / g_scale[:, None]]
        right = [-g[rest][:, t.top] * volt / g_scale]
        if len(flat):
            rows.append(flat @ lap[np.ix_(rest, rest)] / lap.max())
            right.append(-flat @ lap[rest][:, t.top] * volt / lap.max())
        v[rest] = np.linalg.lstsq(np.vstack(rows), np.concatenate(right), rcond=1e-13)[0]
    u = a @ v
    for row, (k, *_) in enumerate(t.capacitors):
        if bank.parts[k].own is not None:
            u[row] = float(bank.parts[k].own)
    # State: coordinates z of the capacitor voltages in the column space of `a` (loops leave fewer than capacitors).
    left, s, _ = np.linalg.svd(a, full_matrices=False)
    basis = left[:, s > 1e-9 * s.max()]
    to_state = np.linalg.solve(basis.T @ c @ basis, basis.T)
    # Given capacitor voltages u: potentials v with a v = u and the currents balanced over each group. The bordered
    # system [[g, a'], [a, 0]] [v; i] = [0; u] gives them and the capacitor currents; minimum norm picks the free rest.
    scale = 1 / np.abs(g).max() if np.abs(g).max() else 1.0
    full = np.block([[g * scale, a.T], [a, np.zeros((len(a), len(a)))]])
    inverse = np.linalg.pinv(full, rcond=1e-13)
    potential = inverse[:t.n, t.n:] @ basis
    current = inverse[t.n:, t.n:] @ basis / scale      # into the capacitors: g v + a' i = 0
    # d(charge)/dt of each basis direction; loops share the current, and projection on the basis removes what is free
    m = to_state @ current
    z0 = np.linalg.lstsq(basis, u, rcond=None)[0]
    touch = float(bank.touch)
    end = 80 / float(rates[0])
    step = end / STEPS
    power = expm(m * step)
    out = []
    path = [z0]
    for _ in range(STEPS):
        path.append(power @ path[-1])
    path = np.array(path)
    for names in bank.pairs:
        i, j = t.pair(names)
        row = potential[i] - potential[j]
        at = lambda x: abs(row @ (expm(m * x) @ z0)) - touch
        seen = np.abs(path @ row)
        if seen[-1] > touch:
            out.append(None)
            continue
        # Past the last moment above on the grid, a peak between two of its moments may still be.
        above = np.nonzero(seen > touch)[0]
        k = above[-1] if len(above) else -1
        low, high = k * step, (k + 1) * step
        for p in range(STEPS - 1, max(k, 0), -1):
            if seen[p] >= seen[p - 1] and seen[p] >= seen[p + 1] and seen[p] > 0.99 * touch:
                peak = minimize_scalar(lambda x: -at(x), bounds=((p - 1) * step, (p + 1) * step), method='bounded',
                                       options={'xatol': 1e-12 * end})
                if -peak.fun > 0:
                    low, high, k = peak.x, (p + 1) * step, p
                    break
        out.append(0.0 if k < 0 else float(brentq(at, low, high, xtol=1e-300, rtol=1e-13)))
    return out


def agrees(word, value, rates):
    """Within 1e-7, and within the shortest time constant times that near zero."""
    if word is None or value is None:
        return word is None and value is None
    return abs(word - float(value)) <= 1e-7 * (float(value) + 1 / float(rates[-1]))
