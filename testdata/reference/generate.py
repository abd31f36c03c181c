#!/usr/bin/python3
"""Reference figures of closed loops, by brute precision.

    /usr/bin/python3 generate.py            write loops.json (some minutes on one core)
    /usr/bin/python3 generate.py --check    derive a few entries afresh and compare (seconds)

Needs mpmath (Debian: python3-mpmath). Every entry is derived at two working
precisions, and both must agree to 40 digits before 30 are written.

Loop. P plant, H sensor, C controller, dead the plant's dead time, delay the time from
sample to update, tau = dead + delay, T the tick.

    continuous:  L(s) = C·P·H·e^(−s·dead),     T_ry(s) = C·P·e^(−s·dead)/(1 + L)
    sampled:     L(z) = C(z)·Gm(z),            T_ry(z) = C(z)·Gy(z)/(1 + L)
                 Gm, Gy: samples at kT of P·H and P behind a zero-order hold whose
                 steps come at kT + tau, by residues (the modified z-transform)

Maps of C: tustin s = (2/T)(z−1)/(z+1); prewarped s = w/tan(wT/2)·(z−1)/(z+1); forward
s = (z−1)/T; backward s = (z−1)/(Tz); hold: the step-invariant equivalent; triangle:
Z{C/s²}·(z−1)²/(Tz); matched: poles and finite zeros by z = e^(sT), zeros at infinity
to z = −1 but one, leading Laurent coefficient at s = 0 kept.

Figures, the same names in both columns:

type                integrators of L, less zeros at the origin
kp, kv, ka          limits of L, s·L, s²·L at s = 0; sampled with (z−1)/T for s
tracking_series     c0…c3 of 1 − T_ry in powers of s, or of (z−1)/T
loop_series         the same of 1/(1 + L)
poles               closed-loop poles in s; sampled: ln(z)/T, −π < Im·T ≤ π. By falling real
                    part, then rising imaginary part. poles_complete false: the dominant
                    ones only, of a loop with dead time or more than 60 whole ticks of delay;
                    a winding number shows that none is missing to the right of the last
poles_z             sampled, complete: the poles in z
pole_count          their number; null when not complete
stable              all poles in the open left half plane, or unit disc
gain_crossings      all w in (0, π/T) with |L| = 1, and arg L + 180° in (−180°, 180°]
phase_crossings     the w next to |L| = 1 at which L is real and negative (at most 12), with
                    |L|; w = 0 and w = π/T count where L is finite there
phase_margin_deg    stable: smallest |margin_deg| over the gain crossings; unstable: smallest
                    signed one; "inf" without a crossing
gain_margin_db      stable: smallest −20 lg|L| of the phase crossings with |L| < 1, "inf" if none;
                    unstable: largest −20 lg|L| of those with |L| > 1, negative; null if none
gain_reduction_db   stable: smallest 20 lg|L| of those with |L| > 1, null if none; unstable: null
modulus_margin      least |1 + L| for w in [0, π/T], or [0, ∞)
delay_margin_s      least (margin in (0°, 360°], as radians)/w of the gain crossings; "inf" without
                    one; null when unstable
crossover_rad_s     lowest w at which |L| falls through 1; null if none
bandwidth_rad_s     lowest w at which |T_ry| falls through |T_ry(0)|/√2; null when none below
                    π/T, or unstable
steady              null when unstable. For step, ramp, parabola (r = 1, t, t²/2):
                    asymptote g0, g1, g2 of r − y → g0 + g1·t + g2·t² at the ticks, by forward
                    differences; tracking_error and loop_error g0, or "inf" when g1 or g2 is not
                    zero; ripple: peak-to-peak of the steady r − y over a whole tick, between the
                    ticks too; worst_error: its largest magnitude. Both null for a step, for
                    an unbounded error and in the continuous column; "inf" for a parabola
                    whose ramp has ripple, for it grows with the slope.
                    load_step: r − y for a unit step at the plant input
sine                r = sin(wt): r − y at the ticks → amplitude·sin(wt + phase)
"""
import argparse
import json
import os
import sys
import time

from mpmath import mp

sys.dont_write_bytecode = True  # leave no files beside the sources

import analysis  # noqa: E402
import kept  # noqa: E402
import knownvalues  # noqa: E402
import loops  # noqa: E402

HERE = os.path.dirname(os.path.abspath(__file__))
FILE = os.path.join(HERE, "loops.json")
LOW, HIGH = 260, 330  # digits: the order-12 loop at 10 MHz loses some 100 in its polynomials
DIGITS, AGREE = 30, 40
ZERO = mp.mpf(10) ** -60  # a part below this is written as 0: no figure of the set is that small
SAMPLE = [  # names of the entries that --check derives afresh
    "one lag, half a tick at 1 Hz",
    "winch drum, matched at 300 Hz",
    "digital and plant integrator at 4 Hz, delay 1/10 s",
    "Ka of 36 at 1 MHz",
    "dead time of 1000 ticks at 2 kHz",
    "flexible mode under a notch at 4 kHz",
    "order twelve, type one at 10 MHz",
]


def loop_text(name, spec, timing):
    out = ["loop: %s    # invented, for the reference set" % name, "output: rad", "effort: V", ""]
    out += ["plant:", "  model: %s" % spec["plant"]]
    if "dead_time" in spec:
        out.append("  dead_time: %s" % spec["dead_time"])
    out += ["controller:", "  model: %s" % spec["controller"]]
    if "map" in spec:
        out.append("  map: %s" % spec["map"])
    if "at" in spec:
        out.append("  at: %s" % spec["at"])
    if "sensor" in spec:
        out += ["sensor:", "  model: %s" % spec["sensor"]]
    out += ["timing:", "  rate: %s" % timing["rate"]]
    out += ["  %s: %s" % (k, timing[k]) for k in ("conversion", "compute") if k in timing]
    update = timing.get("update", "when_ready")
    out.append("  update: %s" % (update if update in ("when_ready", "next_tick") else "{after: %s}" % update))
    out += ["inputs:", "  - step: 1", "  - ramp: 1", "  - parabola: 1", "  - load_step: 1"]
    if "sine" in spec:
        out.append("  - sine: {size: 1, frequency: %s}" % spec["sine"])
    return "\n".join(out) + "\n"


def derive(spec, timing, dps):
    with mp.workdps(dps):
        loop = analysis.Loop(spec, timing)
        expect = {"continuous": None if loop.digital else loop.continuous(), "sampled": loop.sampled()}
    return loop, expect


def entries():
    seen = set()
    for spec in loops.LOOPS:
        for timing in spec["timings"]:
            name = "%s at %s" % (spec["name"], timing["rate"])
            if name in seen:
                name += ", delay %s s" % analysis.Loop(spec, timing).delay
            seen.add(name)
            yield name, spec, timing


def close(a, b):
    """Equal to AGREE digits."""
    return a == b or abs(a - b) <= max(abs(b), ZERO) * mp.mpf(10) ** -AGREE


def written(v):
    """JSON form: numbers as strings of DIGITS digits."""
    if isinstance(v, dict):
        return {k: written(x) for k, x in v.items()}
    if isinstance(v, (list, tuple)):
        return [written(x) for x in v]
    if isinstance(v, mp.mpf):
        if mp.isinf(v):
            return "inf" if v > 0 else "-inf"
        if abs(v) < ZERO:
            return "0.0"
        return mp.nstr(v, DIGITS, min_fixed=-5, max_fixed=15)
    return v


def entry(name, spec, timing, both):
    loop, low = derive(spec, timing, LOW)
    if both:
        with mp.workdps(LOW):
            kept.agree(low, derive(spec, timing, HIGH)[1], name, close)
    return {
        "name": name, "loop": loop_text(name, spec, timing), "order": loop.order,
        "period_s": str(loop.T), "loop_delay_s": str(loop.delay), "dead_time_s": str(loop.dead),
        "expect": written(low),
    }


def compact(row):
    """One entry: a line for each column's group of figures."""
    head = {k: row[k] for k in row if k != "expect"}
    lines = ["  {"] + ["    %s: %s," % (json.dumps(k), json.dumps(v)) for k, v in head.items()] + ['    "expect": {']
    cols = []
    for col in ("continuous", "sampled"):
        v = row["expect"][col]
        if v is None:
            cols.append('      "%s": null' % col)
            continue
        body = ",\n".join("        %s: %s" % (json.dumps(k), json.dumps(x)) for k, x in v.items())
        cols.append('      "%s": {\n%s\n      }' % (col, body))
    return "\n".join(lines + [",\n".join(cols), "    }", "  }"])


def check():
    knownvalues.check()
    with open(FILE, encoding="utf-8") as f:
        have = {row["name"]: row for row in json.load(f)}
    names = [name for name, _, _ in entries()]
    assert names == list(have), "loops.json does not hold the entries of loops.py: run generate.py"
    for name, spec, timing in entries():
        assert loop_text(name, spec, timing) == have[name]["loop"], "the loop file of %r changed: run generate.py" % name
        if name in SAMPLE:
            assert entry(name, spec, timing, False) == have[name], "%r derived afresh differs" % name
    missing = set(SAMPLE) - set(names)
    assert not missing, missing
    print("reference set: %d entries, %d derived afresh, as stored" % (len(names), len(SAMPLE)))


def main():
    p = argparse.ArgumentParser()
    p.add_argument("--check", action="store_true", help="derive a few entries afresh and compare with loops.json")
    p.add_argument("--only", default="", help="derive the entries whose name contains this, print them, write nothing")
    args = p.parse_args()
    if args.check:
        return check()
    if not args.only:
        knownvalues.check()
    rows = []
    start = time.time()
    for name, spec, timing in entries():
        if args.only not in name:
            continue
        t = time.time()
        rows.append(entry(name, spec, timing, not args.only))
        print("%-60s %5.1f s" % (name, time.time() - t), file=sys.stderr)
        if args.only:
            print(compact(rows[-1]))
    if not args.only:
        with open(FILE + ".new", "w", encoding="utf-8") as f:
            f.write("[\n" + ",\n".join(compact(r) for r in rows) + "\n]\n")
        os.replace(FILE + ".new", FILE)
        print("%d entries in %.0f s" % (len(rows), time.time() - start), file=sys.stderr)


if __name__ == "__main__":
    main()
