"""Margins by dense scan and bracketed refinement.

A Response is the loop on the boundary: |L|, arg L at ω. The scan is done in floats
on the factored form over a grid that is dense in log ω, around every pole and zero
near the boundary, and against the phase of the delay; the refinement is done with
mp numbers on the expanded polynomials, at full precision.
"""
import bisect
import cmath
import math

from mpmath import mp

import exactpoly as ep
from poles import expm1


class Boundary:
    """L = num(x)/den(x)·e^{−jω·delay} at x = jω (T None) or x = z = e^{jωT}.

    fgain, fzeros, fpoles describe the same in s or δ = (z−1)/T for the scan.
    """

    def __init__(self, num, den, delay, T, fgain, fzeros, fpoles):
        self.num, self.den, self.delay, self.T = num, den, delay, T
        self.fgain, self.fzeros, self.fpoles = complex(fgain), fzeros, fpoles
        self.fdelay, self.fT = float(delay), None if T is None else float(T)

    def exact(self, w):
        x = mp.mpc(0, w) if self.T is None else mp.expj(w * self.T)
        return mp.polyval(self.num, x) / mp.polyval(self.den, x) * mp.expj(-w * self.delay)

    def quick(self, w):
        x = 1j * w if self.fT is None else expm1(1j * w * self.fT) / self.fT
        v = self.fgain
        nz, np_ = len(self.fzeros), len(self.fpoles)
        for i in range(max(nz, np_)):
            if i < np_:
                v /= x - self.fpoles[i]
            if i < nz:
                v *= x - self.fzeros[i]
        return v * cmath.exp(-1j * w * self.fdelay)

    def singular(self):
        """Poles and zeros as points of the s plane."""
        out = []
        for p in self.fzeros + self.fpoles:
            if self.fT is None:
                out.append(p)
            elif abs(1 + p * self.fT) > 1e-12:
                out.append(cmath.log(1 + p * self.fT) / self.fT)
        return [p for p in out if p != 0]


def grid(singular, corners, wmax, delay, reach):
    """Rising frequencies in (0, wmax]. reach: highest frequency at which the phase of the delay matters."""
    sizes = [abs(p) for p in singular if abs(p) > 0] + list(corners)
    lo = min(min(sizes) * 1e-4, wmax * 1e-3)
    n = int(120 * math.log10(wmax / lo))
    g = [lo * (wmax / lo) ** (i / n) for i in range(n)]
    for p in singular:
        w, d = abs(p.imag), abs(p.real)
        if 0 < w <= wmax * 1.01 and d < 0.5 * w:
            d = max(d, 1e-12 * w)
            span = math.log10(w / d) + 1
            for i in range(int(24 * span) + 24):
                h = d * 10 ** (-1 + i / 24)
                g += [w - h, w + h]
            g.append(w)
    if delay:
        top = min(wmax, reach)
        m = min(int(top * delay / 0.15) + 1, 60000)
        g += [top * i / m for i in range(1, m)]
    g += [wmax * (1 - 10 ** (-i / 4)) for i in range(4, 40)]
    return sorted({w for w in g if lo <= w < wmax}) + [wmax]


def refine(f, a, b):
    """The root of f in [a, b], f(a)·f(b) < 0: Illinois' rule, to about 2/3 of the digits."""
    a, b = mp.mpf(a), mp.mpf(b)
    fa, fb = f(a), f(b)
    if fa == 0:
        return a
    if fb == 0:
        return b
    assert (fa > 0) != (fb > 0), "the scan's sign change does not stand at full precision"
    tol = mp.mpf(10) ** (-70)
    for i in range(400):
        c = b - fb * (b - a) / (fb - fa)
        fc = f(c)
        if fc == 0:
            return c
        if (fc > 0) != (fb > 0):
            a, fa = b, fb
        else:
            fa /= 2
        b, fb = c, fc
        if abs(b - a) < tol * abs(b):
            return b
    raise ValueError("no convergence")


def sign_changes(ws, vs):
    return [(ws[i], ws[i + 1]) for i in range(len(ws) - 1) if vs[i] != 0 and (vs[i] > 0) != (vs[i + 1] > 0)]


def sure_imag(L, w, v):
    """Sign-safe Im L: where rounding could decide, the full precision does."""
    if abs(v.imag) > 1e-9 * abs(v):
        return v.imag
    return float(mp.sign(L.exact(mp.mpf(w)).imag)) * abs(v) * 1e-12


def degrees(x):
    return x * 180 / mp.pi


def half_turn(phase):
    """Radians into (−π, π]."""
    while phase > mp.pi:
        phase -= 2 * mp.pi
    while phase <= -mp.pi:
        phase += 2 * mp.pi
    return phase


def gain_crossings(L, ws, mags):
    out = []
    for a, b in sign_changes(ws, [m - 1 for m in mags]):
        w = refine(lambda w: mp.log(abs(L.exact(w))), a, b)
        i = bisect.bisect_left(ws, float(a))
        out.append((w, half_turn(mp.arg(L.exact(w)) + mp.pi), mags[i] > 1))
    return out


def phase_crossings(L, ws, vals, wanted=6):
    """Frequencies where L crosses the negative real axis, with |L|; at most the wanted ones
    nearest to |L| = 1 on either side. Ends count: ω → 0 of a loop without poles at the
    origin, and ω = π/T, are real; a negative value there is a crossing."""
    im = [sure_imag(L, w, v) for w, v in zip(ws, vals)]
    rough = []
    for i in range(len(ws) - (2 if L.T is not None else 1)):
        if (im[i] > 0) != (im[i + 1] > 0):
            m = L.quick((ws[i] + ws[i + 1]) / 2)
            if m.real < 0 and vals[i].real < 0 and vals[i + 1].real < 0:
                rough.append((abs(math.log(abs(m))), ws[i], ws[i + 1]))
            elif (m.real < 0) or vals[i].real < 0 or vals[i + 1].real < 0:
                a, b = narrow(L, ws[i], ws[i + 1])
                v = L.quick(a)
                if v.real < 0:
                    rough.append((abs(math.log(abs(v))), a, b))
    rough.sort()
    out = []
    for _, a, b in rough[: 2 * wanted]:
        w = refine(lambda w: (lambda v: v.imag / abs(v))(L.exact(w)), a, b)
        out.append((w, abs(L.exact(w))))
    out.sort()
    ends = []
    zero = L.exact(mp.mpf(0)) if at_zero_finite(L) else None
    if zero is not None and zero.real < 0:
        ends.append((mp.mpf(0), abs(zero)))
    if L.T is not None and delay_is_whole(L):
        end = mp.polyval(L.num, mp.mpf(-1)) / mp.polyval(L.den, mp.mpf(-1)) * (-1) ** int(mp.nint(L.delay / L.T))
        if end < -mp.mpf(10) ** -60:  # a tustin controller has an exact zero there
            ends.append((mp.pi / L.T, abs(end)))
    return sorted(out + ends)


def narrow(L, a, b):
    """Halve a sign change of Im L until it is clear whether L is negative there."""
    fa = sure_imag(L, a, L.quick(a))
    for _ in range(60):
        m = (a + b) / 2
        fm = sure_imag(L, m, L.quick(m))
        if (fm > 0) == (fa > 0):
            a = m
        else:
            b = m
        va, vb = L.quick(a), L.quick(b)
        if (va.real > 0) == (vb.real > 0) and b - a < 1e-3 * a:
            break
    return a, b


def at_zero_finite(L):
    return all(p != 0 for p in L.fpoles)


def delay_is_whole(L):
    k = L.delay / L.T
    return abs(k - mp.nint(k)) < mp.mpf(10) ** -40


def minimum(f, ws, fs, best=3):
    """Smallest value of a smooth f(ω) > 0 over the grid's range, ends included: local
    minima of the scan, refined as roots of the central difference (step 1e-45 relative,
    so its error is some 1e-90)."""
    lows = [i for i in range(1, len(ws) - 1) if fs[i] <= fs[i - 1] and fs[i] <= fs[i + 1]]
    lows.sort(key=lambda i: fs[i])
    cands = [f(mp.mpf(ws[-1]))]
    for i in lows[:best]:
        def slope(w):
            h = w * mp.mpf(10) ** -45
            return (f(w + h) - f(w - h)) / (2 * h)
        a, b = mp.mpf(ws[i - 1]), mp.mpf(ws[i + 1])
        sa, sb = slope(a), slope(b)
        if sa < 0 < sb:
            cands.append(f(refine(slope, a, b)))
    return min(cands)


def analyze(L, corners, stable):
    """Dictionary of the margins of L; see generate.py for the definitions."""
    wmax = mp.pi / L.T if L.T is not None else None
    sing = L.singular()
    top = float(wmax) if wmax is not None else 1e3 * max([abs(p) for p in sing] + list(corners))
    reach = top
    if L.T is None and L.fdelay:
        reach = top
        while reach > 1e-6 and abs(L.quick(reach)) < 1e-2:
            reach /= 1.2
        reach *= 1.2
    ws = grid(sing, corners, top, L.fdelay, reach)
    vals = [L.quick(w) for w in ws]
    mags = [abs(v) for v in vals]
    gains = gain_crossings(L, ws, mags)
    phases = phase_crossings(L, ws, vals)
    out = {"gain_crossings": [], "phase_crossings": [{"rad_s": w, "gain": g} for w, g in phases]}
    pm = dm = mp.inf
    for w, m, falling in gains:
        out["gain_crossings"].append({"rad_s": w, "margin_deg": degrees(m)})
        size = abs(m) if stable else m
        pm = min(pm, size)
        dm = min(dm, (m if m > 0 else m + 2 * mp.pi) / w)
    out["phase_margin_deg"] = degrees(pm)
    out["delay_margin_s"] = dm if stable else None
    out["crossover_rad_s"] = next((w for w, _, falling in gains if falling), None)
    up = [-20 * mp.log10(g) for _, g in phases if g < 1]
    down = [20 * mp.log10(g) for _, g in phases if g > 1]
    if stable:
        out["gain_margin_db"] = min(up) if up else mp.inf
        out["gain_reduction_db"] = min(down) if down else None
    else:
        out["gain_margin_db"] = -min(down) if down else None
        out["gain_reduction_db"] = None
    dist = [abs(1 + v) for v in vals]
    ends = [abs(1 + L.exact(mp.mpf(0)))] if at_zero_finite(L) else []
    if L.T is None:
        ends.append(abs(1 + (L.num[0] / L.den[0] if len(L.num) == len(L.den) else mp.mpf(0))))
    out["modulus_margin"] = min([minimum(lambda w: abs(1 + L.exact(w)), ws, dist)] + ends)
    return out, ws


def bandwidth(L, Ly, ws, more, dc):
    """Lowest ω where |Ly/(1+L)| falls through |dc|/√2; more: closed-loop poles, to sharpen the grid."""
    top = ws[-1]
    extra = [p for p in more if abs(p) > 0]
    ws = sorted(set(ws) | set(grid(extra, [abs(p) for p in extra] or [top], top, 0, 0)))
    limit = float(abs(dc)) / math.sqrt(2)
    vs = [abs(Ly.quick(w) / (1 + L.quick(w))) - limit for w in ws]
    for i in range(len(ws) - 1):
        if vs[i] > 0 >= vs[i + 1]:
            return refine(lambda w: mp.log(abs(Ly.exact(w) / (1 + L.exact(w)) * mp.sqrt(2) / dc)), ws[i], ws[i + 1])
    return None
