#!/usr/bin/python3
"""Reference values for the elementary functions, with mpmath at 80 digits.

    /usr/bin/python3 reference.py > reference.json
    /usr/bin/python3 reference.py constants

A case is {"f": name, "x": [hi, lo, ...], "y": [decimal, ...]}. Arguments are
double-double pairs, exact; complex ones have four words, the real part first.
Values have 60 significant digits, real part first; sincos gives sine, cosine.
"""
import json
import random
import sys

from mpmath import (mp, mpf, mpc, pi, exp, expm1, log, log1p, sin, cos, atan2, sqrt,
                    frexp, floor, hypot, nstr)

mp.dps = 80
rnd = random.Random(20260101)


def pair(hi):
    """hi with a random low word of half an ulp at most."""
    m, e = frexp(mpf(hi))
    lo = float(mpf(rnd.uniform(-1, 1)) * mpf(2) ** (int(e) - 54)) if hi else 0.0
    if mpf(hi) + mpf(lo) == mpf(hi):
        lo = 0.0
    hi2 = float(mpf(hi) + mpf(lo))
    return [hi2, float(mpf(hi) + mpf(lo) - mpf(hi2))]


def near(v):
    """v rounded to double-double."""
    hi = float(v)
    return [hi, float(v - mpf(hi))]


def size(low, high):
    """log-uniform magnitude, random sign."""
    return rnd.choice([-1, 1]) * 10 ** rnd.uniform(low, high)


def val(p):
    return mpf(p[0]) + mpf(p[1])


def precise(f, *a):
    """f with enough digits for any cancellation: 80 after 700 guard digits."""
    with mp.workdps(780):
        return f(*a)


def emit(out, name, args, *values):
    x = [w for a in args for w in a]
    out.append({"f": name, "x": x, "y": [nstr(v, 60, strip_zeros=False) for v in values]})


def real_cases(out):
    args = [pair(size(-30, 2.8)) for _ in range(120)] + [pair(rnd.uniform(-1, 1)) for _ in range(40)]
    args += [near(k * log(2) / 2 * (1 + mpf(d))) for k in (-3, -1, 1, 2, 5, 999) for d in (0, 1e-9)]
    for a in args:
        emit(out, "exp", [a], precise(exp, val(a)))
        emit(out, "expm1", [a], precise(expm1, val(a)))
    logs = [pair(10 ** rnd.uniform(-280, 300)) for _ in range(60)]
    logs += [near(1 + mpf(size(-30, -0.3))) for _ in range(60)]
    logs += [pair(rnd.uniform(0.3, 3)) for _ in range(40)]
    for a in logs:
        emit(out, "log", [a], precise(log, val(a)))
    for a in [pair(size(-200, -0.01)) for _ in range(80)] + [pair(10 ** rnd.uniform(-2, 200)) for _ in range(40)] + \
            [near(-1 + mpf(10) ** rnd.uniform(-30, -1)) for _ in range(20)]:
        emit(out, "log1p", [a], precise(log1p, val(a)))


def angle_cases(out):
    args = [pair(size(-30, 0)) for _ in range(60)] + [pair(size(0, 9)) for _ in range(80)]
    args += [pair(size(9, 15)) for _ in range(30)] + [pair(size(15, 300)) for _ in range(20)]
    args += [near(pi / 2 * k) for k in (1, 2, 3, -1, 7, 1001, 10**6 + 1, 636619772)]
    args += [near(pi / 4 * (2 * k + 1) + mpf(d)) for k in (0, 1, 2, 3, -1, 12345) for d in (0, 1e-20, -1e-18)]
    args += [near(pi * k + mpf(size(-12, -6))) for k in (1, 3, 1000, 3 * 10**8) for _ in range(4)]
    for a in args:
        emit(out, "sincos", [a], precise(sin, val(a)), precise(cos, val(a)))
    for _ in range(120):
        y, x = pair(size(-20, 20)), pair(size(-20, 20))
        emit(out, "atan2", [y, x], precise(atan2, val(y), val(x)))
    for _ in range(40):
        y, x = pair(size(-150, 150)), pair(size(-150, 150))
        emit(out, "atan2", [y, x], precise(atan2, val(y), val(x)))
        emit(out, "hypot", [y, x], precise(hypot, val(y), val(x)))


def complex_cases(out):
    def c(name, z):
        f = {"cexp": exp, "cexpm1": expm1, "clog": log, "clog1p": log1p, "csqrt": sqrt}[name]
        w = precise(f, mpc(val(z[0]), val(z[1])))
        emit(out, name, z, w.real, w.imag)

    small = [[pair(size(-25, -1)), pair(size(-25, -1))] for _ in range(60)]
    axis = [[pair(size(-28, -10)), pair(size(-3, 3))] for _ in range(40)]
    plain = [[pair(size(-2, 1.5)), pair(size(-2, 2))] for _ in range(60)]
    onreal = [[pair(size(-20, 2)), [0.0, 0.0]] for _ in range(10)]
    turn = [[pair(size(-15, -5)), near(2 * pi * k + mpf(size(-15, -5)))] for k in (1, -1, 40, 10**5) for _ in range(4)]
    zero = [[near(mpf(b) ** 2 / 2), [b, 0.0]] for b in (1e-3, 1e-6, 0.01)]  # Re of expm1 near 0
    for z in small + axis + plain + onreal + turn + zero:
        c("cexp", z)
        c("cexpm1", z)
    circle = []
    for _ in range(40):
        t, d = mpf(rnd.uniform(-3.1, 3.1)), mpf(size(-20, -3))
        circle.append([near((1 + d) * cos(t)), near((1 + d) * sin(t))])
    wide = [[pair(size(-150, 150)), pair(size(-150, 150))] for _ in range(40)]
    for z in small + axis + plain + circle + wide + turn:
        c("clog", z)
        c("csqrt", z)
    for z in small + axis + plain + wide + [[near(val(x) - 1), y] for x, y in circle]:
        c("clog1p", z)


def constants():
    def words(v, n, bits=53):
        for i in range(n):
            q = mpf(2) ** (int(frexp(v)[1]) - bits)
            w = float(floor(v / q) * q) if bits < 53 and i < n - 1 else float(v)
            yield w.hex()
            v -= mpf(w)
    print("pi/2", *words(pi / 2, 4))
    print("pi", *words(+pi, 2))
    print("ln2", *words(log(2), 2))
    print("ln2, 42 bits", *words(log(2), 4, 42))


if "constants" in sys.argv:
    constants()
else:
    cases = []
    real_cases(cases)
    angle_cases(cases)
    complex_cases(cases)
    print("[\n" + ",\n".join(json.dumps(c) for c in cases) + "\n]")
