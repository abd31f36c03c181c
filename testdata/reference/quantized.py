#!/usr/bin/python3
"""Rounding in the loop: stuck values, limit cycles, encoders, converters, and noise through the loop.

    /usr/bin/python3 quantized.py            writes quantized.json (seconds)
    /usr/bin/python3 quantized.py --check

round() is to the nearest whole number, half away from zero. Each case has a kind:

stuck       y ← round(a·y) with the exact rational a: y from the start until it repeats, the period, and
            band: |y| ≤ 1/(2·(1 − |a|)), where rest (a > 0) or a cycle of two (a < 0) is possible; every run ends there

map         x ← a·x − b·Q(x), Q(x) = q·round(x/q). cycles: all that 4001 starts, evenly over ±start_span, lead to, each with
            the codes round(x/q) and x exactly as the equations of that sequence of codes give them,
            x_(j+1) = a·x_j − b·q·c_j round the cycle; from the largest x on. amplitude = (largest − smallest)/2;
            share: how many of the 4001 end there, followed in float64; the cycles themselves are exact

loop        plant 1/(s+1), e_k = r − Q(y(kT)), u_k = Kp·e_k + I_k, held, then I_(k+1) = I_k + T·Ki·e_k, from rest: y, u and
            codes at the first ticks, and the cycle they lead to: period_ticks, codes, y over one period from its
            largest y on, amplitude at the ticks. y between the ticks lies between its values there

encoder     position p(t) = start/N + velocity·t + acceleration·t²/2 in turns, N counts a turn; count c_k at t = kT, floor:
            ⌊N·p⌋, or nearest: round(N·p); difference: (c_k − c_(k−1))/(N·T) in turns/s, 0 at k = 0, for both.
            between: with floor, 1/(N·(t_j − t_(j−1))), t_j the instant of the last mark passed before kT, mark j at
            N·p = j, by an ideal clock; 0 until two marks have been passed. Only where p rises throughout

converter   step q = range/2^bits, and q/√12, the rms of an error even over ±q/2
encoder_step  one count a tick: rate/counts turns/s, rpm

noise       white noise n, variance 1, on every sample: u_k = −C(y(kT) + n_k), acting delay_s later. Steady variance of
            u_k and of y(kT). plant 1/(s+1), C = Kp, no delay, in closed form with a = e^(−T), b = 1 − a:

                var y = (b·Kp)²/(1 − (a − b·Kp)²)        var u = Kp²·(1 + var y)

            else from P = A·P·Aᵀ + B·Bᵀ of plant, last effort and controller, solved as linear equations, and held to
            Σ h², the squares of the answer to one n = 1, and without delay to (1/2π)·∮|H(e^(iθ))|² dθ over transfer
            functions. Controllers: Kp; Kp and Ki, I_(k+1) = I_k + T·Ki·e_k after the output; Kp and Kd, backward difference
"""
import sys
from fractions import Fraction

from mpmath import mp, mpf

sys.dont_write_bytecode = True

import kept  # noqa: E402
import loopnoise  # noqa: E402
from kept import clear, num  # noqa: E402

STUCK = [("9/10", [10, 100, -10, 5, 4, 1, 0]), ("-9/10", [10, -7, 3]), ("99/100", [1000, 51, 50]), ("1/2", [10, 1, -1])]
MAPS = [  # a, b, q, span of the starts
    ("0.9", "1.7", "1", "10"), ("0.95", "0.3", "0.1", "1"), ("0.5", "1.4", "0.25", "3"), ("-0.6", "0.35", "0.1", "2"), ("0.99", "1.95", "0.5", "10"),
]
LOOPS = [
    dict(period_s="0.5", kp="4", ki="0", reference="0.9", step="0.25"),
    dict(period_s="0.1", kp="5", ki="0", reference="1", step="0.3"),
    dict(period_s="0.2", kp="1", ki="2", reference="1", step="0.15"),
    dict(period_s="0.1", kp="0.5", ki="1", reference="-0.55", step="0.2"),
]
START = "0.137"  # counts, so that no tick falls on a mark or half way between two
ENCODERS = [  # counts a turn, period, velocity, acceleration
    ("constant, 2.3 counts a tick", 4000, "1/4000", "2.3", "0"), ("constant, less than a count a tick", 1000, "1/2000", "-0.37", "0"),
    ("constant, slow", 1000, "1/2000", "0.37", "0"), ("constant, 17 marks in 10 ticks", 2048, "1/1000", "0.830078125", "0"),
    ("ramp", 1000, "1/1000", "0", "7.5"), ("ramp, turns back", 1000, "1/1000", "0.71", "-30"),
]
NOISE = [
    dict(plant="1/(s + 1)", period_s="0.1", kp="3"), dict(plant="1/(s + 1)", period_s="0.5", kp="2"),
    dict(plant="1/(s + 1)", period_s="0.1", kp="3", ki="4"),
    dict(plant="1/(s*(s + 1))", period_s="0.1", kp="3"), dict(plant="1/(s*(s + 1))", period_s="0.1", kp="5", kd="2"),
    dict(plant="1/(s*(s + 1))", period_s="0.1", kp="1", ki="0.2"), dict(plant="1/(s*(s + 1))", period_s="0.1", kp="3", delay_s="0.04"),
    dict(plant="1/(s*(s + 1))", period_s="0.1", kp="5", kd="2", delay_s="0.04"),
]


def nearest(x):
    """Half away from zero; clear of the half unless x is exact."""
    if isinstance(x, Fraction):
        whole = (abs(x) + Fraction(1, 2)).__floor__()
        return whole if x >= 0 else -whole
    whole = int(mp.floor(abs(x) + mpf(1) / 2))
    clear(abs(abs(x) - whole) - mpf(1) / 2, "rounding")
    return whole if x >= 0 else -whole


def stuck(a, start):
    values, y, a = [start], start, Fraction(a)
    while True:
        y = nearest(a * y)
        if y in values:
            band = 1 / (2 * (1 - abs(a)))
            assert abs(y) <= band and len(values) - values.index(y) == (2 if a < 0 and y else 1)
            return {"name": "stuck, %s from %d" % (a, start), "kind": "stuck", "a": str(a), "y": values,
                    "period": len(values) - values.index(y), "band": mpf(band.numerator) / band.denominator}
        values.append(y)


def shortest(codes):
    """The least period of a tuple."""
    return next(codes[:n] for n in range(1, len(codes) + 1) if codes[:n] * (len(codes) // n) == codes and len(codes) % n == 0)


def exactly(a, b, q, codes):
    """The x round a cycle of codes: x0·(1 − aⁿ) = −b·q·Σ a^(n−1−j)·c_j."""
    n = len(codes)
    x = -b * q * sum(a ** (n - 1 - j) * c for j, c in enumerate(codes)) / (1 - a ** n)
    out = []
    for c in codes:
        out.append(x)
        assert nearest(x / q) == c, "not a cycle"
        half = abs(abs(x / q) - abs(c)) - Fraction(1, 2)
        assert abs(half) > Fraction(1, 10**8)
        x = a * x - b * q * c
    assert x == out[0]
    top = out.index(max(out))
    return out[top:] + out[:top], list(codes[top:] + codes[:top])


def attractor(a, b, q, start):
    """Codes of the cycle that one start leads to, in float64: the cycle is then solved exactly and must hold."""
    x, codes = start, []
    for _ in range(1200):
        c = int(abs(x) / q + 0.5) * (1 if x >= 0 else -1)
        codes.append(c)
        x = a * x - b * q * c
    tail = codes[600:]
    for n in range(1, 200):
        if tail[n:] == tail[:-n]:
            codes = tuple(tail[:n])
            return min(codes[j:] + codes[:j] for j in range(n))  # the same for each turn of the cycle
    raise AssertionError("no cycle")


def mapped(a, b, q, span):
    exact = [Fraction(v) for v in (a, b, q)]
    found = {}
    for j in range(4001):
        codes = attractor(*(float(v) for v in exact), float(span) * (j - 2000) / 2000)
        found[codes] = found.get(codes, 0) + 1
    real = lambda f: mpf(f.numerator) / f.denominator  # noqa: E731
    cycles = []
    for codes, share in sorted(found.items()):
        x, codes = exactly(*exact, codes)
        cycles.append({"period": len(x), "amplitude": real((max(x) - min(x)) / 2), "share": share, "codes": codes, "x": [real(v) for v in x]})
    cycles.sort(key=lambda c: (c["period"], c["amplitude"], c["x"][0]))
    return {"name": "map, %s, %s, %s" % (a, b, q), "kind": "map", "a": a, "b": b, "q": q, "start_span": span, "cycles": cycles}


def loop(spec):
    T, kp, ki, r, q = (num(spec[n]) for n in ("period_s", "kp", "ki", "reference", "step"))
    a, y, i, rows = mp.exp(-T), mpf(0), mpf(0), []
    for _ in range(4000):
        c = nearest(y / q)
        e = r - q * c
        u = kp * e + i
        rows.append((y, u, c))
        y, i = a * y + (1 - a) * u, i + T * ki * e
    near = lambda n: all(abs(rows[-1 - j][m] - rows[-1 - j - n][m]) < mpf(10) ** -38 for j in range(2 * n) for m in range(3))  # noqa: E731
    n = next((n for n in range(1, 500) if near(n)), None)
    assert n, "no cycle"
    last = rows[-n:]
    top = max(range(n), key=lambda j: last[j][0])
    last = last[top:] + last[:top]
    out = {"name": "loop, Kp %s, Ki %s, step %s" % (spec["kp"], spec["ki"], spec["step"]), "kind": "loop", "plant": "1/(s + 1)"}
    out.update(spec)
    out["cycle"] = {"period_ticks": n, "period_s": n * T, "amplitude": (last[0][0] - min(v[0] for v in last)) / 2,
                    "codes": [v[2] for v in last], "y": [v[0] for v in last]}
    out.update({m: [v[j] for v in rows[:80]] for j, m in enumerate(("y", "u", "codes"))})
    return out


def encoder(name, counts, period, v, alpha):
    N, T, v0, acc = Fraction(counts), Fraction(period), Fraction(v), Fraction(alpha)
    at = [Fraction(START) + N * (v0 * k * T + acc * (k * T) ** 2 / 2) for k in range(60)]
    assert all(min(x % Fraction(1, 2), -x % Fraction(1, 2)) > Fraction(1, 10**6) for x in at)
    out = {"name": "encoder, " + name, "kind": "encoder", "counts": counts, "period_s": period, "start": START, "velocity": v, "acceleration": alpha}
    for rule, c in (("floor", [x.__floor__() for x in at]), ("nearest", [nearest(x) for x in at])):
        out["count_" + rule] = c
        steps = [0] + [b - a for a, b in zip(c, c[1:])]
        out["difference_" + rule] = [s / (mpf(N.numerator) * T.numerator / T.denominator) for s in steps]
    out["between"] = None
    if v0 >= 0 and acc >= 0:
        real = lambda f: mpf(f.numerator) / f.denominator  # noqa: E731
        mark = lambda j: real((j - at[0]) / (N * v0)) if acc == 0 else mp.sqrt(real(2 * (j - at[0]) / (N * acc)))  # noqa: E731
        assert acc == 0 or v0 == 0
        passed = [Fraction(x.__floor__()) for x in at]
        out["between"] = [1 / (counts * (mark(j) - mark(j - 1))) if j >= 2 else mpf(0) for j in passed]
        assert acc != 0 or all(b == 0 or abs(b - real(v0)) < mpf(10) ** -40 for b in out["between"])
    return out


def steps():
    out = []
    for bits, span in ((12, "3.3"), (10, "5"), (16, "10"), (24, "2.5")):
        q = num(span) / 2**bits
        rms = mp.sqrt(mp.quad(lambda e: e * e / q, [-q / 2, q / 2]))
        assert abs(rms - q / mp.sqrt(12)) < mpf(10) ** -45
        out.append({"name": "converter, %d bits over %s V" % (bits, span), "kind": "converter", "bits": bits, "range": span, "q": q, "rms": rms})
    assert abs(out[0]["q"] - num("0.000805664")) < num("5e-10") and abs(out[0]["rms"] - num("0.000232575")) < num("5e-10")
    for counts, rate in ((4000, 4000), (2048, 10000), (10000, 1000)):
        turns = mpf(rate) / counts
        out.append({"name": "one count a tick, %d counts at %d Hz" % (counts, rate), "kind": "encoder_step", "counts": counts, "rate_hz": rate,
                    "turns_per_s": turns, "rpm": 60 * turns})
    assert out[4]["rpm"] == 60
    return out


def derive():
    out = [stuck(a, s) for a, starts in STUCK for s in starts]
    assert out[0]["y"] == [10, 9, 8, 7, 6, 5]  # 4.5 rounds away from zero to 5
    out += [mapped(*m) for m in MAPS]
    out += [loop(s) for s in LOOPS]
    out += [encoder(*e) for e in ENCODERS]
    out += steps()
    return out + [loopnoise.case(s) for s in NOISE]


if __name__ == "__main__":
    kept.main("quantized.json", derive)
