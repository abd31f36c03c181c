#!/usr/bin/python3
"""Reference roots with mpmath: polynomials with float64 coefficients, and a
function that is no polynomial.

    /usr/bin/python3 roots.py > roots.json

"p" is the list of coefficients, ascending powers, exact float64 values; "x" the
roots as [re, im] decimals of 50 digits. "lambert" are solutions of
x + e^(-x) = 0, which are W_k(-1), k = 0, 1, ... (upper half-plane).
"""
import json
import random

from mpmath import mp, mpf, lambertw, nstr, polyroots

rnd = random.Random(20260102)


def text(z):
    return [nstr(mp.re(z), 50), nstr(mp.im(z), 50)]


def case(name, p, digits=120):
    # mpmath stops at an absolute error: small roots need more digits
    with mp.workdps(digits):
        x = polyroots([mpf(c) for c in reversed(p)], maxsteps=2000, extraprec=200)
        # mpmath leaves rounding noise in the imaginary part of a real root
        x = [mp.re(z) if abs(mp.im(z)) < mpf(10) ** -100 * abs(z) else z for z in x]
    return {"name": name, "p": p, "x": [text(z) for z in x]}


def product(roots):
    p = [mpf(1)]
    for r in roots:
        p = [(p[k - 1] if k else 0) - r * (p[k] if k < len(p) else 0) for k in range(len(p) + 1)]
    return [float(c) for c in p]


cases = []
for n in (2, 3, 4, 6, 9, 14, 20, 30):
    cases.append(case(f"uniform coefficients, degree {n}", [rnd.uniform(-1, 1) for _ in range(n + 1)]))
for n in (3, 5, 8, 12, 20):
    cases.append(case(f"coefficients over 60 decades, degree {n}",
                      [rnd.choice([-1, 1]) * 10 ** rnd.uniform(-30, 30) for _ in range(n + 1)]))
for n in (4, 8, 12, 16):
    cases.append(case(f"real roots from 1e-3 to 1e8, degree {n}",
                      product([-mpf(10) ** rnd.uniform(-3, 8) for _ in range(n)])))
cases.append(case("close real roots 1e-6 apart", product([-1, mpf(-1) - mpf(10) ** -6, -3, mpf(-3) - mpf(10) ** -6])))
cases.append(case("wide range", [1e-300, 3e-160, 1.0, 2e150, 1e290], 900))
cases.append(case("exponential series, degree 24", [float(1 / mp.factorial(k)) for k in range(25)]))
cases.append(case("degree 120", [rnd.gauss(0, 1) for _ in range(121)]))
with mp.workdps(60):
    lam = [text(lambertw(-1, k)) for k in range(6)]
print("{\n\"cases\": [\n" + ",\n".join(json.dumps(c) for c in cases) + "\n],\n\"lambert\": " + json.dumps(lam) + "\n}")
