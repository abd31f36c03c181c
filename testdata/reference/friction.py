#!/usr/bin/python3
"""A mass with dry friction under held efforts, from event to event.

    /usr/bin/python3 friction.py            writes friction.json (seconds)
    /usr/bin/python3 friction.py --check

Plant, effort u, from rest at 0:

    J·v' + b·v = u − F(v)      y' = v
    moving:   F = Fc·sign(v) + Fv·v
    at rest:  F = u while |u| ≤ Fs, so it stays; |u| > Fs: it breaks loose towards u, and F is Fc at once
    Fs ≥ Fc;  v reaches 0 while it moves: it is at rest, and goes on the same instant if |u| > Fs

drymass.py solves each stretch in closed form, so an event has no other error than that of the arithmetic;
frictionchecks.py holds the runs to the balance of energy, to closed forms and to an integration by SciPy.

Timing: tick k at t = kT. The sample is taken before the new effort acts; the new effort acts delay_s
later and is held until the next one does; 0 before the first.

output    the plant's output that is sampled: "position" y or "velocity" v; m_k is the sample
open      u_k is given
pd        u_k = Kp·(r − m_k) − Kd·(m_k − m_(k−1))/T,  m_(−1) = m_0
pid       u_k = Kp·e_k + I_k − Kd·(m_k − m_(k−1))/T,  e_k = r_k − m_k,  then I_(k+1) = I_k + T·Ki·e_k,  I_0 = 0
reference [from tick, value]

Values, at t = kT before the effort of tick k acts: y, v (exactly 0.0 at rest), u_k.

events        [instant, "break" | "stop" | "reverse", y there]; reverse: v goes through 0 without rest
stuck_error   r − y at the end; null unless it is at rest to the end with |u| constant
swings        hunting: of each slip [instant it breaks loose, instant it stops, y there]. The sampled loop never quite
              repeats: between two slips I takes n whole steps, and a cycle of constant n is unstable. (A slip from
              error e with u = Fs + δ ends near e' = e − c·(Fs − Fc + δ)/Kp, 0 < c < 2, I unchanged; N = n·Ki·T. The
              map of (|e|, δ) from break to break has trace −2 + (N + Kp)·c/Kp, determinant 1 − c; stable means
              N/Kp < 4/c − 2; but the cycle itself has N/Kp = 4·Fs/(c·(Fs − Fc)) − 2, which is more.) So n changes
              by a few ticks and small differences grow from slip to slip, see spread
settled       hunting: of the last six swings (two at ten times the rate), amplitude: half the way from stop to stop,
              period_s: twice the time from break to break; mean, least, largest
continuous    hunting: amplitude, slip time and period of the same loop in continuous time, which does repeat
spread        tick by tick, how far y or v has moved at most when every sample is off by ±10⁻¹², sign by a fixed
              sequence; over 10⁻¹², rounded up: what a rounding error of the samples does to the run
"""
import sys

from mpmath import mp, mpf

sys.dont_write_bytecode = True

import frictionchecks as checks  # noqa: E402
import kept  # noqa: E402
from drymass import Mass  # noqa: E402
from kept import num  # noqa: E402

BASE = dict(J="0.02", b="0.1", coulomb="0.3", static="0.5", viscous="0.04", period_s="0.05", delay_s="0", output="position")
EFFORTS = ([["0.4", 3], ["0.6", 4], ["0.4", 3], ["0", 4], ["-0.45", 2], ["-0.8", 4], ["0.9", 4], ["0.45", 3], ["-0.4", 5], ["0.51", 1],
            ["-0.51", 2], ["0.35", 3], ["1.3", 2], ["-1.3", 2], ["0.2", 4]])
SETS = [
    dict(name="open, stick, slip, reversal", law="open", efforts=EFFORTS),
    dict(name="open, effort late by 0.4 of a tick", law="open", efforts=EFFORTS, delay_s="0.02"),
    dict(name="open, no break-away force beyond Coulomb", law="open", efforts=EFFORTS, static="0.3", viscous="0"),
    dict(name="open, no viscous force at all", law="open", efforts=EFFORTS, b="0", viscous="0"),
    dict(name="open, viscous only", law="open", efforts=EFFORTS, coulomb="0", static="0"),
    dict(name="pd comes to rest", law="pd", kp="5", kd="0.3", reference=[[0, "1"]], period_s="0.01", ticks=120, spread=True),
    dict(name="pd comes to rest, effort late by 0.4 of a tick", law="pd", kp="5", kd="0.3", reference=[[0, "1"]], period_s="0.01",
         delay_s="0.004", ticks=120, spread=True),
    dict(name="pid hunts", law="pid", b="0.05", viscous="0.02", static="0.6", kp="5", ki="15", kd="0.05", reference=[[0, "1"]],
         period_s="0.02", ticks=600, spread=True),
    dict(name="pid hunts, ten times the rate", law="pid", b="0.05", viscous="0.02", static="0.6", kp="5", ki="15", kd="0.05",
         reference=[[0, "1"]], period_s="0.002", ticks=3000, keep=100, spread=True),
    dict(name="pi of a velocity through zero", law="pid", kp="0.4", ki="3", kd="0", reference=[[0, "3"], [40, "-3"], [80, "0"]],
         period_s="0.02", output="velocity", ticks=120, spread=True),
    dict(name="pi of a velocity that rests at zero", law="pid", kp="0.1", ki="1.03", kd="0", reference=[[0, "1"], [70, "-1"]],
         period_s="0.02", output="velocity", ticks=200, spread=True),
]


def control(spec, k, m, before, i):
    """u_k and the integrator after it."""
    if spec["law"] == "open":
        return spec["sequence"][k], i
    T, kp, kd = num(spec["period_s"]), num(spec["kp"]), num(spec["kd"])
    e = num([value for start, value in spec["reference"] if start <= k][-1]) - m
    u = kp * e + i - kd * (m - before) / T
    return u, i + (T * num(spec["ki"]) * e if spec["law"] == "pid" else 0)


def signs():
    """+1, −1: the top bit of x ← 1103515245·x + 12345 mod 2³¹ from 1."""
    x = 1
    while True:
        x = (1103515245 * x + 12345) % 2**31
        yield 1 if x >> 30 else -1


def simulate(spec, off=mpf(0)):
    mass, sign = Mass(spec), signs()
    T, delay, i, u, before = num(spec["period_s"]), num(spec["delay_s"]), mpf(0), mpf(0), None
    rows = []
    for k in range(spec["ticks"]):
        m = (mass.v if spec["output"] == "velocity" else mass.y) + off * next(sign)
        y, v, last = mass.y, mass.v, u
        u, i = control(spec, k, m, m if before is None else before, i)
        before = m
        if delay > 0:
            mass.hold(last, delay)
        mass.hold(u, T - delay)
        rows.append((y, v, u))
    return mass, rows


def swings(mass):
    """[instant it breaks loose, instant it stops, y there] of each."""
    out, begun = [], None
    for t, kind, y in mass.events:
        if kind == "break":
            begun = t
        if kind == "stop":
            out.append([begun, t, y])
    return out


def settled(found, n=6):
    """Mean, least and largest of amplitude and period over the last n swings."""
    pairs = list(zip(found, found[1:]))[-n:]
    of = lambda v: {"mean": sum(v) / len(v), "least": min(v), "largest": max(v)}  # noqa: E731
    return {"amplitude": of([abs(b[2] - a[2]) / 2 for a, b in pairs]), "period_s": of([2 * (b[0] - a[0]) for a, b in pairs])}


def hunting(spec, mass):
    """The swings about the cycle of the loop in continuous time, which are closer at ten times the rate."""
    found, free = swings(mass), checks.hunting(spec)
    cycle = settled(found, 6 if spec["name"] == "pid hunts" else 2)
    for n, off in (("amplitude", "0.25"), ("period_s", "0.2")) if spec["name"] == "pid hunts" else (("amplitude", "0.02"), ("period_s", "0.03")):
        assert abs(cycle[n]["mean"] / free[n] - 1) < num(off), n
    return {"swings": found, "settled": cycle, "continuous": free}


def case(given):
    spec = dict(BASE, **given)
    if spec["law"] == "open":
        spec["sequence"] = [num(u) for u, n in spec["efforts"] for _ in range(n)]
        spec["ticks"] = len(spec["sequence"])
    mass, rows = simulate(spec)
    checks.energy(spec, mass)
    if mp.dps < kept.HIGH:
        checks.by_scipy(spec, rows)
    out = {n: spec[n] for n in ("name", "law", "J", "b", "coulomb", "static", "viscous", "period_s", "delay_s", "output")}
    out.update({n: spec.get(n) for n in ("kp", "ki", "kd", "reference")})
    out["events"] = mass.events
    out["stuck_error"] = None
    if spec["law"] == "pd":
        assert mass.going == 0 and all(r == rows[-1] for r in rows[-20:])
        error = num(spec["reference"][-1][1]) - mass.y
        assert 0 < abs(error) * num(spec["kp"]) <= mass.fs
        out["stuck_error"] = error
    out.update(hunting(spec, mass) if "hunts" in spec["name"] else {"swings": None, "settled": None, "continuous": None})
    out["spread"] = None
    if spec.get("spread"):
        with mp.workdps(kept.LOW):
            moved = simulate(dict(spec, ticks=spec.get("keep", spec["ticks"])), mpf(10) ** -12)[1]
        out["spread"], worst = [], 0
        for a, b in zip(moved, rows):
            worst = max(worst, int(mp.ceil(mpf(10) ** 12 * max(abs(a[0] - b[0]), abs(a[1] - b[1])))))
            out["spread"].append(worst)
    out.update({n: [r[j] for r in rows[:spec.get("keep")]] for j, n in enumerate("yvu")})
    return out


def derive():
    checks.coasting(BASE)
    return [case(given) for given in SETS]


if __name__ == "__main__":
    kept.main("friction.json", derive)
