"""All figures of one loop at one rate. The definitions stand in generate.py."""
from fractions import Fraction

from mpmath import mp

import exactpoly as ep
import margins
import poles
import sampled
from sampled import rational

ORDER = 8  # Taylor coefficients kept in a series


def long_division(num, den, count):
    """Laurent series num/den of ascending Taylor lists: (start, [count coefficients])."""
    a = next((i for i, c in enumerate(num) if c != 0), None)
    b = next(i for i, c in enumerate(den) if c != 0)
    if a is None:
        return 0, [mp.mpf(0)] * count
    num, den, out = list(num[a:]), den[b:], []
    num += [mp.mpf(0)] * (count + len(den))
    for k in range(count):
        q = num[k] / den[0]
        out.append(q)
        for i in range(min(len(den), count - k)):
            num[k + i] -= q * den[i]
    return a - b, out


def truncated(a, b):
    n = len(a)
    return [mp.fsum(a[i] * b[k - i] for i in range(k + 1)) for k in range(n)]


def constants(num, den):
    """type, Kp, Kv, Ka from the Taylor lists of numerator and denominator of L."""
    start, c = long_division(num, den, 4)
    kind = -start
    return kind, [mp.mpf(0) if kind < k else c[0] if kind == k else mp.sign(c[0]) * mp.inf for k in range(3)]


def tidy(values):
    """Noise where terms cancel becomes exact zero. The figures here lie above 1e-40."""
    return [mp.mpf(0) if abs(v) < mp.mpf(10) ** (-mp.dps // 2) else v for v in values]


class Column:
    """One column: characteristic 1 + L = (den·delay⁻¹ + num)/…, tracking = numer/…

    num, den: L without delay; ytop: numerator polynomial of T over the closed-loop
    denominator; delay series about the origin of x.
    """

    def __init__(self, num, den, ytop, origin, step, delay_series, T):
        def taylor(p):
            return sampled.clean(ep.shift([mp.mpf(c) for c in p], origin, ORDER, step), p, step)
        self.T = T
        lag = delay_series
        n, d, y = taylor(num), taylor(den), taylor(ytop)
        nl, yl = truncated(n, lag), truncated(y, lag)
        self.kind, (self.kp, self.kv, self.ka) = constants(nl, d)
        self.lead = long_division(nl, d, 1)[1][0]
        self.closed = [a + b for a, b in zip(d, nl)]
        self.tracking = self.over_closed([a - b for a, b in zip(self.closed, yl)])
        self.loop = self.over_closed(d)

    def over_closed(self, top):
        size = max(abs(c) for c in self.closed[:1]) or 1
        top = [0 * c if abs(c) < size * mp.mpf(10) ** (-mp.dps // 3) else c for c in top]
        start, c = long_division(top, self.closed, 4)
        assert start >= 0
        return tidy(([mp.mpf(0)] * start + c)[:4])


def asymptotes(c, T):
    """Error polynomials g0 + g1 t + g2 t² for step, ramp, parabola of size 1 from the series c.

    At the ticks of the sampled loop (T > 0) r = kT has the forward difference quotient 1
    and r = (kT)²/2 has kT + T/2 and 1; T = 0 is the continuous loop.
    """
    return {
        "step": [c[0], mp.mpf(0), mp.mpf(0)],
        "ramp": [c[1], c[0], mp.mpf(0)],
        "parabola": tidy([c[2] + c[1] * T / 2, c[1], c[0] / 2]),
    }


def settled(g):
    return g[0] if g[1] == 0 and g[2] == 0 else mp.inf


class Loop:
    """One entry of loops.py at one of its rates."""

    def __init__(self, spec, timing):
        self.spec, self.timing = spec, timing
        self.P = ep.parse(spec["plant"])
        self.H = ep.parse(spec.get("sensor", "1"))
        self.C = ep.parse(spec["controller"])
        self.digital = spec.get("map") is None
        self.PH = self.P * self.H
        assert self.PH.order() == self.P.order() + self.H.order(), "plant and sensor cancel"
        if not self.digital:
            assert (self.C * self.PH).order() == self.C.order() + self.PH.order(), "controller cancels"
        self.order = self.C.order() + self.PH.order()
        self.dead = ep.seconds(spec.get("dead_time", "0 s"))
        self.T = 1 / ep.hertz(timing["rate"])
        self.delay = self.loop_delay()

    def loop_delay(self):
        u = self.timing.get("update", "when_ready")
        ready = ep.seconds(self.timing.get("conversion", "0 s")) + ep.seconds(self.timing.get("compute", "0 s"))
        if u == "when_ready":
            return ready
        if u == "next_tick":
            return self.T
        assert ep.seconds(u) >= ready
        return ep.seconds(u)

    # Continuous column

    def continuous(self):
        C, P, H = self.C, self.P, self.H
        tau = rational(self.dead)
        num = ep.to_mp(ep.mul(C.num, self.PH.num))
        den = ep.to_mp(ep.mul(C.den, self.PH.den))
        lag = [(-tau) ** k / mp.factorial(k) for k in range(ORDER + 1)]
        ytop = ep.to_mp(ep.mul(ep.mul(C.num, P.num), H.den))
        col = Column(num, den, ytop, mp.mpf(0), 1, lag, mp.mpf(0))
        flat = lambda gs: [complex(x) for x, m in gs for _ in range(m)]
        zeros = flat(C.zeros()) + flat(self.PH.zeros())
        ps = flat(C.poles()) + flat(self.PH.poles())
        L = margins.Boundary(num, den, tau, None, num[0] / den[0], zeros, ps)
        Ly = margins.Boundary(ep.mul(ep.to_mp(C.num), ep.to_mp(P.num)), ep.mul(ep.to_mp(C.den), ep.to_mp(P.den)), tau, None,
                              ep.to_mp(C.num)[0] * ep.to_mp(P.num)[0], flat(C.zeros()) + flat(P.zeros()), flat(C.poles()) + flat(P.poles()))
        if self.dead == 0:
            cl, complete = ep.roots(ep.add(den, num)), True
        else:
            mpflat = lambda gs: [x for x, m in gs for _ in range(m)]
            ch = poles.Characteristic(num[0] / den[0], mpflat(C.zeros()) + mpflat(self.PH.zeros()), mpflat(C.poles()) + mpflat(self.PH.poles()), tau)
            cl, complete = poles.dominant(ch, 8, [complex(x) for x in ep.roots(ep.add(den, num))] + [p * 0.9 for p in ps if p]), False
        stable = all(x.real < 0 for x in cl)
        return self.figures(col, L, Ly, cl, complete, stable, mp.mpf(0), None)

    # Sampled column

    def digital_controller(self):
        if self.digital:
            return sampled.Tz(ep.to_mp(self.C.num), ep.to_mp(self.C.den), 0)
        at = self.spec.get("at")
        return sampled.mapped(self.C, self.spec["map"], self.T, Fraction(at.split()[0]) if at else None)

    def sampled(self):
        T = rational(self.T)
        C = self.digital_controller()
        C = sampled.Tz(strip(C.num), C.den, C.delay)
        total = self.dead + self.delay
        hm, hy = sampled.holder(self.PH, self.T), sampled.holder(self.P, self.T)
        gm, gy = hm.at(total + 0 * self.T), hy.at(total + 0 * self.T)
        assert gm.delay == gy.delay and C.delay == 0
        k = gm.delay
        nm, ny = strip(gm.num), strip(gy.num)
        num, den = ep.mul(C.num, nm), ep.mul(C.den, gm.den)
        ah = ep.expanded([(mp.exp(p * T), m) for p, m in self.H.poles()])
        ytop = ep.mul(ep.mul(C.num, ny), ah)
        lag = [mp.binomial(-k, i) * T**i for i in range(ORDER + 1)]
        col = Column(num, den, ytop, mp.mpf(1), T, lag, T)
        if not self.digital:
            assert col.kind == constants_kind(self), "the map changed the type"
        delta = lambda p: [x / float(T) for x in ep.rough_roots(ep.shift(p, mp.mpf(1), len(p) - 1)[::-1])]
        dp = [complex(mp.expm1(p * T) / T) for p, m in self.PH.poles() for _ in range(m)]
        dyp = [complex(mp.expm1(p * T) / T) for p, m in self.P.poles() for _ in range(m)]
        zm, zc, pc = delta(nm), delta(C.num), exact_zero(delta(C.den), self.integrators(C, T))
        zy = delta(ny)
        L = margins.Boundary(num, den, k * T, T, gain_delta(num, den, T), zc + zm, pc + dp)
        Ly = margins.Boundary(ep.mul(C.num, ny), ep.mul(C.den, gy.den), k * T, T,
                              gain_delta(ep.mul(C.num, ny), ep.mul(C.den, gy.den), T), zc + zy, pc + dyp)
        if k <= poles.WHOLE:
            z, complete = poles.sampled_all(den, num, k), True
            cl = [equivalent(x, T) for x in z]
            stable = all(abs(x) < 1 for x in z)
        else:
            cl, complete = self.dominant_sampled(num, den, k, T, L), False
            stable = all(x.real < 0 for x in cl)
        out = self.figures(col, L, Ly, cl, complete, stable, T, (C, hm, hy, gm, total, ah))
        if complete:
            out["poles_z"] = sorted(([x.real, x.imag] for x in z), key=lambda p: (-p[0], p[1]))
            out["pole_count"] = len(z)
        return out

    def integrators(self, C, T):
        return sampled.leading_at(C.den, mp.mpf(1), T)[0]

    def dominant_sampled(self, num, den, k, T, L):
        """Poles of a loop with many whole ticks, through s = ln(z)/T."""
        zeros = [x / T for x in ep.roots(ep.shift(num, mp.mpf(1), len(num) - 1)[::-1])]
        ps = [x / T for x in roots_multiple(den, T)]
        ch = poles.Characteristic(gain_delta(num, den, T), zeros, ps, k * T, T)
        seeds = [p * 0.9 for p in L.singular() if abs(p.imag) < 3 / float(T)]
        return poles.dominant(ch, 8, seeds)

    # Figures of either column

    def figures(self, col, L, Ly, cl, complete, stable, T, held):
        corners = asymptote_corners(L)
        m, ws = margins.analyze(L, corners, stable)
        cl = poles.tidy(cl)
        out = {
            "stable": stable, "type": col.kind, "kp": col.kp, "kv": col.kv, "ka": col.ka,
            "tracking_series": col.tracking, "loop_series": col.loop,
            "poles": [[x.real, x.imag] for x in cl], "poles_complete": complete, "pole_count": len(cl) if complete else None,
        }
        out.update(m)
        dc = 1 - col.tracking[0]
        out["bandwidth_rad_s"] = margins.bandwidth(L, Ly, ws, [complex(x) for x in cl], dc) if stable and dc != 0 else None
        out["steady"] = self.steady(col, T, held) if stable else None
        out["sine"] = self.sine(L, Ly) if stable and "sine" in self.spec else None
        return out

    def sine(self, L, Ly):
        w = mp.mpf(self.spec["sine"].split()[0])
        e = 1 - Ly.exact(w) / (1 + L.exact(w))
        return {"frequency_rad_s": w, "amplitude": abs(e), "phase_deg": margins.degrees(mp.arg(e))}

    def steady(self, col, T, held):
        track, loop = asymptotes(col.tracking, T), asymptotes(col.loop, T)
        out = {}
        for kind in ("step", "ramp", "parabola"):
            e = settled(track[kind])
            row = {"tracking_error": e, "loop_error": settled(loop[kind]), "asymptote": track[kind], "ripple": None, "worst_error": None}
            if held is not None and e != mp.inf and kind != "step":
                row["ripple"], row["worst_error"] = self.ripple(held, kind)
                if kind == "parabola" and out["ramp"]["ripple"] != 0:
                    # r = t²/2 is a ramp of slope kT about tick k, so the ripple of the ramp grows with k
                    row["ripple"] = row["worst_error"] = mp.inf
            out[kind] = row
        out["load_step"] = {"tracking_error": self.load_error(col)}
        return out

    def load_error(self, col):
        """−P/(1+L) at the origin, by the leading terms of P and L; a steady load goes through
        the hold equivalent without change, so both columns use P(s)."""
        n, d = ep.to_mp(self.P.num), ep.to_mp(self.P.den)
        start, c = long_division(sampled.clean(ep.shift(n, mp.mpf(0), ORDER), n), sampled.clean(ep.shift(d, mp.mpf(0), ORDER), d), 1)
        lead = col.lead + (1 if col.kind == 0 else 0)
        power = start + col.kind
        return mp.mpf(0) if power > 0 else -c[0] / lead if power == 0 else mp.inf

    def ripple(self, held, kind):
        """Peak-to-peak and largest magnitude of the steady tracking error over one tick.

            e(θ) = r(kT+θT) − y(kT+θT),  y by the hold equivalent at delay − θT

        e is smooth in θ but for the instant at which the effort changes; each piece is
        scanned at 24 points and its extremes are refined.
        """
        C, hm, hy, gm, total, ah = held
        T = hm.T
        den = ep.mul(C.den, gm.den)
        cnum = ep.mul(C.num, strip(gm.num))
        closed_t = [a + b for a, b in zip(taylor1(den, T), truncated(taylor1(cnum, T), lag_series(gm.delay, T)))]
        front = taylor1(ep.mul(C.num, ah), T)

        def error(theta):
            g = hy.at(rational(total) - theta * T)
            y = truncated(truncated(front, taylor1(g.num, T)), lag_series(g.delay, T))
            start, t = long_division(y, closed_t, 4)
            t = ([mp.mpf(0)] * start + t)[:3]
            if kind == "ramp":
                return theta * T - t[1] + (1 - t[0]) * 0
            return (theta * T) ** 2 / 2 - t[1] * T / 2 - t[2]

        _, part = divmod(self.dead + self.delay, self.T)
        cuts = sorted({mp.mpf(0), rational(part) / T, mp.mpf(1)})
        values = []
        for a, b in zip(cuts, cuts[1:]):
            values += extremes(error, a, b)
        lo, hi = min(values), max(values)
        flat = hi - lo < mp.mpf(10) ** (-mp.dps // 3) * (T * T + max(abs(hi), abs(lo)))
        return mp.mpf(0) if flat else hi - lo, max(abs(hi), abs(lo))


def extremes(f, a, b, count=24):
    """Values of a smooth f at its ends and its inner extremes."""
    margin = (b - a) * mp.mpf(10) ** -60  # keep to this piece's side of the switch
    xs = [a + margin] + [a + (b - a) * i / count for i in range(1, count)] + [b - margin]
    fs = [f(x) for x in xs]
    out = [f(a), f(b)]
    span = max(fs) - min(fs)
    if span < mp.mpf(10) ** (-mp.dps // 3) * (max(abs(v) for v in fs) + mp.mpf(10) ** (-mp.dps // 3)):
        return out

    def slope(x):
        h = (b - a) * mp.mpf(10) ** -50
        return (f(x + h) - f(x - h)) / (2 * h)

    for i in range(1, count):
        if (fs[i] - fs[i - 1]) * (fs[i + 1] - fs[i]) <= 0:
            lo, hi = xs[i - 1], xs[i + 1]
            if i == 1:
                lo = a + (b - a) * mp.mpf(10) ** -45
            if i == count - 1:
                hi = b - (b - a) * mp.mpf(10) ** -45
            sa, sb = slope(lo), slope(hi)
            if (sa > 0) != (sb > 0):
                out.append(f(margins.refine(slope, lo, hi)))
    return out


def taylor1(p, T):
    return sampled.clean(ep.shift(p, mp.mpf(1), ORDER, T), p, T)


def lag_series(k, T):
    return [mp.binomial(-k, i) * T**i for i in range(ORDER + 1)]


def strip(p):
    """Without leading coefficients that are rounding noise about a structural zero."""
    floor = max(abs(c) for c in p) * mp.mpf(10) ** (-mp.dps * 3 // 4)
    i = 0
    while abs(p[i]) < floor:
        i += 1
    return p[i:]


def gain_delta(num, den, T):
    """Leading coefficient ratio of num/den written in δ = (z−1)/T."""
    return num[0] / den[0] * T ** (len(num) - len(den))


def equivalent(z, T):
    return mp.log(z) / T if z.imag != 0 or z.real > 0 else mp.mpc(mp.log(-z.real), mp.pi) / T


def exact_zero(found, count):
    """The count values nearest 0 are integrators: make them exact."""
    found = sorted(found, key=abs)
    return [0j] * count + found[count:]


def roots_multiple(den, T):
    """Roots of den in x = z−1; its zeros at x = 0 are exact and may be multiple."""
    return ep.roots(sampled.clean(ep.shift(den, mp.mpf(1), len(den) - 1), den)[::-1])


def constants_kind(loop):
    """The type of the continuous loop, from exact polynomials."""
    n, d = loop.C.num, loop.C.den
    k = 0
    for p, sign in ((n, -1), (d, 1), (loop.PH.num, -1), (loop.PH.den, 1)):
        i = len(p) - 1
        while p[i] == 0:
            i, k = i - 1, k + sign
    return k


def asymptote_corners(L):
    """Frequencies where the low- and the high-frequency asymptote of |L| pass 1."""
    out = []
    g, k = abs(L.fgain), 0
    for z in L.fzeros:
        g, k = (g * abs(z), k) if z != 0 else (g, k - 1)
    for p in L.fpoles:
        g, k = (g / abs(p), k) if p != 0 else (g, k + 1)
    if k > 0:
        out.append(g ** (1 / k))
    r = len(L.fpoles) - len(L.fzeros)
    if L.T is None and r > 0:
        out.append(abs(L.fgain) ** (1 / r))
    return out or [1.0]
