#!/usr/bin/python3
"""Play between two parts: w = play(x), full width gap, at the plant's output or at its input.

    /usr/bin/python3 backlash.py            writes backlash.json (seconds)
    /usr/bin/python3 backlash.py --check

Play, h = gap/2, w = 0 at the start, the part that drives in the middle of the play:

    w ← max(min(w, x + h), x − h)      along x without a break, so at each turn of x and at each end

w follows x at a distance of h once the play is used up and stands still while x crosses it. It has no
thresholds that a rounding error could upset: |Δw| ≤ |Δx| of two runs.

Plant 1/(s(s+1)), x' = v, v' = f − v, from rest at 0. Under a held f

    v(t) = f + (v0 − f)·e^(−t)      x(t) = x0 + f·t + (v0 − f)·(1 − e^(−t))
    x turns at t = ln((f − v0)/f), if that is within the stretch; else x is monotone in it

at output   f is the held effort, y = play(x)
at input    f = play(held effort), y = x

Timing: tick k at t = kT; the sample y_k is taken before the new effort acts; the new effort acts delay_s later
and is held until the next one does; 0 before the first.

open        u_k is given
loop        u_k = Kp·e_k + I_k,  e_k = r − y_k,  then I_(k+1) = I_k + T·Ki·e_k,  I_0 = 0

Values at tick k: y, x, u_k (as sent, before the play), and f_k where play is at the input.

turns       instants at which x turns, and x there, of the ticks written
cycle       the run repeats exactly every period_ticks ticks in the end: period_s, of x and y (between the ticks too) high,
            low and amplitude = (high − low)/2 (at input y is x), and y of one period from tick `from`, a multiple of period_ticks. Null
            where it does not, see swings
swings      loop with 60 turns or more: of the last 40 turns of a run of some thousand ticks, half the way of x from turn to turn and twice the
            time: mean, least, largest. Where the cycle repeats all three are the same
predicted   loop at output: amplitude of x and of y and period by the describing function, rough by nature, so null
            where it has no solution though the run has a cycle. 1 + N(A)·L(iω) = 0, z = e^(iωT), c = 1 − 2h/A,

            L(s) = (Kp + Ki·T/(z − 1)) · (1 − 1/z)/(sT) · e^(−s·delay) · 1/(s(s+1))
            N(A) = (1/π)·(π/2 + asin c + c·√(1 − c²)) − i·(1 − c²)/π

            textbook formula, from memory; held to Fourier integrals of the play's output
spread      as in friction.py: tick by tick, largest move of y when the samples are off by ±10⁻¹², over 10⁻¹²
"""
import sys

import numpy as np
from mpmath import mp, mpf
from scipy import signal

sys.dont_write_bytecode = True

import kept  # noqa: E402
from friction import signs  # noqa: E402
from kept import clear, num  # noqa: E402

BASE = dict(gap="0.2", at="output", period_s="0.25", delay_s="0")
EFFORTS = [["1", 4], ["-1", 5], ["0.3", 2], ["-0.2", 2], ["0", 3], ["0.7", 4], ["-2", 2], ["2", 2], ["-2", 2], ["0.05", 6], ["-0.04", 6], ["0.5", 3],
           ["-0.5", 1], ["0.5", 1], ["-0.5", 2]]
SETS = [
    dict(name="open, play at the output", efforts=EFFORTS),
    dict(name="open, play at the output, effort late by 0.4 of a tick", efforts=EFFORTS, delay_s="0.1"),
    dict(name="open, play at the input", efforts=EFFORTS, at="input"),
    dict(name="proportional, cycle of 16 ticks", run=6000, kp="2", ki="0", reference="1", period_s="0.5"),
    dict(name="proportional and integral, cycle of 28 ticks", run=9000, kp="2", ki="0.3", reference="1"),
    dict(name="proportional and integral, cycle of 12 ticks", run=3000, kp="2", ki="0.3", reference="1", period_s="0.5"),
    dict(name="proportional, cycle not in step with the ticks", run=6000, kp="4", ki="0", reference="1", period_s="0.1"),
    dict(name="proportional, comes to rest", run=120, kp="1", ki="0", reference="1", period_s="0.1"),
    dict(name="proportional and integral, play at the input", run=3000, kp="1", ki="0.1", reference="1", at="input"),
]
KEEP = 120  # ticks written


def play(w, x, h):
    return max(min(w, x + h), x - h)


class Plant:
    """x, v, and w behind the play; the turns of x."""

    def __init__(self, spec):
        self.h, self.input = num(spec["gap"]) / 2, spec["at"] == "input"
        self.x = self.v = self.w = self.f = self.t = mpf(0)
        self.turns = []
        self.high, self.low = [], []  # of x, of each stretch

    @property
    def y(self):
        return self.x if self.input else self.w

    def at(self, f, t):
        fall = -mp.expm1(-t)
        return self.x + f * t + (self.v - f) * fall, self.v + (f - self.v) * fall

    def hold(self, u, span):
        if self.input:
            self.w = play(self.w, u, self.h)
        self.f = f = self.w if self.input else u
        turn = mp.log((f - self.v) / f) if f != 0 and (f - self.v) / f > 0 else mpf(-1)
        ends, stretch = [span], [self.x]
        if 0 < turn < span:
            clear(turn, "turn at the start of a stretch")
            clear(span - turn, "turn at the end of a stretch")
            ends = [turn, span]
            self.turns.append([self.t + turn, self.at(f, turn)[0]])
        for end in ends:
            x = self.at(f, end)[0]
            stretch.append(x)
            if not self.input:
                self.w = play(self.w, x, self.h)
        self.x, self.v = self.at(f, span)
        self.t += span
        self.high.append(max(stretch))
        self.low.append(min(stretch))


def simulate(spec, ticks, off=mpf(0)):
    p, sign, i, u = Plant(spec), signs(), mpf(0), mpf(0)
    T, delay, rows = num(spec["period_s"]), num(spec["delay_s"]), []
    for k in range(ticks):
        y, last = p.y, u
        if "efforts" in spec:
            u = spec["sequence"][k]
        else:
            e = num(spec["reference"]) - (y + off * next(sign))
            u = num(spec["kp"]) * e + i
            i += T * num(spec["ki"]) * e
        before = (y, p.x, p.v, i)
        if delay > 0:
            p.hold(last, delay)
        p.hold(u, T - delay)
        rows.append((y, before[1], u, p.f, before[2], i))
    return p, rows


def cycle(spec, p, rows):
    near = lambda a, b: all(abs(q - r) < mpf(10) ** -38 for q, r in zip(a, b))  # noqa: E731
    for n in range(2, 100):
        if all(near(rows[-1 - j], rows[-1 - j - n]) for j in range(2 * n)):
            begin = (len(rows) - n) // n * n
            high, low = max(p.high[-n:]), min(p.low[-n:])
            half, gone = (high - low) / 2, 0 if p.input else p.h
            if half == 0:
                return None
            assert half > gone
            return {"period_ticks": n, "period_s": n * num(spec["period_s"]), "x_high": high, "x_low": low, "x_amplitude": half,
                    "y_high": high - gone, "y_low": low + gone, "y_amplitude": half - gone, "from": begin,
                    "y": [r[0] for r in rows[begin:begin + n]]}
    return None


def swings(p):
    if len(p.turns) < 60:
        return None
    pairs = list(zip(p.turns[-41:], p.turns[-40:]))
    of = lambda v: {"mean": sum(v) / len(v), "least": min(v), "largest": max(v)}  # noqa: E731
    return {"x_amplitude": of([abs(b[1] - a[1]) / 2 for a, b in pairs]), "period_s": of([2 * (b[0] - a[0]) for a, b in pairs])}


def describing(c):
    return (mp.pi / 2 + mp.asin(c) + c * mp.sqrt(1 - c * c)) / mp.pi - 1j * (1 - c * c) / mp.pi


def by_fourier():
    """(2/A)·(1/2π)·∮ w·(sin θ + i·cos θ) dθ of the play's output for x = A·sin θ, A = 1, h = (1 − c)/2.

    Half a period from the top: w = 1 − h until x = 1 − 2h = c, θ = π − asin c; then x + h until the bottom; the
    other half the same with both signs turned.
    """
    for c in (mpf("0.8"), mpf("0.1"), mpf("-0.6")):
        h = (1 - c) / 2
        leave = mp.pi - mp.asin(c)
        half = lambda g: (mp.quad(lambda t: (1 - h) * g(t), [mp.pi / 2, leave])  # noqa: E731
                          + mp.quad(lambda t: (mp.sin(t) + h) * g(t), [leave, 3 * mp.pi / 2]))
        got = 2 * (half(mp.sin) + 1j * half(mp.cos)) / mp.pi
        assert abs(got - describing(c)) < mpf(10) ** -40, c


def predicted(spec, found):
    T, kp, ki, h = num(spec["period_s"]), num(spec["kp"]), num(spec["ki"]), num(spec["gap"]) / 2

    def loop(w):
        s = 1j * w
        z = mp.exp(s * T)
        return (kp + ki * T / (z - 1)) * (1 - 1 / z) / (s * T) * mp.exp(-s * num(spec["delay_s"])) / (s * (s + 1))

    equations = lambda A, w: [f(1 + describing(1 - 2 * h / A) * loop(w)) for f in (mp.re, mp.im)]  # noqa: E731
    run = found["x_amplitude"]["mean"], found["period_s"]["mean"]
    try:
        A, w = mp.findroot(equations, (run[0], 2 * mp.pi / run[1]))
    except ValueError:
        off = min(abs(1 + describing(mpf(c) / 50) * loop(2 * mp.pi / run[1] * mpf(f) / 50)) for c in range(-49, 50) for f in range(5, 150))
        assert off > mpf("0.02"), "a solution is likely but was not found"
        return None
    period = 2 * mp.pi / w
    assert abs(A / run[0] - 1) < num("0.1") and abs(period / run[1] - 1) < num("0.1"), "describing function and run disagree"
    return {"x_amplitude": A, "y_amplitude": A - h, "period_s": period}


def by_scipy(spec, rows):
    """The run under the efforts found on a grid of T/1000 by SciPy; between its points a turn is missed by |x''|·dt²/8."""
    n, T, h = 1000, float(num(spec["period_s"])), float(num(spec["gap"])) / 2
    late = round(n * float(num(spec["delay_s"])) / T)
    a, b, _, _, _ = signal.cont2discrete([np.array(m) for m in ([[0, 1], [0, -1]], [[0], [1]], [[1, 0]], [[0]])], T / n)
    s, w, u, fastest = np.zeros(2), 0.0, 0.0, 0.0
    for k, (y, x, sent, *_) in enumerate(rows):
        off = max(abs(s[0] - float(x)), abs((s[0] if spec["at"] == "input" else w) - float(y)))
        assert off < 1e-12 * n + fastest * (T / n) ** 2 / 8, (spec["name"], k, off)
        for j in range(n):
            u = float(sent) if j == late else u
            if spec["at"] == "input":
                w = max(min(w, u + h), u - h)
            force = w if spec["at"] == "input" else u
            fastest = max(fastest, abs(force - s[1]))
            s = a @ s + b[:, 0] * force
            if spec["at"] == "output":
                w = max(min(w, s[0] + h), s[0] - h)


def turned():
    """From rest, u = 1 for 1 s, then −1: x turns ln(1 + v) s later, v = 1 − 1/e, at 1/e − ln(1 + v) + v."""
    p, v = Plant(BASE), 1 - mp.exp(-1)
    p.hold(mpf(1), mpf(1))
    p.hold(mpf(-1), mpf("0.75"))
    top = mp.exp(-1) - mp.log(1 + v) + v
    assert abs(p.turns[0][0] - 1 - mp.log(1 + v)) < mpf(10) ** -45 and abs(p.turns[0][1] - top) < mpf(10) ** -45
    assert p.x > top - 2 * p.h and abs(p.y - (top - p.h)) < mpf(10) ** -45


def case(given):
    spec = dict(BASE, **given)
    loop = "efforts" not in spec
    if not loop:
        spec["sequence"] = [num(u) for u, n in spec["efforts"] for _ in range(n)]
    p, rows = simulate(spec, spec["run"] if loop else len(spec["sequence"]))
    by_scipy(spec, rows[:KEEP])
    out = {n: spec.get(n) for n in ("name", "at", "gap", "period_s", "delay_s", "kp", "ki", "reference")}
    out["turns"] = [t for t in p.turns if t[0] < KEEP * num(spec["period_s"])]
    out["cycle"] = cycle(spec, p, rows) if loop else None
    out["swings"] = swings(p) if loop else None
    out["predicted"] = predicted(spec, out["swings"]) if out["swings"] and not p.input else None
    rows = rows[:KEEP]
    out["spread"] = None
    if loop:
        with mp.workdps(kept.LOW):
            moved = simulate(spec, KEEP, mpf(10) ** -12)[1]
        off = [int(mp.ceil(abs(a[0] - b[0]) * mpf(10) ** 12)) for a, b in zip(moved, rows)]
        out["spread"] = [max(off[:k + 1]) for k in range(len(off))]
    out.update({n: [r[j] for r in rows] for j, n in enumerate("yxuf") if n != "f" or p.input})
    return out


def derive():
    by_fourier()
    turned()
    return [case(given) for given in SETS]


if __name__ == "__main__":
    kept.main("backlash.json", derive)
