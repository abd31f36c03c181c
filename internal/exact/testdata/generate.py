#!/usr/bin/env python3
"""Reference values for the package: run  python3 generate.py > reference.json

Series, sums and substitutions use Python's fractions on expanded coefficient
lists (long division, no factors). Roots use mpmath (python3-mpmath) with 600 digits,
printed with 45. Coefficients ascend.
"""
import json
import random
from fractions import Fraction as F

import mpmath

mpmath.mp.dps = 600
rnd = random.Random(20240611)


def mul(a, b):
    out = [F(0)] * (len(a) + len(b) - 1)
    for i, u in enumerate(a):
        for j, v in enumerate(b):
            out[i + j] += u * v
    return out


def product(factors):
    out = [F(1)]
    for f in factors:
        out = mul(out, f)
    return out


def strings(p):
    return [str(c) for c in p]


def roots(p):
    """Roots of an expanded polynomial with simple roots, 45 digits."""
    c = [mpmath.mpf(x.numerator) / x.denominator for x in reversed(p)]
    z = mpmath.polyroots(c, maxsteps=2000, extraprec=4000)
    return [[mpmath.nstr(mpmath.re(x), 45), mpmath.nstr(mpmath.im(x), 45)] for x in z]


def lag(t):
    return [F(1), F(t)]


def mode(w, zeta):
    w = F(w)
    return [F(1), 2 * F(zeta) / w, 1 / w**2]


def root_cases():
    spread = product([lag(F(10) ** -k) for k in range(-3, 9)])
    clustered = product([lag(1 + F(k, 10**6)) for k in range(4)] + [mode(1, F(1, 10**3))])
    yield "twelve lags from 1e3 s to 1e-8 s", spread, 1
    yield "four lags within 3e-6, a mode beside them", clustered, 1
    yield "twenty lags, roots -1 to -20", product([[F(k), F(1)] for k in range(1, 21)]), 1
    yield "modes of damping 1e-9", product([mode(k, F(1, 10**9)) for k in (3, 50, 51)]), 1
    yield "triple pair", product([mode(7, F(1, 5)), lag(F(3, 7))]), 3
    yield "two real roots 1e-25 apart and a lag", product(
        [lag(1), lag(1 + F(1, 10**25)), lag(5)]), 1
    yield "a pair 1e-40 off the real axis and a lag", product(
        [[1 + F(1, 10**80), F(2), F(1)], lag(5)]), 1
    for k in range(6):
        n = rnd.randint(3, 12)
        p = [F(1)] + [F(rnd.randint(-10**6, 10**6), 10 ** rnd.randint(0, 9)) for _ in range(n)]
        yield f"random {k}", p, 1


def series(num, den, n):
    """First n terms of num/den, den may vanish at the origin."""
    zn = next(i for i, c in enumerate(num) if c)
    zd = next(i for i, c in enumerate(den) if c)
    num = num[zn:] + [F(0)] * n
    den = den[zd:] + [F(0)] * n
    out = []
    for k in range(n):
        out.append((num[k] - sum(den[j] * out[k - j] for j in range(1, k + 1))) / den[0])
    return zn - zd, out


def value(p, x):
    return sum(c * x**k for k, c in enumerate(p))


def decimal():
    return F(rnd.randint(-999, 999), 10 ** rnd.randint(0, 4))


def polynomial(n):
    p = [decimal() for _ in range(n + 1)]
    p[-1] = p[-1] or F(1)
    if rnd.random() < 0.3:
        p[0] = F(0)
    return p if any(p) else [F(1)]


def ratio_cases():
    for _ in range(25):
        a, b = polynomial(rnd.randint(0, 4)), polynomial(rnd.randint(0, 5))
        c, d = polynomial(rnd.randint(0, 3)), polynomial(rnd.randint(0, 3))
        start, s = series(a, b, 7)
        x = F(rnd.randint(1, 999), rnd.randint(1, 999))
        m = [F(rnd.randint(1, 9)), F(rnd.randint(-9, 9)), F(rnd.randint(-9, 9), 10), F(rnd.randint(10, 19))]
        w = (m[0] * x + m[1]) / (m[2] * x + m[3])
        g, h = value(a, x) / value(b, x), value(c, x) / value(d, x)
        yield {
            "num": strings(a), "den": strings(b), "num2": strings(c), "den2": strings(d),
            "start": start, "series": strings(s), "x": str(x),
            "sum": str(g + h), "difference": str(g - h), "product": str(g * h),
            "map": strings(m), "mapped": str(value(a, w) / value(b, w)),
        }


print(json.dumps({
    "roots": [{"name": name, "p": strings(p), "power": power, "roots": roots(p)}
              for name, p, power in root_cases()],
    "ratios": list(ratio_cases()),
}, indent=1))
