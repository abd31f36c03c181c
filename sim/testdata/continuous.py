#!/usr/bin/python3
"""Reference runs of continuous loops by SciPy's DOP853 (tolerance 1e-13). Writes continuous.json
beside this file.

Run: /usr/bin/python3 continuous.py      (python3-scipy, python3-numpy of the distribution)

Without dead time: one system, integrated between the instants where a signal, a limit or an
integrator switches; switches are found by solve_ivp's event location. With dead time: the method of steps, all
steps so far integrated together over one dead time, x_k(σ) = x(kτ + σ), so that the
delayed signal is part of the same integration and nothing is interpolated.
"""
import json
import math
import os

import numpy as np
from fractions import Fraction as F
from scipy.integrate import solve_ivp

from sampled import canonical


def move(d, v, a, j):
    """Jerk-limited motion by integrating the jerk, segment lengths by bisection on the peak
    values: (breaks, position(t))."""
    def lengths(vp):
        if vp >= a * a / j:
            return a / j, vp / a - a / j
        return math.sqrt(vp / j), 0.0

    def distance(vp):
        tj, ta = lengths(vp)
        return vp * (2 * tj + ta)

    vp = v
    if distance(v) > d:
        lo, hi = 0.0, v
        for _ in range(200):
            vp = (lo + hi) / 2
            lo, hi = (vp, hi) if distance(vp) < d else (lo, vp)
    tj, ta = lengths(vp)
    tv = max(0.0, (d - distance(vp)) / vp)
    seg = [(tj, j), (ta, 0), (tj, -j), (tv, 0), (tj, -j), (ta, 0), (tj, j)]
    breaks, state = [], []
    t = x = w = acc = 0.0
    for h, q in seg:
        breaks.append(t)
        state.append((t, x, w, acc, q))
        x += h * (w + h * (acc / 2 + h * q / 6))
        w += h * (acc + h * q / 2)
        acc += h * q
        t += h
    breaks.append(t)
    state.append((t, d, 0.0, 0.0, 0.0))

    def at(time):
        if time < 0:
            return 0.0
        for s in reversed(state):
            if time >= s[0]:
                h = time - s[0]
                return s[1] + h * (s[2] + h * (s[3] / 2 + h * s[4] / 6))
        return 0.0

    return at, breaks


def signal(kind, *p):
    if kind == "step":
        return (lambda t: p[0] if t >= 0 else 0.0), []
    if kind == "late":
        return (lambda t: p[0] if t >= p[1] else 0.0), [p[1]]
    if kind == "ramp":
        return (lambda t: p[0] * max(t, 0)), []
    if kind == "sine":
        return (lambda t: p[0] * math.sin(p[1] * max(t, 0))), []
    if kind == "move":
        return move(*p)
    return (lambda t: 0.0), []


class Loop:
    """x = plant, sensor, prefilter, then per term: states, and for a PI its integrator."""

    def __init__(self, case):
        self.case = case
        self.p = canonical(*case["plant"])
        self.h = canonical(*case["sensor"])
        self.f = canonical(*case.get("prefilter", [["1"], ["1"]]))
        self.g = canonical(*case["feedforward"]) if "feedforward" in case else None
        self.terms = [canonical(*t) for t in case.get("terms", [])]
        self.weights = case.get("weights", [])
        self.pi = case.get("pi")
        self.limits = case.get("limits")
        self.r, rb = signal(*case["r"])
        self.d, db = signal(*case["d"])
        self.breaks = sorted(set(rb + db))
        sizes = [len(self.p[1]), len(self.h[1]), len(self.f[1])] + [len(t[1]) for t in self.terms]
        sizes += [len(self.g[1]) if self.g else 0, 1 if self.pi else 0]
        self.cut = np.cumsum(sizes)
        self.n = int(self.cut[-1])

    def split(self, x):
        return np.split(x, self.cut[:-1])

    def effort(self, x, t, m, r=None):
        """Computed effort for the measurement m that the controller sees."""
        parts = self.split(x)
        r0 = self.r(t) if r is None else r
        f = float(self.f[2] @ parts[2] + self.f[3] * r0)
        v = 0.0
        es = []
        for k, (t_, w) in enumerate(zip(self.terms, self.weights)):
            e = w * f - m
            es.append(e)
            v += float(t_[2] @ parts[3 + k] + t_[3] * e)
        if self.g:
            v += float(self.g[2] @ parts[-2] + self.g[3] * r0)
        if self.pi:
            es.append(f - m)
            v += self.pi[0] * es[-1] + float(parts[-1][0])
        return v, f, es, r0

    def measure(self, x):
        """m without its dead time; plants here are strictly proper."""
        parts = self.split(x)
        y = float(self.p[2] @ parts[0])
        return y, float(self.h[2] @ parts[1] + self.h[3] * y)

    def rate(self, x, t, m, mode, frozen):
        parts = self.split(x)
        v, f, es, r0 = self.effort(x, t, m)
        u = v
        if self.limits and mode:
            u = self.limits[1] if mode > 0 else self.limits[0]
        y, _ = self.measure(x)
        out = [self.p[0] @ parts[0] + self.p[1] * (u + self.d(t)), self.h[0] @ parts[1] + self.h[1] * y,
               self.f[0] @ parts[2] + self.f[1] * r0]
        for k, t_ in enumerate(self.terms):
            out.append(t_[0] @ parts[3 + k] + t_[1] * es[k])
        out.append(self.g[0] @ parts[-2] + self.g[1] * r0 if self.g else np.zeros(0))
        if self.pi:
            i = self.pi[1] * es[-1]
            if self.pi[2] == "tracking":
                i += (u - v) / self.pi[3]
            if frozen:
                i = 0.0
            out.append(np.array([i]))
        else:
            out.append(np.zeros(0))
        return np.concatenate(out)


def without_delay(loop, times, end):
    rows = {}
    x = np.zeros(loop.n)
    t = 0.0
    lim = loop.limits
    clamp = loop.pi and loop.pi[2] == "clamp"

    def seen(t, x):
        return loop.effort(x, t, loop.measure(x)[1])

    def choose(t, x):
        v, _, es, _ = seen(t, x)
        mode = 0
        if lim and v > lim[1]:
            mode = 1
        elif lim and v < lim[0]:
            mode = -1
        return mode, bool(clamp and mode and mode * es[-1] > 0)

    mode, frozen = choose(t, x)
    breaks = [b for b in loop.breaks if 0 < b < end] + [end]
    goals = sorted(set(times) | set(breaks))
    for goal in goals:
        while t < goal:
            events = []
            if lim:
                if mode == 0:
                    events = [lambda t, x: seen(t, x)[0] - lim[1], lambda t, x: lim[0] - seen(t, x)[0]]
                elif mode > 0:
                    events = [lambda t, x: lim[1] - seen(t, x)[0]]
                else:
                    events = [lambda t, x: seen(t, x)[0] - lim[0]]
                if clamp and mode:
                    s = -mode if frozen else mode
                    events.append(lambda t, x, s=s: s * seen(t, x)[2][-1])
            for e in events:
                e.terminal, e.direction = True, 1
            # A signal is taken from inside the stretch where it jumps at its end.
            sol = solve_ivp(lambda s, x: loop.rate(x, min(s, goal - 1e-13 * goal), loop.measure(x)[1], mode, frozen),
                            (t, goal), x, "DOP853", rtol=1e-13, atol=1e-15, events=events or None)
            t, x = float(sol.t[-1]), sol.y[:, -1]
            if sol.status == 1:
                k = [i for i, e in enumerate(sol.t_events) if len(e)][0]
                before = mode
                if before == 0:
                    mode = 1 if k == 0 else -1
                    frozen = bool(clamp and mode * seen(t, x)[2][-1] > 0)
                elif k == 0:
                    mode, frozen = 0, False
                else:
                    frozen = not frozen
        if goal in loop.breaks:
            mode, frozen = choose(t, x)
        if goal in times:
            y, m = loop.measure(x)
            v = seen(t, x)[0]
            rows[goal] = [goal, y, m, min(max(v, lim[0]), lim[1]) if lim else v]
    return [rows[t] for t in times]


def with_delay(loop, times, end, tp, th):
    """Dead times tp of the plant and th of the sensor; states are those without dead time, y and m
    are read behind. Limits by clipping: integration step control sees to the kinks."""
    tau = tp + th
    lim = loop.limits
    count = int(math.ceil(end / tau - 1e-9)) + 1
    grid = sorted({(t - b) for t in times for b in (0.0, tp, tau)} | {0.0})
    start = [np.zeros(loop.n)]
    value = {}

    def clip(v):
        return min(max(v, lim[0]), lim[1]) if lim else v

    for k in range(count):
        inner = sorted({round(b - j * tau, 12) for b in loop.breaks for j in range(k + 1) if 0 < b - j * tau < tau})

        def rhs(s, z):
            xs = z.reshape(k + 1, loop.n)
            m, out = 0.0, []
            for j in range(k + 1):
                t = j * tau + s
                v, _, _, _ = loop.effort(xs[j], t, m)
                u = clip(v)
                mode = 0 if u == v else (1 if v > u else -1)
                out.append(loop.rate(xs[j], t, m, mode, False))
                m = loop.measure(xs[j])[1]
            return np.concatenate(out)

        want = [(g - k * tau, g) for g in grid if k * tau <= g < (k + 1) * tau]
        stops = sorted(set([s for s, _ in want if s > 0] + inner + [tau]))
        z = np.concatenate(start)
        s = 0.0

        def note(s, z):
            xs = z.reshape(k + 1, loop.n)
            m = 0.0 if k == 0 else loop.measure(xs[k - 1])[1]
            v = loop.effort(xs[k], k * tau + s, m)[0]
            y, mm = loop.measure(xs[k])
            for a, g in want:
                if a == s:
                    value[g] = (y, mm, clip(v))

        note(0.0, z)
        for goal in stops:
            sol = solve_ivp(rhs, (s, goal), z, "DOP853", rtol=1e-13, atol=1e-15, max_step=tau / 20)
            z, s = sol.y[:, -1], goal
            note(goal, z)
        start.append(z.reshape(k + 1, loop.n)[k].copy())
    rows = []
    for t in times:
        y = value[t - tp][0] if t - tp > 0 else 0.0
        m = value[t - tau][1] if t - tau > 0 else 0.0
        rows.append([t, y, m, value[t][2]])
    return rows


def base(**kw):
    case = {"sensor": [["1"], ["1"]], "plant_delay": "0", "sensor_delay": "0", "d": ["zero"], "r": ["step", 1.0]}
    case.update(kw)
    return case


LEAD = [["0.5", "2.4"], ["0.011", "1"]]
CASES = [
    base(name="order six, move, late load", plant=[["17.2"], ["0.2", "1", "0"]], sensor=[["1"], ["0.004", "1"]],
         terms=[LEAD, [["1.5"], ["1", "0"]]], weights=[1.0, 1.0], r=["move", 1.5, 2.0, 9.0, 60.0], d=["late", -0.4, 1.13], end=2.5),
    base(name="prefilter, feedforward, weight, sine", plant=[["2"], ["1", "0.4", "1"]], sensor=[["1"], ["0.05", "1"]],
         terms=[[["0.8"], ["1"]], [["0.7"], ["1", "0"]], [["0.3", "0"], ["0.02", "1"]]], weights=[0.6, 1.0, 0.0],
         prefilter=[["1"], ["0.3", "1"]], feedforward=[["0.2", "0.4"], ["0.1", "1"]], r=["sine", 1.0, 1.3], end=12.0),
    base(name="limits, integrator runs on", plant=[["1"], ["1", "1", "0"]], pi=[1.5, 0.4, "none", 1.0],
         limits=[-1.0, 1.2], r=["step", 3.0], end=15.0),
    base(name="limits, integrator clamped", plant=[["1"], ["1", "1", "0"]], pi=[1.5, 0.4, "clamp", 1.0],
         limits=[-1.0, 1.2], r=["step", 3.0], end=15.0),
    base(name="limits, integrator tracks", plant=[["1"], ["1", "1", "0"]], pi=[1.5, 0.4, "tracking", 0.35],
         limits=[-1.0, 1.2], r=["step", 3.0], end=15.0),
    base(name="limits, late load, move", plant=[["1"], ["1", "1", "0"]], pi=[1.5, 0.4, "clamp", 1.0],
         limits=[-0.6, 0.6], r=["move", 2.0, 0.7, 1.5, 4.0], d=["late", 0.3, 6.1], end=15.0),
    base(name="dead time of the plant", plant=[["1"], ["0.8", "1"]], plant_delay="0.5",
         terms=[[["0.9"], ["1"]], [["0.8"], ["1", "0"]]], weights=[1.0, 1.0], d=["late", 0.5, 1.7], end=4.0),
    base(name="dead times of plant and sensor, move", plant=[["1.4"], ["0.3", "1", "0"]], sensor=[["1"], ["0.05", "1"]],
         plant_delay="0.3", sensor_delay="0.2", terms=[[["0.3", "0.7"], ["0.04", "1"]]], weights=[1.0],
         r=["move", 1.0, 0.8, 2.0, 9.0], end=3.5),
    base(name="dead time and limits", plant=[["1"], ["0.8", "1"]], plant_delay="0.5", limits=[-0.4, 1.15],
         terms=[[["1.3"], ["1"]], [["1.1"], ["1", "0"]]], weights=[1.0, 1.0], end=4.0),
    base(name="dead time, limits, integrator tracks", plant=[["1"], ["0.8", "1"]], plant_delay="0.5", limits=[-0.4, 1.15],
         pi=[1.3, 1.1, "tracking", 0.3], end=4.0),
]


def run(case):
    loop = Loop(case)
    end = case["end"]
    times = [end * k / 37 for k in range(1, 38)]
    tp, th = float(F(case["plant_delay"])), float(F(case["sensor_delay"]))
    case["rows"] = with_delay(loop, times, end, tp, th) if tp + th else without_delay(loop, times, end)
    return case


if __name__ == "__main__":
    out = [run(c) for c in CASES]
    path = os.path.join(os.path.dirname(os.path.abspath(__file__)), "continuous.json")
    with open(path, "w") as f:
        f.write("[\n" + ",\n".join(json.dumps(c) for c in out) + "\n]\n")
