#!/usr/bin/python3
"""Reference values for internal/lti in 60-digit arithmetic (python3-mpmath).

    /usr/bin/python3 reference.py > reference.json

Methods differ from those of the package: crossings and the least |1+L| by dense
scanning of the frequency response and root finding; closed-loop poles as roots of
expanded polynomials with 250 digits; series by exact polynomial division.
"""
import json
import sys
from mpmath import mp, mpf, mpc, pi, findroot, polyroots, expm1, exp, log, fabs, arg, sqrt, sin, inf, factorial

mp.dps = 60


def conj_close(roots):
    out = []
    for r in roots:
        r = mpc(r)
        out.append(r)
        if r.imag != 0:
            out.append(r.conjugate())
    return out


def mode(w, zeta):
    w, zeta = mpf(w), mpf(zeta)
    return mpc(-zeta * w, w * sqrt(1 - zeta * zeta))


class Loop:
    """L(x) = k x^e prod(x-z)/prod(x-p) * delay, x = s or (z-1)/T."""

    def __init__(self, name, zeros, poles, op, k, T=0, ticks=0, dead=0, oz=0):
        self.name, self.op, self.oz = name, op, oz
        self.zeros, self.poles = conj_close(zeros), conj_close(poles)
        self.T, self.ticks, self.dead = mpf(T), ticks, mpf(dead)
        self.k = mpf(k)

    def poly(self, roots):
        p = [mpc(1)]  # descending
        for r in roots:
            q = p + [mpc(0)]
            for i, c in enumerate(p):
                q[i + 1] -= r * c
            p = q
        return [c.real for c in p]

    def num(self):
        return [self.k * c for c in self.poly(self.zeros)]

    def x(self, w):
        if self.T == 0:
            return mpc(0, w)
        return (exp(mpc(0, w * self.T)) - 1) / self.T

    def at(self, w):
        x = self.x(w)
        v = mpc(self.k) * x ** (self.oz - self.op)
        for z in self.zeros:
            v *= x - z
        for p in self.poles:
            v /= x - p
        return v * exp(mpc(0, -w * (self.dead + self.T * self.ticks)))

    def dlog(self, w):
        """d log L / dw"""
        x = self.x(w)
        dx = mpc(0, 1) * (1 + self.T * x)
        s = (self.oz - self.op) / x
        for z in self.zeros:
            s += 1 / (x - z)
        for p in self.poles:
            s -= 1 / (x - p)
        return s * dx - mpc(0, 1) * (self.dead + self.T * self.ticks)

    def corners(self):
        out = []
        for r in self.zeros + self.poles:
            if self.T != 0:
                if fabs(1 + r * self.T) == 0:
                    continue
                r = log(1 + r * self.T) / self.T
            if fabs(r) > 0:
                out.append(r)
        return out or [mpc(1)]

    def grid(self):
        c = self.corners()
        lo = min(fabs(r) for r in c) / 1000
        hi = max(fabs(r) for r in c) * 1000
        if self.dead:
            hi = max(fabs(r) for r in c) * 30
        if self.T != 0:
            hi = pi / self.T
            lo = min(lo, hi / 1000)
        g = set()
        n = 1200
        for i in range(n + 1):
            g.add(lo * (hi / lo) ** (mpf(i) / n))
        for r in c:
            b, a = fabs(r.imag), fabs(r.real)
            for i in range(-60, 61):
                w = b + a * mpf(i) / 6 * (1 + fabs(mpf(i)) / 8)
                if lo < w < hi:
                    g.add(w)
        step = pi / 8 / (self.dead + self.T * self.ticks) if self.dead or self.ticks else 0
        if step:
            i = 1
            while i * step < hi and i < 3000:
                g.add(i * step)
                i += 1
        return sorted(g)


def refine(f, a, b):
    return findroot(f, (a, b), solver='anderson', tol=mpf(10) ** -100, maxsteps=400, verify=False)


def analyse(L):
    g = L.grid()
    v = [L.at(w) for w in g]
    gains, phases = [], []
    for i in range(1, len(g)):
        a, b = v[i - 1], v[i]
        if (fabs(a) > 1) != (fabs(b) > 1):
            gains.append(refine(lambda w: log(fabs(L.at(w))), g[i - 1], g[i]))
        if (a.imag > 0) != (b.imag > 0) and g[i] * L.T < pi * (1 - mpf(10) ** -20):
            w = refine(lambda w: L.at(w).imag / fabs(L.at(w)), g[i - 1], g[i])
            if L.at(w).real < 0 and fabs(L.at(w)) < mpf(10) ** 12:
                phases.append(w)
    low = []
    h = [fabs(1 + x) ** 2 for x in v]
    for i in range(1, len(g) - 1):
        if h[i] <= h[i - 1] and h[i] <= h[i + 1]:
            def slope(w):
                l = L.at(w)
                return ((1 + l).conjugate() * l * L.dlog(w)).real
            if slope(g[i - 1]) < 0 < slope(g[i + 1]):
                w = refine(slope, g[i - 1], g[i + 1])
                low.append(fabs(1 + L.at(w)))
    rest = None
    if L.op == L.oz:
        rest = L.k
        for z in L.zeros:
            rest *= -z
        for p in L.poles:
            rest /= -p
        rest = rest.real
        low.append(fabs(1 + rest))
    end = None
    if L.T != 0:
        end = L.at(pi / L.T).real
        low.append(fabs(1 + end))
    else:
        low.append(mpf(1))
    pg = [(w, fabs(L.at(w))) for w in phases]
    if rest is not None and rest < 0:
        pg.insert(0, (mpf(0), -rest))
    if end is not None and end < 0:
        pg.append((pi / L.T, -end))
    return gains, pg, min(low)


def closed_poles(L):
    """All roots, from expanded coefficients with 250 digits, in a scaled variable."""
    old, mp.dps = mp.dps, 250
    try:
        scale = max([fabs(r) for r in L.zeros + L.poles] + [mpf(1)]) ** mpf('0.5')
        d = L.poly([p / scale for p in L.poles] + [mpc(0)] * L.op + ([mpc(-1) / (L.T * scale)] * L.ticks if L.ticks else []))
        if L.ticks:
            d = [c * (L.T * scale) ** L.ticks for c in d]
        n = [c * L.k * scale ** (len(L.zeros) + L.oz - len(L.poles) - L.op)
             for c in L.poly([z / scale for z in L.zeros] + [mpc(0)] * L.oz)]
        m = max(len(d), len(n))
        f = [mpf(0)] * m
        for p in (d, n):
            for i, c in enumerate(p):
                f[m - len(p) + i] += c
        r = [x * scale for x in polyroots(f, maxsteps=1000, extraprec=800, error=False)]
        r = [mpc(x) for x in r]
        return [mpc(x.real, 0) if fabs(x.imag) < fabs(x) * mpf(10) ** -150 else x for x in r]
    finally:
        mp.dps = old


def series(L, n=4):
    """1/(1+L) = D/(D+N): quotient of ascending polynomials; delays expanded."""
    m = n + L.op + L.oz + 2
    den = list(reversed(L.poly(L.poles + [mpc(0)] * L.op)))
    num = list(reversed([L.k * c for c in L.poly(L.zeros + [mpc(0)] * L.oz)]))
    dl = []
    for k in range(m):
        if L.ticks:
            c = mpf(1)
            for i in range(k):
                c = c * -(L.ticks + i) * L.T / (i + 1)
            dl.append(c)
        else:
            dl.append((-L.dead) ** k / factorial(k))
    num = [sum(num[j] * dl[k - j] for j in range(min(k + 1, len(num)))) for k in range(m)]
    den = (den + [mpf(0)] * m)[:m]
    tot = [a + b for a, b in zip(den, num)]
    q = []
    for k in range(n):
        q.append((den[k] - sum(tot[j] * q[k - j] for j in range(1, k + 1))) / tot[0])
    return q


def s(x):
    return mp.nstr(x, 45)


def describe(L):
    gains, pg, least = analyse(L)
    out = dict(name=L.name, period=s(L.T), ticks=L.ticks, dead=s(L.dead), origin_poles=L.op, origin_zeros=L.oz,
               num=[s(c) for c in reversed(L.num())],
               poles=[[s(p.real), s(p.imag)] for p in L.poles],
               zeros=[[s(p.real), s(p.imag)] for p in L.zeros])
    out['gain_crossings'] = [[s(w), s(arg(-L.at(w)))] for w in gains]
    out['phase_crossings'] = [[s(w), s(x)] for w, x in pg]
    out['modulus'] = s(least)
    out['delay_margin'] = s(min([(lambda a: a if a > 0 else a + 2 * pi)(arg(-L.at(w))) / w for w in gains])) if gains else "inf"
    if not L.dead:
        roots = closed_poles(L)
        out['unstable'] = sum(1 for x in roots if 2 * x.real + L.T * fabs(x) ** 2 > 0)
        eq = [log(1 + x * L.T) / L.T if L.T != 0 else x for x in roots]
        eq = sorted(eq, key=lambda p: -p.real)
        out['equivalent'] = [[s(x.real), s(x.imag)] for x in eq if x.imag >= 0 or fabs(x.imag) < mpf(10) ** -40]
    out['series'] = [s(c) for c in series(L)]
    print(L.name, file=sys.stderr, flush=True)
    return out


def sample(name, zeros, poles, op, k, rate, ticks):
    """Time scaled so that w = 1 is at w*T = rate[0] for T = rate[1]; roots by z = e^(sT);
    surplus zeros near z = -0.3; gain matched at rest."""
    wt, T = mpf(rate[0]), mpf(rate[1])
    u = wt / T  # rad/s of the normalized 1
    zz, pp = conj_close(zeros), conj_close(poles)
    zd = [expm1(mpc(z) * wt) / T for z in zz]
    pd = [expm1(mpc(p) * wt) / T for p in pp]
    extra = max(len(pp) + op - len(zz) - 1, 0)
    ed = [-(mpf('1.3') + mpf(i) / 10) / T for i in range(extra)]
    kd = mpf(k) * u ** op
    for z, d in zip(zz, zd):
        kd *= (-mpc(z)) / (-d)
    for p, d in zip(pp, pd):
        kd /= (-mpc(p)) / (-d)
    for e in ed:
        kd /= -e
    L = Loop(name, [], [], op, kd.real, T, ticks)
    L.zeros, L.poles = zd + [mpc(e) for e in ed], pd
    return L


def q(x):
    return mpf(x)


def loops():
    m3, m7, m20 = mode(3, '0.001'), mode(7, '0.004'), mode(20, '0.01')
    a3, a7 = mode('3.2', '0.002'), mode('6.5', '0.003')
    base = [
        ("type 0, order 3", [], [q(-1), q('-0.5'), q(-3)], 0, 12),
        ("type 1, order 2", [], [q(-1)], 1, 1),
        ("type 1, lag and filter", [q('-0.1')], [q('-0.01'), q(-2), q(-15)], 1, '2.5'),
        ("type 2, lead", [q('-0.3')], [q(-10)], 2, 10),
        ("type 2, two modes, order 7", [q('-0.3'), a3], [q(-10), m3, m7], 2, 450),
        ("type 3, conditionally stable", [q('-0.2'), q('-0.25')], [q(-20)], 3, 25),
        ("order 12, type 2", [q('-0.25'), a3, a7], [q(-8), q(-12), m3, m7, m20, q(-30), q(-40)], 2, '4.5e7'),
        ("unstable plant", [q('-0.5')], [q(1), q(-6)], 0, 20),
        ("right half plane zero", [q(4)], [q(-1), q(-9)], 1, '-1.2'),
        ("mode above crossover", [], [mode(9, '0.002'), q(-4)], 1, 300),
    ]
    for name, z, p, op, k in base:
        yield Loop(name, z, p, op, k)
    for name, z, p, op, k in base:
        for rate, ticks in ((('1e-5', '1e-7'), 3), (('0.002', '1e-5'), 0), (('0.02', '1e-3'), 2), (('0.1', '0.05'), 1), (('0.25', '1'), 0)):
            yield sample("%s, w T = %s, T = %s s, %d ticks" % (name, rate[0], rate[1], ticks), z, p, op, k, rate, ticks)
    yield sample("type 1, order 2, 14 ticks", [], [q(-1)], 1, 1, ("0.05", "1e-3"), 14)
    yield sample("two modes, 9 ticks", [q('-0.3'), a3], [q(-10), m3, m7], 2, 450, ('0.01', '1e-4'), 9)
    for name, z, p, op, k in base[:6]:
        yield Loop(name + ", dead time 0.12", z, p, op, k, dead='0.12')
    yield Loop("lag with long dead time", [], [q(-1)], 0, '0.7', dead=5)
    yield Loop("two lags with long dead time", [], [q('-0.1'), q(-1)], 0, '0.13', dead=20)


json.dump([describe(L) for L in loops()], sys.stdout, indent=1)
print()
