#!/usr/bin/python3
"""A limited PI loop tick by tick, for each rule of what the integrator does while the effort is limited.

    /usr/bin/python3 antiwindup.py            writes antiwindup.json (seconds)
    /usr/bin/python3 antiwindup.py --check

Plants, held effort u, exact between the ticks:

    1/(s+1):     y' = u − y
    1/(s(s+1)):  y' = v,  v' = u − v,  both from rest

Tick k at t = kT. The sample is taken before the new effort acts, the new effort acts at once and is held
to the next tick; limits lo, hi.

    e_k = r_k − y(kT)
    I   as the map and the rule say
    v_k = Kp·e_k + I            u_k = min(max(v_k, lo), hi)

map        integrator, I_(−1) = 0 and e_(−1) = 0, forward I_0 = 0
forward    v_k uses I_k;                                   then I_(k+1) = I_k + T·Ki·e_k
backward   I_k = I_(k−1) + T·Ki·e_k, before the output;    v_k uses I_k
tustin     I_k = I_(k−1) + T·Ki·(e_k + e_(k−1))/2, before; v_k uses I_k

rule           what is done to it
none           nothing
clamp          I is put within [clamp lo, clamp hi] at once after each step of it: forward after the output,
               backward and tustin before the output, which then uses the clamped I
stop           while v_k ≠ u_k the step is not made (forward), or is undone after the output (backward,
               tustin): v_k and u_k stand as computed with the step
stop_outward   the same, only while v_k > hi and Ki·e_k > 0, or v_k < lo and Ki·e_k < 0. For tustin
               the step itself, e_k + e_(k−1), has the same sign at each such tick of these runs (asserted)
tracking       besides the step T·Ki·e_k, I gets T·(u_k − v_k)/Tt after the output, all maps

Runs. r is given as [from tick, value]; four of them:

reachable     1/(s+1), set point within reach
unreachable   1/(s+1), set point beyond reach for 30 ticks, then 0. Over those 30 ticks the effort is at hi for
              every rule, y_k = 1 − q^k, q = e^(−T), and I has a closed form to which the run is held (held_form)
position      1/(s(s+1)), set point 5
overreach     1/(s+1), one step of the forward integrator takes it beyond hi: "stop" then stays at the limit for
              good, for Kp·(r − 1) + I > 1 as y → 1; "stop_outward" comes back. The only run in which these two differ

Values at tick k: y_k before the effort of the tick acts, v_k, u_k, i_k: the integrator as tick k leaves it
(forward I_(k+1), else I_k after clamp, undoing or tracking).

overshoot     (largest y − r)/r, y between the ticks too
peak_s        its instant; null when y nowhere goes beyond r
settling_s    last instant at which |y − r| = 2 % of r, between the ticks too
              all three null in unreachable and overreach
release_s     unreachable: from the return of r to the first tick with u < hi
"""
import sys

from mpmath import mp, mpf

sys.dont_write_bytecode = True

import kept  # noqa: E402
from kept import clear, num  # noqa: E402

BAND = "0.02"
KEEP, RUN = 60, 800  # ticks written; ticks run for overshoot and settling

RUNS = {
    "reachable": dict(plant="1/(s + 1)", period_s="0.1", kp="2", ki="4", tracking_s="0.25", reference=[[0, "0.8"]]),
    "unreachable": dict(plant="1/(s + 1)", period_s="0.1", kp="3", ki="4", tracking_s="0.4",
                        reference=[[0, "1.5"], [30, "0"]]),
    "position": dict(plant="1/(s*(s + 1))", period_s="0.25", kp="0.5", ki="0.1", tracking_s="3", reference=[[0, "5"]]),
    "overreach": dict(plant="1/(s + 1)", period_s="0.5", kp="0.7", ki="2.4", tracking_s="2", reference=[[0, "0.95"]]),
}
RULES = [("none", None), ("clamp", ["-1", "1"]), ("clamp", ["-0.6", "0.9"]), ("stop", None), ("stop_outward", None), ("tracking", None)]
MEASURED = ("reachable", "position")
MAPS = ["forward", "backward", "tustin"]


def clip(x, lo, hi):
    return min(max(x, lo), hi)


def advance(plant, x, u, t):
    """State after t seconds of effort u: (y,) or (y, y')."""
    q = mp.exp(-t)
    if len(x) == 1:
        return (u + (x[0] - u) * q,)
    return (x[0] + u * t + (x[1] - u) * (1 - q), u + (x[1] - u) * q)


def turn(x, u, T):
    """The instant within the tick at which y turns around, or None."""
    if len(x) == 1 or u == 0 or (u - x[1]) / u <= 0:
        return None
    t = mp.log((u - x[1]) / u)
    return t if 0 < t < T else None


def reference(spec, k):
    return num([value for start, value in spec["reference"] if start <= k][-1])


class Controller:
    def __init__(self, spec, rule, clamp, way):
        self.T, self.kp, self.ki, self.tt = (num(spec[k]) for k in ("period_s", "kp", "ki", "tracking_s"))
        self.rule, self.way, self.lo, self.hi = rule, way, mpf(-1), mpf(1)
        self.clamp = [num(c) for c in clamp] if clamp else None
        self.i, self.last = mpf(0), mpf(0)

    def stepped(self, i, e):
        mean = (e + self.last) / 2 if self.way == "tustin" else e
        i += self.T * self.ki * mean
        return clip(i, *self.clamp) if self.clamp else i

    def stopped(self, v, u, e):
        if self.rule == "stop":
            return v != u
        if self.rule == "stop_outward":
            out = (v > self.hi and self.ki * e > 0) or (v < self.lo and self.ki * e < 0)
            if self.way == "tustin":
                step = e + self.last
                assert out == ((v > self.hi and self.ki * step > 0) or (v < self.lo and self.ki * step < 0))
            return out
        return False

    def tick(self, e):
        before = self.i
        if self.way != "forward":
            self.i = self.stepped(self.i, e)
        v = self.kp * e + self.i
        for limit in (self.lo, self.hi):
            clear(v - limit, "effort near its limit")
        u = clip(v, self.lo, self.hi)
        if self.way == "forward":
            self.i = self.stepped(self.i, e)
        if self.stopped(v, u, e):
            clear(e, "sign of the error")
            self.i = before
        if self.rule == "tracking":
            self.i += self.T * (u - v) / self.tt
        self.last = e
        return v, u, self.i


def held_form(spec, rule, clamp, way, k):
    """i_k of the run unreachable while u = 1 from tick 0: e_j = (r − 1) + q^j.

        none        Ki·T·S_k,  S_k = Σ e_j for j ≤ k = (k+1)(r−1) + (1 − q^(k+1))/(1 − q);  tustin S_k − e_k/2
        clamp       the least of that and the upper clamp, for e > 0
        stop, stop_outward   0: never a step
        tracking    i_k = a·i_(k−1) + b_k,  a = 1 − T/Tt:  Σ a^(k−j)·b_j, geometric, for b_j = c + d·q^j
    """
    T, kp, ki, tt = (num(spec[n]) for n in ("period_s", "kp", "ki", "tracking_s"))
    far, q, one = reference(spec, 0) - 1, mp.exp(-T), mpf(1)
    if rule in ("stop", "stop_outward"):
        return mpf(0)
    if rule in ("none", "clamp"):
        total = (k + 1) * far + (1 - q ** (k + 1)) / (1 - q)
        if way == "tustin":
            total -= (far + q ** k) / 2
        i = ki * T * total
        return min(i, num(clamp[1])) if clamp else i
    a, n = 1 - T / tt, k + 1
    ones, powers = (1 - a ** n) / (1 - a), (q ** n - a ** n) / (q - a)  # Σ a^(k−j), Σ a^(k−j)·q^j
    if way == "tustin":  # mean of e_j and e_(j−1), for j = 0 without its (r − 1)/2 and 1/(2q)
        c = T * ki * a * far + T / tt * (1 - kp * far)
        d = T * ki * a * (1 + 1 / q) / 2 - T / tt * kp
        return c * ones + d * powers - a ** k * T * ki * a * (far + 1 / q) / 2
    step = a if way == "backward" else one  # backward: the step is part of the v that is tracked
    return (T * ki * step * far + T / tt * (1 - kp * far)) * ones + (T * ki * step - T / tt * kp) * powers


def outside(x, u, T, r, band):
    """Last instant of the tick at which |y − r| > band, or None; after its turn y is monotone."""
    t = turn(x, u, T)
    marks = [mpf(0)] + ([t] if t is not None else []) + [T]
    off = lambda s: abs(advance(None, x, u, s)[0] - r) - band  # noqa: E731
    for a, b in reversed(list(zip(marks, marks[1:]))):
        if off(b) > 0:
            return b
        if off(a) > 0:
            lo, hi = a, b
            for _ in range(int(mp.prec) + 10):
                mid = (lo + hi) / 2
                lo, hi = (mid, hi) if off(mid) > 0 else (lo, mid)
            return hi
    return None


def figures(states, efforts, T, r):
    peak, when = r, None
    settled = None
    for k, (x, u) in enumerate(zip(states, efforts)):
        t = turn(x, u, T)
        for s in [mpf(0)] + ([t] if t is not None else []):
            y = advance(None, x, u, s)[0]
            if y > peak + mpf(10) ** -30:
                peak, when = y, k * T + s
        out = outside(x, u, T, r, num(BAND) * r)
        if out is not None:
            settled = k * T + out
    assert settled < len(states) * T / 2, "not settled"
    return {"overshoot": (peak - r) / r, "peak_s": when, "settling_s": settled}


def run(name, rule, clamp, way):
    spec = RUNS[name]
    T = num(spec["period_s"])
    c = Controller(spec, rule, clamp, way)
    x = (mpf(0),) * (2 if name == "position" else 1)
    states, log = [], []
    for k in range(RUN if name in MEASURED else KEEP):
        states.append(x)
        v, u, i = c.tick(reference(spec, k) - x[0])
        log.append((v, u, i))
        if name == "unreachable" and k < 30:
            assert u == 1 and abs(i - held_form(spec, rule, clamp, way, k)) < mpf(10) ** -40, (rule, way, k)
        x = advance(spec["plant"], x, u, T)
    efforts = [row[1] for row in log]
    out = {"name": "%s, %s%s, %s" % (name, rule, " %s to %s" % tuple(clamp) if clamp else "", way), "run": name, "rule": rule, "map": way}
    out.update({k: spec[k] for k in ("plant", "period_s", "kp", "ki", "reference")})
    out.update(limits=["-1", "1"], clamp=clamp, tracking_s=spec["tracking_s"] if rule == "tracking" else None)
    f = {"overshoot": None, "peak_s": None, "settling_s": None}
    if name in MEASURED:
        f = figures(states, efforts, T, reference(spec, 0))
    out.update(f)
    latched = name == "overreach" and rule == "stop" and way == "forward"
    assert not latched or all(u == 1 for u in efforts[1:])
    back = [k for k in range(30, KEEP) if efforts[k] < 1]
    out["release_s"] = (back[0] - 30) * T if name == "unreachable" else None
    out["y"] = [s[0] for s in states[:KEEP]]
    out.update({n: [row[j] for row in log[:KEEP]] for j, n in enumerate(("v", "u", "i"))})
    return out


def derive():
    return [run(name, rule, clamp, way) for name in RUNS for rule, clamp in RULES for way in MAPS]


if __name__ == "__main__":
    kept.main("antiwindup.json", derive)
