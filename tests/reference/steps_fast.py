"""A procedure at one point of the tolerance box in doubles: only to FIND where a figure is worst (steps.py makes every
figure exact at the points found)."""
import numpy as np

from fast import last_crossings


class Quick:
    """What does not change from point to point."""

    def __init__(self, plan, lasts):
        self.plan, self.lasts = plan, [float(x) for x in lasts]
        self.base = np.array([float(p.value) for p in plan.parts])
        self.low = np.array([1 - float(plan.parts[k].low) for k in plan.loose])
        self.width = np.array([float(plan.parts[k].low + plan.parts[k].high) for k in plan.loose])
        self.paths = plan.paths()

    def point(self, u):
        return QuickPoint(self, u)


def _laplacian(n, ends, values):
    m = np.zeros((n, n))
    for (i, j), x in zip(ends, values):
        m[i, i] += x
        m[j, j] += x
        m[i, j] -= x
        m[j, i] -= x
    return m


class QuickPoint:
    def __init__(self, quick, u):
        p = self.p = quick.plan
        self.quick = quick
        v = self.value = quick.base.copy()
        v[p.loose] *= quick.low + quick.width * np.asarray(u, float)
        caps = [v[k] for k, *_ in p.main] + [v[p.main[c][0]] * float(s) for c, _, _, _, s, _ in p.branches]
        self.inner = [v[p.main[c][0]] * float(s) / tau for c, _, _, _, s, tau in p.branches]
        g = _laplacian(p.outer, [(p.index[p.parts[k].a], p.index[p.parts[k].b]) for k in p.always], 1 / v[p.always])
        c = _laplacian(p.outer, p.cap_ends[:len(p.main)], [x * float(w) for x, w in zip(caps, p.whole)])
        h, x = p.holding, np.zeros(p.outer)
        x[h.a] = 1
        if h.driven:
            x[h.driven] = np.linalg.solve(g[np.ix_(h.driven, h.driven)], -g[h.driven, h.a])
        if h.floating:
            q = np.zeros((len(h.floating), p.outer))
            for k, m in enumerate(h.floating):
                q[k, m] = 1
            x = x + np.linalg.solve(q @ c @ q.T, -(q @ c @ x)) @ q
        self.hold = x
        self.s = p.graph(tuple(p.always)).state
        full = _laplacian(p.n, p.cap_ends, caps)
        self.chol = np.linalg.cholesky(full[np.ix_(self.s, self.s)])
        self.inv = np.linalg.inv(self.chol)
        self.phases, self.runs = {}, []
        y = self.charged(float(p.bank.highest), True)
        for k, lasts in enumerate(quick.lasts):
            run = self.run(p.connected[k], y)
            self.runs.append(run)
            y = run.state(lasts)
        self.end = y

    def charged(self, volt, own):
        p = self.p
        u = [volt * (self.hold[i] - self.hold[j]) for _, i, j in p.main]
        if own:
            u = [x if p._own(c) is None else float(p._own(c)) for c, x in enumerate(u)]
        u += [u[c] for c, *_ in p.branches]
        return np.array([sum(s * u[c] for c, s in path) for path in self.quick.paths])

    def phase(self, on):
        if on not in self.phases:
            p, t = self.p, self.p.graph(on)
            g = _laplacian(p.n, p.links(on), [1 / self.value[k] for k in on] + self.inner)
            drive = np.zeros(p.n)
            for k in on:
                part = p.parts[k]
                if part.kind == 'S':
                    x = float(part.volt) / self.value[k]
                    drive[p.index[part.a]] += x
                    drive[p.index[part.b]] -= x
            unit = np.zeros((p.n, len(self.s) + 1))
            unit[self.s, range(len(self.s))] = 1
            if t.free:
                q = np.zeros((len(t.free), p.n))
                for k, m in enumerate(t.free):
                    q[k, m] = 1
                right = -(q @ g @ unit)
                right[:, -1] = q @ drive
                unit = unit + q.T @ np.linalg.solve(q @ g @ q.T, right)
            a = self.inv @ (g @ unit)[self.s, :-1] @ self.inv.T
            rates, vectors = np.linalg.eigh((a + a.T) / 2)
            rates = np.maximum(rates, 1e-300)
            rates[:t.trapped] = 0
            force = vectors.T @ self.inv @ (drive - g @ unit[:, -1])[self.s] if drive.any() else 0 * rates
            rest = np.divide(force, rates, out=np.zeros_like(rates), where=rates > 0)
            self.phases[on] = rates, vectors.T @ self.chol.T, self.inv.T @ vectors, rest, unit
        return self.phases[on]

    def run(self, on, y):
        return QuickRun(self.phase(on), y)

    def value_of(self, what):
        kind, k, which = what
        p = self.p
        if kind == 'until':
            step = p.bank.steps[k]
            run = self.runs[k] if k < len(self.runs) else self.run(p.connected[k], self.end)
            rest, a = run.terms((p.index[step.at[0]], p.index[step.at[1]]))
            rates = np.where(run.rates > 0, run.rates, 1)
            return float(last_crossings(np.array([rest]), a[None], rates[None], np.array([float(step.below)]))[0])
        if kind == 'voltage':
            rest, a = self.runs[k].terms(p.pairs[which])
            return abs(rest + (a * np.exp(-self.runs[k].rates * self.quick.lasts[k])).sum())
        if kind == 'recovery':
            run = self.run(p.connected[-1], self.end)
            return peak(*run.terms(p.pairs[which]), run.rates, None)
        part, end, best = p.parts[which], self.quick.lasts[k], 0.0
        runs = [self.runs[k]]
        if any(p.parts[p.by_id[x]].kind == 'S' for x in p.bank.steps[k].connect):
            runs = [self.run(p.connected[k], self.charged(float(x), False)) for x in (0, p.bank.nominal, p.bank.highest)]
        for run in runs:
            rest, a = run.terms((p.index[part.a], p.index[part.b]))
            if part.kind == 'S':
                rest, a = float(part.volt) - rest, -a
            if kind == 'energy':
                x = squared(rest, a, run.rates, end) / self.value[which] / (part.series * part.parallel)
            else:
                x = peak(rest, a, run.rates, end) / self.value[which]
                x = x / part.parallel if kind == 'current' else self.value[which] * x * x / (part.series * part.parallel)
            best = max(best, x)
        return best


class QuickRun:
    def __init__(self, phase, y):
        self.rates, to, self.shapes, rest, self.unit = phase
        z = to @ y
        self.rest = np.where(self.rates > 0, rest, z)
        self.move = np.where(self.rates > 0, z - rest, 0)

    def state(self, time):
        return self.shapes @ (self.rest + self.move * np.exp(-self.rates * time))

    def terms(self, pair):
        row = self.unit[pair[0]] - self.unit[pair[1]]
        w = row[:-1] @ self.shapes
        return row[-1] + w @ self.rest, w * self.move


def squared(rest, a, rates, end):
    live = rates > 0
    a, r = a[live], rates[live]
    both = r[:, None] + r[None, :]
    return rest * rest * end - 2 * rest * (a * np.expm1(-r * end) / r).sum() \
        - (np.outer(a, a) * np.expm1(-both * end) / both).sum()


def peak(rest, a, rates, end):
    live = rates > 0
    a, r = a[live], rates[live]
    if not len(a) or end == 0:
        return abs(rest + a.sum())
    last = 60 / r.min() if end is None else min(end, 60 / r.min())
    first = min(1e-3 / r.max(), last / 100)
    t = np.concatenate([[0.0], np.geomspace(first, last, int(40 * np.log10(last / first)) + 2)])
    x = np.exp(-np.outer(t, r))
    v = np.abs(rest + x @ a)
    k = int(np.argmax(v))
    best = max(v[k], abs(rest)) if end is None else v[k]
    if 0 < k < len(t) - 1:                               # refine: zero of the slope
        low, high = t[k - 1], t[k + 1]
        slope = lambda s: (a * r * np.exp(-r * s)).sum()
        up = slope(low)
        if up * slope(high) < 0:
            for _ in range(60):
                mid = (low + high) / 2
                if slope(mid) * up > 0:
                    low = mid
                else:
                    high = mid
            best = max(best, abs(rest + (a * np.exp(-r * low)).sum()))
    return best
