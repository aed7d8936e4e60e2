"""The same circuits in doubles, many points of the tolerance box at once: only to FIND where a figure is worst.

No published figure comes from here; exact.py computes each at the points found. Good to about 1e-16 times the ratio of
the fastest rate to the slowest, so search.py goes to the exact route where that ratio is large.
"""
import numpy as np

from network import Branch, Holding


def _stamps(n, edges):
    s = np.zeros((len(edges), n, n))
    for k, (_, i, j, _) in enumerate(edges):
        s[k, i, i] += 1
        s[k, j, j] += 1
        s[k, i, j] -= 1
        s[k, j, i] -= 1
    return s


class Fast:
    def __init__(self, topology, volt):
        self.t, self.volt = topology, float(volt)
        self.parts = topology.bank.parts

    def _laplacian(self, edges, factors, resistors, with_change):
        t = self.t
        value = np.ones((len(factors), len(edges)))
        for c, (k, _, _, m) in enumerate(edges):
            x = factors[:, k] * float(self.parts[k].value)
            if isinstance(m, Branch):
                value[:, c] = x * float(m.per_value)
                continue
            x = x * (float(m) if with_change else 1.0)
            value[:, c] = 1 / x if resistors else x
        return value, np.tensordot(value, _stamps(t.n, edges), 1)

    @staticmethod
    def _held(holding, g, c):
        count, n, _ = g.shape
        v = np.zeros((count, n))
        v[:, holding.a] = 1
        u = holding.driven
        if u:
            v[:, u] = np.linalg.solve(g[:, u][:, :, u], -g[:, u][:, :, [holding.a]])[..., 0]
        f = holding.floating
        if f:
            p = np.zeros((len(f), n))
            for k, m in enumerate(f):
                p[k, m] = 1
            v += np.linalg.solve(p @ c @ p.T, -(p @ c @ v[..., None]))[..., 0] @ p
        return v

    def circuits(self, factors):
        """`factors`: points by parts. Returns the modes of each, for `terms` and `energy`."""
        t, count = self.t, len(factors)
        _, c0 = self._laplacian([(*e[:3], x) for e, x in zip(t.mains, t.whole)], factors, False, True)
        cv, c = self._laplacian(t.capacitors, factors, False, True)
        _, g0 = self._laplacian(t.start_r, factors, True, True)
        _, g = self._laplacian(t.run_r, factors, True, True)
        v = self.volt * self._held(t.holding, g0, c0)
        u0 = np.array([v[:, i] - v[:, j] for _, i, j, _ in t.mains]).T.reshape(count, -1)[:, t.main_of]
        charge = np.zeros((count, t.n))
        for k, (part, i, j, _) in enumerate(t.capacitors):
            if t.scenario.own and self.parts[part].own is not None:
                u0[:, k] = float(self.parts[part].own)
            charge[:, i] += cv[:, k] * u0[:, k]
            charge[:, j] -= cv[:, k] * u0[:, k]
        s = t.state
        y0 = np.zeros((count, len(s)))
        for place, i in enumerate(s):
            for k, sign in t.tree[i]:
                y0[:, place] += sign * u0[:, k]
        v_inf = np.zeros((count, t.n))
        if t.free_clusters:
            p = np.zeros((len(t.free_clusters), t.n))
            for k, m in enumerate(t.free_clusters):
                p[k, t.clusters.members[m]] = 1
            v_inf = np.linalg.solve(p @ c @ p.T, (charge @ p.T)[..., None])[..., 0] @ p
        unit = np.zeros((count, t.n, len(s)))
        for place, i in enumerate(s):
            unit[:, i, place] = 1
        if t.free_groups and s:
            p = np.zeros((len(t.free_groups), t.n))
            for k, m in enumerate(t.free_groups):
                p[k, t.groups.members[m]] = 1
            unit = unit + p.T @ np.linalg.solve(p @ g @ p.T, -(p @ g)[:, :, s])
        low = np.linalg.cholesky(c[:, s][:, :, s])
        inv = np.linalg.inv(low)
        a = inv @ (g @ unit)[:, s] @ inv.transpose(0, 2, 1)
        rates, q = np.linalg.eigh((a + a.transpose(0, 2, 1)) / 2)
        b = (q.transpose(0, 2, 1) @ (low.transpose(0, 2, 1) @ y0[..., None]))[..., 0]
        shapes = inv.transpose(0, 2, 1) @ q
        k = t.trapped
        return dict(rates=np.maximum(rates[:, k:], 1e-300), b=b[:, k:], shapes=shapes[:, :, k:], unit=unit,
                    v_inf=v_inf, c=c, g=g, cv=cv, y_inf=v_inf[:, s] - v_inf[:, [t.first[t.groups.of[i]] for i in s]])

    def terms(self, m, kind, pair):
        """(rest, amplitudes) of a voltage or charge at all points."""
        t, (i, j) = self.t, pair
        if kind == 'voltage':
            row = m['unit'][:, i] - m['unit'][:, j]
            rest = m['v_inf'][:, i] - m['v_inf'][:, j]
            if t.clusters.of[i] == t.clusters.of[j]:
                rest = 0 * rest
        else:
            z = self._held(Holding(t.n, t.run_r, t.capacitors, i, j), m['g'], m['c'])
            cz = (m['c'] @ z[..., None])[..., 0]
            row, rest = cz[:, t.state], (cz * m['v_inf']).sum(1)
        return rest, (row[:, None, :] @ m['shapes'])[:, 0] * m['b']

    def energy(self, m, time, pair):
        t = self.t
        y = m['y_inf'] + (m['shapes'] @ (m['b'] * np.exp(-m['rates'] * time))[..., None])[..., 0]
        v = np.zeros((len(y), t.n))
        v[:, t.state] = y
        near = None if pair is None else {t.islands.of[k] for k in pair}
        return sum(m['cv'][:, k] * (v[:, i] - v[:, j])**2 for k, (_, i, j, _) in enumerate(t.capacitors)
                   if near is None or t.islands.of[i] in near) / 2

    def values(self, figures, factors, which=None):
        """Values of each figure at each point (points by figures); with `which`, of one figure at each point."""
        m = self.circuits(factors)
        one = which is not None
        out = np.zeros(len(factors)) if one else np.zeros((len(factors), len(figures)))
        jobs = []                                        # crossings are found together, they cost the most
        for f, figure in enumerate(figures):
            at = np.nonzero(which == f)[0] if one else np.arange(len(factors))
            if not len(at):
                continue
            sub = {k: x[at] for k, x in m.items()} if one else m
            kind, names, level = figure
            pair = None if names is None else self.t.pair(names)
            level = float(level)
            if kind == 'energy':
                x = self.energy(sub, level, pair)
            elif pair[0] == pair[1] or (not self.t.state):
                x = np.zeros(len(at))
            else:
                rest, a = self.terms(sub, 'charge' if kind in ('charge', 'charge wait') else 'voltage', pair)
                if kind in ('wait', 'charge wait'):
                    jobs.append((f, at, rest, a, sub['rates'], level))
                    continue
                x = np.abs(rest) if kind == 'settles' else np.abs(rest + (a * np.exp(-sub['rates'] * level)).sum(1))
            if one:
                out[at] = x
            else:
                out[:, f] = x
        if jobs:
            rest, a, rates = (np.concatenate([j[k] for j in jobs]) for k in (2, 3, 4))
            level = np.concatenate([np.full(len(j[1]), j[5]) for j in jobs])
            waits, start = last_crossings(rest, a, rates, level), 0
            for f, at, *_ in jobs:
                x = waits[start:start + len(at)]
                start += len(at)
                if one:
                    out[at] = x
                else:
                    out[:, f] = x
        return out


def last_crossings(rest, a, rates, level):
    """For each row the least T with |rest + sum a exp(-rates t)| <= level from T on; infinite if there is none."""
    return np.maximum(_last_above(rest - level, a, rates), _last_above(-rest - level, -a, rates))


def _last_above(rest, a, rates):
    """As exact._last_above, a level of halving at a time for all rows together."""
    rest = rest.copy()
    edge = np.abs(rest) < 1e-13 * np.abs(a).max(axis=1, initial=0)     # at rest on the level itself: take it as below
    rest[edge] = -1e-13 * np.abs(a[edge]).max(axis=1, initial=1e-300) - 1e-300
    never = rest > 0
    up = np.maximum(a, 0)
    with np.errstate(divide='ignore', invalid='ignore', over='ignore'):
        end = np.log(np.maximum((up > 0).sum(1)[:, None] * up / -rest[:, None], 1e-300)) / rates
    end = np.where(never, 0, np.maximum(end.max(axis=1, initial=0), 0)) * (1 + 1e-12)
    best = np.zeros(len(a))                     # the last time known to be above, row by row
    low, high = np.zeros(len(a)), np.zeros(len(a))     # brackets of the last crossing
    row = np.nonzero(end > 0)[0]
    t1, t2 = np.zeros(len(row)), end[row]
    down = np.minimum(a, 0)
    for _ in range(400):
        keep = t2 > best[row]
        row, t1, t2 = row[keep], t1[keep], t2[keep]
        if not len(row):
            break
        e1, e2 = np.exp(-rates[row] * t1[:, None]), np.exp(-rates[row] * t2[:, None])
        u, d, r = up[row], down[row], rates[row]
        bound = rest[row] + (u * e1).sum(1) + (d * e2).sum(1)
        g1, g2 = rest[row] + (a[row] * e1).sum(1), rest[row] + (a[row] * e2).sum(1)
        slope_up = -(u * r * e2).sum(1) - (d * r * e1).sum(1)
        slope_down = -(u * r * e1).sum(1) - (d * r * e2).sum(1)
        single = (slope_up <= 0) | (slope_down >= 0) | (t2 - t1 <= 1e-14 * t2)
        hit = (bound > 0) & (g1 > 0) & single & (g2 <= 0)
        for k in np.nonzero(hit)[0]:
            if t1[k] >= low[row[k]]:
                low[row[k]], high[row[k]] = t1[k], t2[k]
        above = g1 > 0
        np.maximum.at(best, row[above], t1[above])
        split = (bound > 0) & ~single
        row, t1, t2 = row[split], t1[split], t2[split]
        mid = (t1 + t2) / 2
        row, t1, t2 = np.r_[row, row], np.r_[t1, mid], np.r_[mid, t2]
    found = high > 0
    lo, hi = low[found], high[found]
    ra, aa, rr = rates[found], a[found], rest[found]
    for _ in range(60):
        mid = (lo + hi) / 2
        above = rr + (aa * np.exp(-ra * mid[:, None])).sum(1) > 0
        lo, hi = np.where(above, mid, lo), np.where(above, hi, mid)
    out = np.zeros(len(a))
    out[found] = hi
    out[never] = np.inf
    return np.maximum(out, np.where(never, np.inf, best))
