#!/usr/bin/python3
"""Reference runs of sampled loops: each stretch between two events is integrated by SciPy's
DOP853 (tolerance 1e-13), event by event. Writes sampled.json beside this file.

Run: /usr/bin/python3 sampled.py      (python3-scipy, python3-numpy of the distribution)

Independent of the program in every part: plant in controllable canonical form, controller as a
direct-form difference equation in z, times from fractions. Values are in no unit.
"""
import json
import math
import os
from fractions import Fraction as F

import numpy as np
from scipy.integrate import solve_ivp


def canonical(num, den):
    """State space of num/den, descending powers, controllable canonical form."""
    den = [float(F(v)) for v in den]
    num = [float(F(v)) for v in num]
    n = len(den) - 1
    num = [0.0] * (n + 1 - len(num)) + num
    num = [v / den[0] for v in num]
    den = [v / den[0] for v in den]
    if n == 0:
        return np.zeros((0, 0)), np.zeros(0), np.zeros(0), num[0]
    a = np.zeros((n, n))
    a[0] = [-v for v in den[1:]]
    for i in range(1, n):
        a[i, i - 1] = 1
    b = np.zeros(n)
    b[0] = 1
    c = np.array([num[i + 1] - num[0] * den[i + 1] for i in range(n)])
    return a, b, c, num[0]


def signal(kind, *p):
    """value(t) and the instants where it is not smooth."""
    if kind == "step":
        return (lambda t: p[0] if t >= 0 else 0.0), [0.0]
    if kind == "late":  # a table: 0, then p[0] from p[1] on
        return (lambda t: p[0] if t >= p[1] else 0.0), [p[1]]
    if kind == "ramp":
        return (lambda t: p[0] * max(t, 0)), [0.0]
    if kind == "parabola":
        return (lambda t: p[0] * max(t, 0) ** 2 / 2), [0.0]
    if kind == "sine":
        return (lambda t: p[0] * math.sin(p[1] * max(t, 0))), [0.0]
    if kind == "zero":
        return (lambda t: 0.0), []
    raise ValueError(kind)


class Difference:
    """num/den in descending powers of z, direct form."""

    def __init__(self, num, den):
        self.b = [float(F(v)) for v in num]
        self.a = [float(F(v)) for v in den]
        n = len(self.a)
        self.b = [0.0] * (n - len(self.b)) + self.b
        self.b = [v / self.a[0] for v in self.b]
        self.a = [v / self.a[0] for v in self.a]
        self.e = [0.0] * n
        self.y = [0.0] * n

    def __call__(self, e):
        self.e = [e] + self.e[:-1]
        y = sum(b * v for b, v in zip(self.b, self.e)) - sum(a * v for a, v in zip(self.a[1:], self.y))
        self.y = [y] + self.y[:-1]
        return y


class PI:
    """kp + ki/δ with anti-windup, by hand."""

    def __init__(self, kp, ki, period, kind, track):
        self.kp, self.ki, self.period, self.kind, self.track = kp, ki, period, kind, track
        self.i = 0.0

    def __call__(self, e, limit):
        v = self.kp * e + self.i
        u = limit(v)
        step = self.ki * e
        if self.kind == "clamp" and ((v > u and step > 0) or (v < u and step < 0)):
            step = 0.0
        if self.kind == "tracking":
            step += (u - v) / self.track
        self.i += self.period * step
        return u


def quantize(x, bits, low, high):
    if not bits:
        return x
    q = (high - low) / 2**bits
    code = math.floor((x - low) / q + 0.5)
    return low + min(max(code, 0), 2**bits - 1) * q


def run(case):
    ap, bp, cp, dp = canonical(*case["plant"])
    ah, bh, ch, dh = canonical(*case["sensor"])
    tp, th = F(case["plant_delay"]), F(case["sensor_delay"])
    n, k = len(bp), len(bh)
    r, _ = signal(*case["r"])
    d, dbreaks = signal(*case["d"])
    T = [F(t["period"]) for t in case["tasks"]]
    ticks = case["ticks"]
    end = ticks * T[0]

    # Plant for y; a second plant with the sensor, behind by th, for m.
    def rhs(t, x, uy, um):
        xp, xq, xs = x[:n], x[n : 2 * n], x[2 * n :]
        py = uy + d(t - float(tp))
        pm = um + d(t - float(tp + th))
        return np.concatenate([ap @ xp + bp * py, ap @ xq + bp * pm, ah @ xs + bh * (cp @ xq + dp * pm)])

    def outputs(t, x, uy, um):
        y = cp @ x[:n] + dp * (uy + d(t - float(tp)))
        pm = um + d(t - float(tp + th))
        m = ch @ x[2 * n :] + dh * (cp @ x[n : 2 * n] + dp * pm)
        return float(y), float(m)

    # All event times: samples, updates, arrivals, breaks of d, ends.
    events = {}

    def at(t, what):
        if t <= end:
            events.setdefault(t, []).append(what)

    at(end, ("end",))
    for i, t in enumerate(case["tasks"]):
        j = 0
        while True:
            grid = j * T[i] + F(t.get("offset", 0))
            jit = t.get("jitter")
            s = grid + (F(jit[j % len(jit)]) if jit else 0)
            s = max(s, F(0))
            if s > end:
                break
            at(s, ("sample", i, j))
            at((grid if t.get("on_grid") else s) + F(t["delay"]), ("update", i, j))
            at((grid if t.get("on_grid") else s) + F(t["delay"]) + tp, ("y", i, j))
            at((grid if t.get("on_grid") else s) + F(t["delay"]) + tp + th, ("m", i, j))
            j += 1
    for b in dbreaks:
        at(F(b) + tp, ("d",))
        at(F(b) + tp + th, ("d",))
    for j in range(ticks + 1):
        at(j * T[0], ("grid",))
    # Looked at: every event but the breaks of d, and half way between two of them once the first
    # effort has arrived everywhere.
    first = max(F(t["delay"]) + F(t.get("offset", 0)) + tp + th for t in case["tasks"])
    seen = sorted(t for t in events if any(w[0] != "d" for w in events[t]))
    for a, b in zip(seen, seen[1:]):
        if a >= first:
            at((a + b) / 2, ("grid",))
    order = {"sample": 0, "update": 1, "y": 2, "m": 2, "d": 3, "end": 4, "grid": 4}

    control = []
    for t in case["tasks"]:
        if "pi" in t:
            kp, ki, kind, track = t["pi"]
            control.append(PI(kp, ki, float(F(t["period"])), kind, track))
        else:
            control.append([Difference(*c) for c in t["terms"]])
    last = [0.0] * len(T)
    held = [0.0] * len(T)
    computed = [{} for _ in T]
    x = np.zeros(2 * n + k)
    uy = [0.0] * len(T)
    um = [0.0] * len(T)
    drives = [t.get("drives", True) for t in case["tasks"]]
    total = lambda u: sum(v for v, on in zip(u, drives) if on)
    rows, tick = [], []
    times = sorted(events)
    now = F(0)
    for index, t in enumerate(times):
        if t > now:
            sol = solve_ivp(rhs, (float(now), float(t)), x, "DOP853", rtol=1e-13, atol=1e-16,
                            args=(total(uy), total(um)))
            x = sol.y[:, -1]
            now = t
        for what in sorted(events[t], key=lambda w: order[w[0]]):
            kind = what[0]
            if kind == "sample":
                i, j = what[1], what[2]
                c = case["tasks"][i]
                y, m = outputs(float(t), x, total(uy), total(um))
                m = quantize(m, *c.get("measure", [0, 0, 0]))
                ref = held[c["reference"] - 1] if c.get("reference") else r(float(t))
                lim = c.get("limits")

                def limit(v, c=c, lim=lim, i=i):
                    if lim:
                        v = min(max(v, lim[0]), lim[1])
                    if c.get("slew"):
                        most = c["slew"] * float(T[i])
                        v = min(max(v, last[i] - most), last[i] + most)
                    last[i] = v
                    return v

                if isinstance(control[i], PI):
                    u = control[i](ref - m, limit)
                else:
                    v = sum(f(w * ref - m) for f, w in zip(control[i], c["weights"]))
                    u = limit(v)
                if c.get("bits"):
                    u = quantize(u, c["bits"], lim[0], lim[1])
                computed[i][j] = u
                if F(c["delay"]) == 0:
                    held[i] = u
                if i == 0:
                    tick.append([float(t), y, m, u])
            elif kind == "update":
                held[what[1]] = computed[what[1]][what[2]]
            elif kind == "y":
                uy[what[1]] = computed[what[1]][what[2]]
            elif kind == "m":
                um[what[1]] = computed[what[1]][what[2]]
        if any(w[0] != "d" for w in events[t]):
            y, m = outputs(float(t), x, total(uy), total(um))
            rows.append([float(t), y, m, held[0]])
    case["rows"] = rows
    case["tick_rows"] = tick
    return case


def base(**kw):
    case = {"sensor": [["1"], ["1"]], "plant_delay": "0", "sensor_delay": "0", "d": ["zero"], "r": ["step", 1.0]}
    case.update(kw)
    return case


CASES = [
    base(name="order six, update within the tick",
         plant=[["80"], ["1", "60", "500", "0"]], sensor=[["1"], ["0.002", "1"]], ticks=60,
         tasks=[dict(period="1/200", delay="0.0014", weights=[1.0, 1.0],
                     terms=[[["8", "-7.6"], ["1", "-0.6"]], [["0.01"], ["1", "-1"]]])]),
    base(name="period of a third, dead time, many ticks of delay, late load",
         plant=[["2", "3"], ["1", "3", "2"]], plant_delay="0.37", ticks=60, d=["late", -0.5, 4.21], r=["ramp", 0.3],
         tasks=[dict(period="1/3", delay="0.81", weights=[1.0], terms=[[["0.25", "-0.2"], ["1", "-1"]]])]),
    base(name="sensor dead time, sine, parabola of load",
         plant=[["1"], ["1", "1.2", "1"]], sensor=[["1"], ["0.1", "1"]], plant_delay="0.05", sensor_delay="0.23",
         ticks=60, d=["parabola", 0.01], r=["sine", 1.0, 0.7],
         tasks=[dict(period="0.2", delay="0.04", weights=[1.0], terms=[[["0.5", "-0.35"], ["1", "-1"]]])]),
    base(name="limits, integrator runs on", plant=[["1"], ["1", "1", "0"]], ticks=50, r=["step", 3.0],
         tasks=[dict(period="0.1", delay="0.03", pi=[1.5, 0.4, "none", 1.0], limits=[-1.0, 1.2])]),
    base(name="limits, integrator clamped", plant=[["1"], ["1", "1", "0"]], ticks=50, r=["step", 3.0],
         tasks=[dict(period="0.1", delay="0.03", pi=[1.5, 0.4, "clamp", 1.0], limits=[-1.0, 1.2])]),
    base(name="limits, integrator tracks", plant=[["1"], ["1", "1", "0"]], ticks=50, r=["step", 3.0],
         tasks=[dict(period="0.1", delay="0.03", pi=[1.5, 0.4, "tracking", 0.35], limits=[-1.0, 1.2])]),
    base(name="slew, converters", plant=[["1"], ["1", "1", "0"]], ticks=50, r=["step", 1.0],
         tasks=[dict(period="0.1", delay="0.03", weights=[1.0], terms=[[["2", "-1.8"], ["1", "-0.9"]]],
                     limits=[-2.0, 2.0], slew=1.7, bits=7, measure=[9, -3.0, 3.0])]),
    base(name="nested loops of two rates", plant=[["4"], ["0.05", "1", "0"]], ticks=40,
         tasks=[dict(period="0.09", delay="0.02", weights=[1.0], terms=[[["1.1"], ["1"]]], drives=False, limits=[-0.8, 0.8]),
                dict(period="0.03", offset="0.01", delay="0.005", reference=1, weights=[0.3],
                     terms=[[["0.9", "-0.7"], ["1", "-0.5"]]])]),
    base(name="jitter", plant=[["1"], ["1", "1", "0"]], ticks=50,
         tasks=[dict(period="0.2", delay="0.05", weights=[1.0], terms=[[["1.2", "-0.9"], ["1", "-0.6"]]],
                     jitter=["0.01", "-0.013", "0.02", "0", "-0.02"])]),
    base(name="jitter, update at the next tick", plant=[["1"], ["1", "1", "0"]], ticks=50,
         tasks=[dict(period="0.2", delay="0.2", on_grid=True, weights=[1.0], terms=[[["1.2", "-0.9"], ["1", "-0.6"]]],
                     jitter=["0.01", "-0.013", "0.02", "0", "-0.02"])]),
    base(name="plant that passes the effort on", plant=[["0.5", "1"], ["0.3", "1"]], ticks=40, plant_delay="0.07",
         tasks=[dict(period="0.1", delay="0.04", weights=[1.0], terms=[[["0.4"], ["1", "-1"]]])]),
]

if __name__ == "__main__":
    out = [run(c) for c in CASES]
    path = os.path.join(os.path.dirname(os.path.abspath(__file__)), "sampled.json")
    with open(path, "w") as f:
        f.write("[\n" + ",\n".join(json.dumps(c) for c in out) + "\n]\n")
