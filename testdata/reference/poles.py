"""Closed-loop poles: all of them from the expanded characteristic polynomial, or
the dominant ones of a loop with a long delay, with a count that proves them complete."""
import cmath
import math

from mpmath import mp

import exactpoly as ep

WHOLE = 60  # whole ticks of delay up to which the polynomial is expanded and solved


def order_key(s):
    return (-s.real, s.imag)


def tidy(poles):
    """Sorted by falling real part, then rising imaginary part; near-equal real parts of a pair are equal."""
    return sorted(poles, key=order_key)


def sampled_all(den, num, delay):
    """Roots in z of den·z^delay + num, as δ = (z−1)·scale would cluster: solved in
    x = (z−1)/r, r the size of the largest root distance from 1."""
    n = len(den) - 1 + delay
    poly = ep.add(ep.mul(den, [mp.mpf(1)] + [mp.mpf(0)] * delay), num)
    assert len(poly) == n + 1
    taylor = ep.shift(poly, mp.mpf(1), n)
    return [1 + x for x in ep.roots(taylor[::-1])]


class Characteristic:
    """f(s) = 1 + L(s), L(s) = gain·Π(x−zero)/Π(x−pole)·e^{−s·delay} with x = s, or x = (e^{sT}−1)/T."""

    def __init__(self, gain, zeros, poles, delay, T=None):
        self.gain, self.zeros, self.poles, self.delay, self.T = gain, zeros, poles, delay, T
        self.fgain = complex(gain)
        self.fzeros, self.fpoles = [complex(z) for z in zeros], [complex(p) for p in poles]
        self.fdelay, self.fT = float(delay), None if T is None else float(T)

    def fx(self, s):
        return s if self.fT is None else expm1(s * self.fT) / self.fT

    def fL(self, s):
        x = self.fx(s)
        v = self.fgain
        for i in range(max(len(self.fzeros), len(self.fpoles))):
            if i < len(self.fpoles):
                v /= x - self.fpoles[i]
            if i < len(self.fzeros):
                v *= x - self.fzeros[i]
        return v * cmath.exp(-s * self.fdelay)

    def flog_slope(self, s):
        """L'/L in s."""
        x = self.fx(s)
        d = sum(1 / (x - z) for z in self.fzeros) - sum(1 / (x - p) for p in self.fpoles)
        return d * (1 if self.fT is None else cmath.exp(s * self.fT)) - self.fdelay

    def L(self, s):
        x = s if self.T is None else mp.expm1(s * self.T) / self.T
        v = self.gain * mp.exp(-s * self.delay)
        for z in self.zeros:
            v *= x - z
        for p in self.poles:
            v /= x - p
        return v

    def log_slope(self, s):
        x = s if self.T is None else mp.expm1(s * self.T) / self.T
        d = mp.fsum(1 / (x - z) for z in self.zeros) - mp.fsum(1 / (x - p) for p in self.poles)
        return d * (1 if self.T is None else mp.exp(s * self.T)) - self.delay


def expm1(s):
    a, b = s.real, s.imag
    return complex(math.expm1(a) * math.cos(b) - 2 * math.sin(b / 2) ** 2, math.exp(a) * math.sin(b))


def newton(c, s):
    """A root of log(−L) = 0 near s in floats, or None. On −L = 1 the logarithm is the
    better function: nearly linear where the delay rules."""
    for _ in range(60):
        v = -c.fL(s)
        if v == 0 or not cmath.isfinite(v):
            return None
        step = cmath.log(v) / c.flog_slope(s)
        if not cmath.isfinite(step):
            return None
        s -= step
        if abs(s.real) * (c.fT or c.fdelay) > 50:
            return None
        if abs(step) < 1e-13 * abs(s):
            return s
    return None


def polish(c, s):
    s = mp.mpc(s)
    for _ in range(40):
        step = mp.log(-c.L(s)) / c.log_slope(s)
        s -= step
        if abs(step) < abs(s) * mp.mpf(10) ** (-mp.dps * 2 // 3):
            return s
    raise ValueError("no convergence")


def dominant(c, count, seeds):
    """The count (or one more, to keep a pair whole) roots of largest real part.

    Starting points: the lattice 2πk/delay shifted left, and seeds. The result is
    proved complete by the winding number of 1 + L along the line that separates the
    last root kept from the next one found.
    """
    tau = c.fdelay
    starts = list(seeds)
    for k in range(0, 4 * count):
        for re in (1, 0, -0.5, -1, -2, -4):
            starts.append(complex(re / tau, (k + 0.05) * math.pi / tau))
    found = []
    for s in starts:
        r = newton(c, s)
        if r is None:
            continue
        r = complex(r.real, abs(r.imag))
        if c.fT is not None:  # e^{sT} has the period 2πj/T
            r = complex(r.real, abs(math.remainder(r.imag, 2 * math.pi / c.fT)))
        if r.imag < 1e-9 * abs(r):
            r = complex(r.real, 0)
        if all(abs(r - q) > 1e-8 * abs(r) for q in found):
            found.append(r)
    found.sort(key=lambda s: -s.real)
    kept, n = [], 0
    for s in found:
        if n >= count:
            break
        kept.append(s)
        n += 1 if s.imag == 0 else 2
    edge = (kept[-1].real + found[len(kept)].real) / 2
    want = roots_right_of(c, edge)
    assert want == n, "dominant poles: %d found, the winding number says %d" % (n, want)
    out = []
    for s in kept:
        s = polish(c, s)
        out += [mp.mpc(s.real, 0)] if abs(s.imag) < abs(s) * 1e-30 else [s, mp.conj(s)]
    return out


def roots_right_of(c, edge):
    """Number of zeros of 1 + L with Re s > edge: open-loop poles there plus the winding
    number of 1 + L along the line Re s = edge, closed at infinity (where L → 0) or by
    the period of e^{sT}. Steps are halved until 1 + L turns by less than 0.5 rad."""
    def inside(p):
        s = p if c.fT is None else cmath.log(1 + p * c.fT) / c.fT
        return s.real > edge

    corners = [abs(p) for p in c.fpoles + c.fzeros if p != 0]
    top = math.pi / c.fT if c.fT is not None else 1e5 * max(corners + [1 / (c.fdelay or 1e9)])
    turn = 0.0
    stack = [(0.0, top, 1 + c.fL(complex(edge, 0)), 1 + c.fL(complex(edge, top)))]
    floor = top * 1e-13
    grid = max(400, int(8 * min(top, 300 * max(corners + [1])) * c.fdelay) if c.fdelay else 400)
    marks = sorted({0.0, top} | {top * i / grid for i in range(1, grid)} | {10 ** (k / 40) * top for k in range(-560, 0)})
    stack = []
    vals = [1 + c.fL(complex(edge, w)) for w in marks]
    for i in range(len(marks) - 1):
        stack.append((marks[i], marks[i + 1], vals[i], vals[i + 1]))
    while stack:
        a, b, fa, fb = stack.pop()
        d = cmath.phase(fb / fa)
        if abs(d) < 0.5 or b - a < floor:
            turn += d
            continue
        m = (a + b) / 2
        fm = 1 + c.fL(complex(edge, m))
        stack += [(a, m, fa, fm), (m, b, fm, fb)]
    # Upward along the left edge with the region on the right is clockwise: Z = P + turns (both halves).
    wind = turn / math.pi
    n = round(wind)
    assert abs(wind - n) < 1e-3, "winding number is not whole: %r" % wind
    return sum(inside(p) for p in c.fpoles) - n
