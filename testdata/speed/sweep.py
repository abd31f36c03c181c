#!/usr/bin/env python3
"""The sweep of the command rate, done plainly with NumPy and SciPy: a yardstick for its speed.

    /usr/bin/python3 sweep.py --rates 1000 --from 80 --to 8000 [--jobs 2] [--json out.jsonl]

For each rate and each of seven controller maps of one invented loop of order six (study/bench_test.go,
orderSix) it computes every linear figure that the program gives: closed-loop poles and stability, type,
error constants, tracking series, steady errors of step, ramp and parabola with the ripple between the ticks,
phase, gain, modulus, delay and jitter margin, crossover and bandwidth. It is written as an engineer with these
libraries would write it: polynomials in z, the hold by the matrix exponential with the delay split, responses on
a grid of 2000 frequencies with roots refined by brentq. The hold is shared by the maps of a rate. Prints the
time of the sweep alone, without start and imports.
"""
import argparse
import json
import multiprocessing
import time

import numpy as np
from numpy.polynomial import chebyshev
from scipy import linalg, optimize, signal

DELAY = 12e-6 + 110e-6
STEP, RAMP, PARABOLA = 1.0, 50.0, 20.0
PLANT = (22 * np.array([1 / 48400, 0.02 / 220, 1]),
         np.polymul([0.24, 1, 0], [1 / 57600, 0.02 / 240, 1]))
SENSOR = ([1.0], [0.0008, 1])
CONTROLLER = (1.1 * np.array([0.2, 1]), np.array([0.004, 1]))
MAPS = ["tustin", "prewarped", "matched", "forward", "backward", "hold", "triangle"]
NODES = 13      # Chebyshev points in each smooth part of the tick
GRID = 2000     # frequencies


def held(a, b, t):
    """e^(At) and the integral of e^(As) B over [0, t]."""
    n = len(a)
    m = linalg.expm(np.block([[a, b], [np.zeros((1, n + 1))]]) * t)
    return m[:n, :n], m[:n, n:]


def hold(num, den, T):
    """Hold equivalent with the delay split: state x and the last effort; returns A, B of the augmented system and the parts."""
    a, b, c, d = signal.tf2ss(num, den)
    phi, _ = held(a, b, T)
    early, now = held(a, b, T - DELAY)
    _, rest = held(a, b, DELAY)
    last = early @ rest
    n = len(a)
    big_a = np.block([[phi, last], [np.zeros((1, n + 1))]])
    big_b = np.vstack([now, [[1.0]]])
    return (a, b, c, d), big_a, big_b


def fraction(a, b, c, d):
    num, den = signal.ss2tf(a, b, c, d)
    num = num[0]
    keep = np.abs(num) > 1e-14 * np.abs(num).max()
    return num[np.argmax(keep):], den


def output_rows(parts, T):
    """Rows C, D of the output at Chebyshev offsets within the tick, split where the effort switches."""
    a, b, c, d = parts
    out = []
    x = (1 - np.cos(np.pi * np.arange(NODES) / (NODES - 1))) / 2
    for lo, hi in ((0.0, DELAY), (DELAY, T)):
        for f in x:
            theta = lo + f * (hi - lo)
            if theta <= DELAY and lo == 0.0:
                phi, g = held(a, b, theta)
                out.append((theta, np.hstack([c @ phi, c @ g]), np.zeros((1, 1))))
            else:
                phi, _ = held(a, b, theta)
                _, g = held(a, b, DELAY)
                after, now = held(a, b, theta - DELAY)
                out.append((theta, np.hstack([c @ phi, c @ after @ g]), c @ now))
    return out


def deflated(p):
    """p without the factor z - 1 of the plant's one integrator."""
    return np.polydiv(p, [1.0, -1.0])[0]


def mapped(name, T):
    num, den = CONTROLLER
    if name == "prewarped":
        w = 2 * np.pi * 8
        return signal.bilinear(num, den, fs=w / (2 * np.tan(w * T / 2)))
    if name == "matched":
        z, p, k = signal.tf2zpk(num, den)
        zd, pd = np.exp(z * T), np.exp(p * T)
        n, m = np.poly(zd), np.poly(pd)
        gain = num[-1] / den[-1]
        return n * gain * np.polyval(m, 1) / np.polyval(n, 1), m
    method = {"tustin": "bilinear", "forward": "euler", "backward": "backward_diff", "hold": "zoh", "triangle": "foh"}[name]
    n, m, _ = signal.cont2discrete((num, den), T, method=method)
    return n.ravel(), m


def taylor(p, T):
    """Coefficients of p(1 + dT) in d, ascending, by Horner's rule over polynomials."""
    q = np.zeros(1)
    for c in p:
        q = np.convolve(q, [1.0, T])
        q[0] += c
    return q


def divide(num, den, n):
    """n terms of num/den, ascending; den[0] is not zero."""
    num = np.pad(num, (0, max(0, n - len(num))))[:n]
    den = np.pad(den, (0, max(0, n - len(den))))[:n]
    out = np.zeros(n)
    for k in range(n):
        out[k] = (num[k] - out[:k] @ den[k:0:-1]) / den[0]
    return out


def analyse(T, cn, cd, gy, gm, offsets, grid, z):
    ln, ld = np.polymul(cn, gm[0]), np.polymul(cd, gm[1])
    char = np.polyadd(ld, ln)
    poles = np.roots(char)
    stable = bool(np.all(np.abs(poles) < 1))
    r = {"stable": stable}

    # Type and constants: integrators are factors z - 1 of the denominator.
    kind, rest = 0, ld
    while abs(np.polyval(rest, 1)) < 1e-9 * np.abs(rest).sum():
        rest, _ = np.polydiv(rest, [1, -1])
        kind += 1
    lead = np.polyval(ln, 1) / np.polyval(rest, 1) / T**kind
    for k, name in enumerate(["position", "velocity", "acceleration"]):
        r[name + "_constant"] = lead if kind == k else (np.inf if kind > k else 0.0)

    # Series of 1 - Cr*Gy/(1 + L) and steady errors. Plant and loop share the plant's integrator, which is taken out of
    # both before the quotient is formed at z = 1.
    yn, yd = np.polymul(cn, gy[0]), np.polymul(cd, gy[1])
    loop_den, plant_den = deflated(ld), deflated(gy[1])
    c = -divide(taylor(np.polymul(yn, loop_den), T), taylor(np.polymul(np.polymul(cd, plant_den), char), T), 4)
    c[0] += 1
    if abs(c[0]) < 1e-7:
        c[0] = 0.0
    r["tracking_series"] = list(c)
    if stable:
        r["step_error"] = abs(c[0] * STEP)
        r["ramp_error"] = abs(c[1] * RAMP) if c[0] == 0 else np.inf
        r["parabola_error"] = np.inf if c[0] != 0 or abs(c[1]) > 1e-7 else abs(c[2] * PARABOLA)

        # Ripple of the parabola: the response at each offset, less what the ticks show.
        values = []
        front = taylor(np.polymul(cn, loop_den), T)
        inverse = divide(np.array([1.0]), taylor(np.polymul(np.polymul(cd, char), plant_den), T), 3)
        for theta, num in offsets:
            t = np.convolve(np.convolve(front, taylor(num, T))[:3], inverse)[:3]
            values.append(PARABOLA * ((1 - c[0]) * theta**2 / 2 - c[1] * theta - t[1] * T / 2 - t[2] - c[2] - c[1] * T / 2))
        values = np.array(values)
        lo, hi = np.inf, -np.inf
        dense = np.cos(np.linspace(0, np.pi, 400))
        for part in (values[:NODES], values[NODES:]):
            fit = chebyshev.chebfit(-np.cos(np.pi * np.arange(NODES) / (NODES - 1)), part, NODES - 1)
            curve = chebyshev.chebval(dense, fit)
            lo, hi = min(lo, curve.min()), max(hi, curve.max())
        r["ripple"] = hi - lo

    # Frequency response.
    def loop(w):
        q = np.exp(1j * w * T)
        return np.polyval(ln, q) / np.polyval(ld, q)

    L = np.polyval(ln, z) / np.polyval(ld, z)
    gain = np.log(np.abs(L))
    crossings = [optimize.brentq(lambda w: np.log(abs(loop(w))), grid[i], grid[i + 1], xtol=1e-12 * grid[i], rtol=1e-14)
                 for i in np.nonzero(np.diff(np.sign(gain)))[0]]
    margins = [(np.angle(-loop(w)), w) for w in crossings]
    falling = [w for w in crossings if abs(loop(w * 1.0001)) < 1]
    r["crossover"] = falling[0] if falling else None
    if margins:
        if stable:
            r["phase_margin"] = np.degrees(min(margins, key=lambda m: abs(m[0]))[0])
            r["delay_margin"] = min((m if m > 0 else m + 2 * np.pi) / w for m, w in margins)
        else:
            r["phase_margin"] = np.degrees(min(m for m, _ in margins))
    flips = np.nonzero((np.diff(np.sign(L.imag)) != 0) & (L.real[:-1] < 0) & (L.real[1:] < 0))[0]
    gains = [abs(loop(optimize.brentq(lambda w: loop(w).imag, grid[i], grid[i + 1], xtol=1e-12 * grid[i], rtol=1e-14))) for i in flips]
    end = loop(np.pi / T)
    if end.real < 0:
        gains.append(abs(end))
    if stable:
        below = [g for g in gains if g < 1]
        r["gain_margin"] = -20 * np.log10(max(below)) if below else np.inf
    near = np.argmin(np.abs(1 + L))
    best = optimize.minimize_scalar(lambda w: abs(1 + loop(w)), bounds=(grid[max(near - 1, 0)], grid[min(near + 1, GRID - 1)]),
                                    method="bounded", options={"xatol": 1e-9 * grid[near]})
    r["modulus_margin"] = min(best.fun, np.abs(1 + L).min())
    if stable:
        H = np.abs(L / (1 + L)) * grid
        top = np.argmax(H)
        best = optimize.minimize_scalar(lambda w: -abs(loop(w) / (1 + loop(w))) * w, method="bounded",
                                        bounds=(grid[max(top - 1, 0)], grid[min(top + 1, GRID - 1)]), options={"xatol": 1e-9 * grid[top]})
        r["jitter_margin"] = 1 / max(-best.fun, H.max())

        def track(w):
            q = np.exp(1j * w * T)
            return abs(np.polyval(yn, q) / np.polyval(yd, q) / (1 + loop(w)))
        level = abs(1 - c[0]) / np.sqrt(2)
        Y = np.abs(np.polyval(yn, z) / np.polyval(yd, z) / (1 + L))
        under = np.nonzero(Y < level)[0]
        r["bandwidth"] = np.inf
        if len(under) and under[0] > 0:
            lo, hi = grid[under[0] - 1], grid[under[0]]
            r["bandwidth"] = optimize.brentq(lambda w: track(w) - level, lo, hi, xtol=1e-12 * lo, rtol=1e-14)
    return r


def at_rate(hz):
    T = 1 / hz
    parts, a, b = hold(*PLANT, T)
    n = len(a)
    # the sample sees the state before the effort computed from it
    c = np.hstack([parts[2], [[0.0]]])
    gy = fraction(a, b, c, [[0.0]])
    ps, sa, sb = hold(np.polymul(PLANT[0], SENSOR[0]), np.polymul(PLANT[1], SENSOR[1]), T)
    gm = fraction(sa, sb, np.hstack([ps[2], [[0.0]]]), [[0.0]])
    offsets = []
    for theta, row, d in output_rows(parts, T):
        num, _ = signal.ss2tf(a, b, row, d)
        offsets.append((theta, num[0]))
    grid = np.logspace(np.log10(np.pi / T * 1e-5), np.log10(np.pi / T), GRID)
    z = np.exp(1j * grid * T)
    out = []
    for name in MAPS:
        cn, cd = mapped(name, T)
        r = analyse(T, cn, cd, gy, gm, offsets, grid, z)
        out.append({"rate_hz": hz, "map": name, "metrics": r})
    return out


def main():
    p = argparse.ArgumentParser()
    p.add_argument("--rates", type=int, default=1000)
    p.add_argument("--from", dest="low", type=float, default=80)
    p.add_argument("--to", dest="high", type=float, default=8000)
    p.add_argument("--jobs", type=int, default=1)
    p.add_argument("--json")
    o = p.parse_args()
    rates = np.geomspace(o.low, o.high, o.rates)
    start = time.perf_counter()
    if o.jobs > 1:
        with multiprocessing.Pool(o.jobs) as pool:
            rows = pool.map(at_rate, rates, chunksize=8)
    else:
        rows = [at_rate(f) for f in rates]
    took = time.perf_counter() - start
    if o.json:
        with open(o.json, "w") as f:
            for row in rows:
                for r in row:
                    f.write(json.dumps(r, default=float) + "\n")
    print("%.3f" % took)


if __name__ == "__main__":
    main()
