#!/usr/bin/env python3
"""Reference values for hold and triangle equivalents in δ form, 50 digits.

    /usr/bin/python3 hold_reference.py > hold_reference.json

Route: companion state space, matrix exponential of the block matrix [[A, B], [0, 0]] in
300-digit arithmetic (mpmath 1.2.1), (e^{AT} − I)/T by plain subtraction, adjugate by
Faddeev and Leverrier. It shares no step with the package: no poles, no divided
differences. All plants are invented.
"""
import json
from fractions import Fraction

from mpmath import mp, mpf, matrix, eye, zeros, expm

mp.dps = 300

# name, numerator factors, denominator factors: ascending decimal coefficients
PLANTS = [
    ("lag", [["1"]], [["1", "1"]]),
    ("two integrators and a zero", [["10", "10"]], [["0", "1"], ["0", "1"]]),
    ("type 2, order 5", [["3000", "1000"]], [["0", "1"], ["0", "1"], ["20", "1"], ["2500", "30", "1"]]),
    ("triple pole", [["1000"]], [["10", "1"], ["10", "1"], ["10", "1"]]),
    ("nearly triple pole", [["1000"]], [["10", "1"], ["10.000001", "1"], ["10.0000000001", "1"]]),
    ("light damping twice", [["9e12"]], [["90000", "0.06", "1"], ["1e8", "0.02", "1"]]),
    ("undamped", [["1e6"]], [["1e6", "0", "1"]]),
    ("far apart", [["1e9"]], [["1", "1"], ["1e3", "1"], ["1e6", "1"]]),
    ("unstable, zero on the right", [["-3", "1"]], [["-5", "1"], ["2", "1"]]),
    ("slow zeros", [["0.001", "1"], ["0.001", "1"]], [["1", "1"], ["2", "1"], ["3", "1"]]),
    ("slow zeros, fast poles", [["2", "1"], ["3", "1"], ["1e15"]], [["1", "1"], ["1e4", "1"], ["1e5", "1"], ["1e6", "1"]]),
    ("differentiating", [["0", "1"]], [["1", "1"], ["2", "1"]]),
    ("differentiating twice", [["0", "1"], ["0", "1"]], [["1", "1"], ["2", "1"], ["3", "1"]]),
    ("hidden at the origin", [["0", "1"], ["4", "1"]], [["0", "1"], ["0", "1"], ["2", "1"]]),
    ("hidden lag", [["1", "1"], ["5"]], [["1", "1"], ["2", "1"], ["0", "1"]]),
    ("straight through", [["2", "1"]], [["1", "1"]]),
    ("notch", [["1000", "0.5", "1"]], [["1000", "30", "1"]]),
    ("twelve lags", [["479001600"]], [[str(k), "1"] for k in range(1, 13)]),
    ("twelve, one polynomial", [["100", "1"]], [[
        "479001600", "1486442880", "1931559552", "1414014888", "657206836", "206070150",
        "44990231", "6926634", "749463", "55770", "2717", "78", "1"]]),
    ("twelve, mixed", [["7", "1"], ["400", "12", "1"], ["25", "1"]],
     [["0", "1"], ["0", "1"], ["0", "1"], ["9", "1"], ["9", "1"], ["90000", "6", "1"],
      ["1e6", "40", "1"], ["5000", "1"], ["1e10", "2e3", "1"]]),
]
CASES = [("1e-7", "0"), ("1e-7", "3e-8"), ("1e-5", "137/10000000"), ("1e-3", "1/3000"),
         ("1e-2", "-4e-3"), ("0.5", "0.35")]


def frac(s):
    return Fraction(s)


def mpfrac(f):
    return mpf(f.numerator) / mpf(f.denominator)


def product(factors):
    out = [Fraction(1)]
    for f in factors:
        f = [frac(c) for c in f]
        new = [Fraction(0)] * (len(out) + len(f) - 1)
        for i, a in enumerate(out):
            for j, b in enumerate(f):
                new[i + j] += a * b
        out = new
    return out


def companion(num, den):
    """Controllable companion form; num, den exact ascending."""
    n = len(den) - 1
    num = [c / den[-1] for c in num] + [Fraction(0)] * (n + 1 - len(num))
    den = [c / den[-1] for c in den]
    d = num[n]
    A, B, C = zeros(n), zeros(n, 1), zeros(1, n)
    for i in range(n - 1):
        A[i, i + 1] = mpf(1)
    for i in range(n):
        A[n - 1, i] = -mpfrac(den[i])
        C[0, i] = mpfrac(num[i] - d * den[i])
    B[n - 1, 0] = mpf(1)
    return A, B, C, mpfrac(d)


def augmented(A, B, h, extra):
    """e^{Ah}, and ∫ e^{As}B ds, and with extra the ramp part."""
    n = A.rows
    M = zeros(n + 1 + extra)
    M[:n, :n] = A
    M[:n, n] = B
    if extra:
        M[n, n + 1] = mpf(1)
    E = expm(M * h, method="taylor")
    return E[:n, :n], E[:n, n], (E[:n, n + 1] if extra else None)


def adjugate(M):
    """Characteristic polynomial (ascending) and the matrices of adj(xI − M), ascending."""
    n = M.rows
    c = [mpf(1)]
    N = eye(n)
    mats = [N]
    for k in range(1, n + 1):
        P = M * N
        ck = -sum(P[i, i] for i in range(n)) / k
        c.append(ck)
        N = P + ck * eye(n)
        if k < n:
            mats.append(N)
    return c[::-1], mats[::-1]


def clean(v):
    big = max(abs(x) for x in v)
    out = []
    for x in v:
        out.append("0" if abs(x) < big * mpf(10) ** -150 else mp.nstr(x, 50))
    while out and out[-1] == "0":
        out.pop()
    return out


def padd(a, b):
    n = max(len(a), len(b))
    return [(a[i] if i < len(a) else 0) + (b[i] if i < len(b) else 0) for i in range(n)]


def hold(num, den, T, delay):
    A, B, C, D = companion(num, den)
    ticks = delay // T
    eps = delay - ticks * T
    h = T - eps if eps else Fraction(0)
    Phi, Gam, _ = augmented(A, B, mpfrac(T), 0)
    Eh, Gh, _ = augmented(A, B, mpfrac(h), 0)
    t = mpfrac(T)
    chi, mats = adjugate((Phi - eye(A.rows)) / t)
    row = C * Eh
    direct = (C * Gh)[0, 0] + D
    p = [(row * (M * Gam))[0, 0] / t for M in mats]
    p = padd(p, [direct * c for c in chi])
    pole = eps != 0 and ticks >= 0
    if pole:
        p = [c / t for c in p]
    return dict(ticks=max(int(ticks), 0), pole=pole, num=clean(p), den=clean(chi))


def triangle(num, den, T):
    A, B, C, D = companion(num, den)
    Phi, G1, G2 = augmented(A, B, mpfrac(T), 1)
    t = mpfrac(T)
    chi, mats = adjugate((Phi - eye(A.rows)) / t)
    p = [(C * (M * G1))[0, 0] / t for M in mats]
    q = [mpf(0)] + [(C * (M * G2))[0, 0] / t for M in mats]
    return dict(num=clean(padd(padd(p, q), [D * c for c in chi])), den=clean(chi))


out = []
for name, nf, df in PLANTS:
    num, den = product(nf), product(df)
    cases = []
    for T, delay in CASES:
        c = dict(period=T, delay=delay)
        c["hold"] = hold(num, den, frac(T), frac(delay))
        if delay == "0" or T == "0.5":
            c["triangle"] = triangle(num, den, frac(T))
        cases.append(c)
    out.append(dict(name=name, num=nf, den=df, cases=cases))
print(json.dumps(out, indent=0, ensure_ascii=False))
