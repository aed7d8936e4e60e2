"""A symmetric eigenproblem in long fixed-point integers: tridiagonal by reflections, then implicit QL.

mpmath's own solver gives the same digits but takes some ten times as long, and hundreds of a box's corners wait for it.
Errors are ABSOLUTE, about 2^-prec of the greatest entry; with 30 decades between the rates and 120 digits that leaves
90. Inside twice as many bits are kept, since a shift that comes close to an eigenvalue can blow rounding up by the
reciprocal of the smallest element that is not yet taken for zero. The result is proven by its residual before it is
handed out.
"""
from math import isqrt

import mpmath as mp


def symmetric(rows):
    """Eigenvalues (unordered) and unit eigenvectors, each a list, of a symmetric matrix of mpf rows."""
    n = len(rows)
    bits = 2 * mp.mp.prec + 128
    zero = 1 << (mp.mp.prec + 64)
    one = 1 << bits
    top = max(abs(x) for row in rows for x in row)
    if top == 0:
        return [mp.mpf(0)] * n, [[mp.mpf(i == j) for i in range(n)] for j in range(n)]
    scale = mp.mpf(2)**(mp.frexp(top)[1])
    given = [[int(mp.nint(mp.ldexp(x / scale, bits))) for x in row] for row in rows]
    a = [list(row) for row in given]
    z = [[one * (i == j) for j in range(n)] for i in range(n)]      # rows become the eigenvectors

    # Reflections u (unit length) make column after column tridiagonal.
    for k in range(n - 2):
        x = [a[i][k] for i in range(k + 1, n)]
        norm = isqrt(sum(v * v for v in x))
        if norm == 0:
            continue
        x[0] += norm if x[0] >= 0 else -norm
        length = isqrt(sum(v * v for v in x) << 2 * bits)     # twice the bits: u is a unit vector even of tiny x
        u = [0] * (k + 1) + [(v << 2 * bits) // length for v in x]
        live = range(k + 1, n)
        w = [sum(a[i][j] * u[j] for j in live) >> bits for i in range(n)]
        half = sum(w[i] * u[i] for i in live) >> bits
        w = [2 * (w[i] - (half * u[i] >> bits)) for i in range(n)]
        for i in range(n):
            for j in range(n):
                a[i][j] -= (u[i] * w[j] + w[i] * u[j]) >> bits
        for j in range(n):
            s = sum(u[i] * z[i][j] for i in live) >> (bits - 1)
            for i in live:
                z[i][j] -= u[i] * s >> bits

    d = [a[i][i] for i in range(n)]
    e = [a[i + 1][i] for i in range(n - 1)] + [0]
    for low in range(n):
        for _ in range(400):
            m = low
            while m < n - 1 and abs(e[m]) > zero:
                m += 1
            if m == low:
                break
            g = ((d[low + 1] - d[low]) << (bits - 1)) // e[low]
            r = isqrt(g * g + one * one)
            g = d[m] - d[low] + (e[low] << bits) // (g + (r if g >= 0 else -r))
            s = c = one
            p = 0
            for i in reversed(range(low, m)):
                f, b = s * e[i] >> bits, c * e[i] >> bits
                r = isqrt((f * f + g * g) << 2 * bits)        # likewise, for s*s + c*c = 1
                e[i + 1] = r >> bits
                if r == 0:
                    d[i + 1] -= p
                    e[m] = 0
                    break
                s, c = (f << 2 * bits) // r, (g << 2 * bits) // r
                g = d[i + 1] - p
                r = ((d[i] - g) * s >> bits) + (2 * c * b >> bits)
                p = s * r >> bits
                d[i + 1] = g + p
                g = (c * r >> bits) - b
                zi, zj = z[i], z[i + 1]
                z[i + 1] = [(s * x + c * y) >> bits for x, y in zip(zi, zj)]
                z[i] = [(c * x - s * y) >> bits for x, y in zip(zi, zj)]
            else:
                d[low] -= p
                e[low] = g
                e[m] = 0
        else:
            raise ArithmeticError('QL does not close')

    bound = zero << 20
    for k in range(n):
        for i in range(n):
            residual = (sum(given[i][j] * z[k][j] for j in range(n)) - d[k] * z[k][i]) >> bits
            assert abs(residual) < bound, 'an eigenvector that is none'
            dot = (sum(z[k][j] * z[i][j] for j in range(n)) >> bits) - one * (i == k)
            assert abs(dot) < bound, 'eigenvectors that are not at right angles'
    return ([scale * mp.ldexp(mp.mpf(x), -bits) for x in d],
            [[mp.ldexp(mp.mpf(x), -bits) for x in row] for row in z])
