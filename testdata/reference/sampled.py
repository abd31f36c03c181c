"""Discretization in the variable z, the naive way: residues, exponentials and
expanded polynomials, with so many digits that nothing is lost.

A sampled transfer function is Tz: num(z) / (den(z)·z^delay), polynomials in
descending powers; delay may be −1 (a value ahead of the tick).
"""
from collections import namedtuple
from fractions import Fraction

from mpmath import mp

import exactpoly as ep

Tz = namedtuple("Tz", "num den delay")


def rational(x):
    return mp.mpf(x.numerator) / x.denominator


def residues(num, lead, poles):
    """Partial fractions of num(s) / (lead·Π(s−p)^m).

        Σ_p Σ_{j<m} c[p][j] / (s−p)^(m−j)

    num: mp, descending; poles: [(p, m)] distinct. Returns [(p, m, c[p])].
    """
    out = []
    for p, m in poles:
        series = [mp.mpc(c) for c in ep.shift([mp.mpc(c) for c in num], p, m - 1)]
        for q, n in poles:
            if q is p:
                continue
            for _ in range(n):  # divide by (p − q) + x
                for j in range(m):
                    series[j] = (series[j] - (series[j - 1] if j else 0)) / (p - q)
        out.append((p, m, [c / lead for c in series]))
    return out


class Response:
    """h(t) = inverse Laplace transform of G(s)/s^k, k ≥ 1, at t = n·T + mu."""

    def __init__(self, ratio, k, T, poles=None):
        groups = list(poles if poles is not None else ratio.poles())
        at0 = [i for i, (p, _) in enumerate(groups) if p == 0]
        if at0:
            p, m = groups[at0[0]]
            groups[at0[0]] = (p, m + k)
        else:
            groups.append((mp.mpc(0), k))
        self.T = T
        self.terms = residues(ep.to_mp(ratio.num), mp.mpf(1), groups)
        self.steps = [mp.exp(p * T) for p, _ in groups]
        den = [(mp.exp(p * T), m) for p, m in groups]
        self.den = ep.expanded(den)  # Π (z − e^{pT})^m, the 1/s^k included

    def sequence(self, mu, count):
        """h(mu), h(T+mu), …, count values."""
        out = [mp.mpf(0)] * count
        for (p, m, c), step in zip(self.terms, self.steps):
            e = mp.exp(p * mu)
            for n in range(count):
                t = n * self.T + mu
                v, f = mp.mpc(0), mp.mpf(1)
                for i in range(m):  # c[m−1−i]·t^i/i!
                    v += c[m - 1 - i] * f
                    f = f * t / (i + 1)
                out[n] += (e * v).real
                e *= step
        return out

    def numerator(self, mu):
        """N(z)/z of Σ_{n≥0} h(nT+mu) z^{-n} = N(z)/den(z); N(0) is 0 and is checked to be."""
        n = len(self.den) - 1
        h = self.sequence(mu, n + 1)
        full = [mp.fsum(self.den[i] * h[j - i] for i in range(j + 1)) for j in range(n + 1)]
        size = max(abs(c) for c in full) or 1
        assert abs(full[-1]) < size * mp.mpf(10) ** (-mp.dps * 3 // 4), "numerator does not divide by z"
        return full[:-1]


def without_unit_root(den, times):
    """den / (z−1)^times by synthetic division; the remainder must vanish."""
    for _ in range(times):
        out, r = [], mp.mpf(0)
        for c in den:
            r += c
            out.append(r)
        assert abs(r) < sum(abs(c) for c in den) * mp.mpf(10) ** (-mp.dps * 3 // 4)
        den = out[:-1]
    return den


class Hold:
    """Step-invariant equivalent of ratio(s)·e^{−s·delay} behind a zero-order hold."""

    def __init__(self, ratio, T):
        self.T = T
        self.response = Response(ratio, 1, T)
        self.den = without_unit_root(self.response.den, 1)

    def at(self, delay):
        """delay: Fraction or mp number of seconds, ≥ −T.

        With delay = dT + e, 0 ≤ e < T:
            e = 0: (1−1/z) z^−d     Σ h(nT) z^−n
            e > 0: (1−1/z) z^−(d+1) Σ h(nT + T − e) z^−n
        """
        T = self.T
        if isinstance(delay, Fraction):
            d, e = divmod(delay, self.period_exact)
            e = rational(e)
        else:
            d = int(mp.floor(delay / T))
            e = delay - d * T
        if e == 0:
            return Tz(self.response.numerator(mp.mpf(0)), self.den, int(d))
        return Tz(self.response.numerator(T - e), self.den, int(d) + 1)


def hold(ratio, T, delay=0):
    """The equivalent as a Tz; T and delay are Fractions of seconds."""
    h = Hold(ratio, rational(T))
    h.period_exact = T
    return h.at(delay + 0 * T)


def holder(ratio, T):
    h = Hold(ratio, rational(T))
    h.period_exact = T
    return h


def substitute(ratio, a, b):
    """ratio(s) with s = a(z)/b(z), polynomials of degree ≤ 1."""
    n = max(len(ratio.num), len(ratio.den)) - 1

    def put(p):
        out = [mp.mpf(0)] * (n + 1)
        for i, c in enumerate(ep.to_mp(p)):
            k = len(p) - 1 - i
            out = ep.add(out, ep.scale(ep.mul(ep.power(a, k), ep.power(b, n - k)), c))
        return out

    return put(ratio.num), put(ratio.den)


def mapped(ratio, method, T, at=None):
    """The controller C(z). T: Fraction of seconds; at: rad/s, Fraction (prewarped)."""
    Tm = rational(T)
    one = mp.mpf(1)
    if method in ("tustin", "prewarped"):
        k = 2 / Tm if method == "tustin" else rational(at) / mp.tan(rational(at) * Tm / 2)
        num, den = substitute(ratio, [k, -k], [one, one])
    elif method == "forward":
        num, den = substitute(ratio, [1 / Tm, -1 / Tm], [one])
    elif method == "backward":
        num, den = substitute(ratio, [1 / Tm, -1 / Tm], [one, 0 * one])
    elif method == "hold":
        return hold(ratio, T)
    elif method == "triangle":
        r = Response(ratio, 2, Tm)
        num = r.numerator(mp.mpf(0))
        den = ep.scale(without_unit_root(r.den, 2), Tm)
        assert abs(num[0]) <= max(map(abs, num)) * mp.mpf(10) ** (-mp.dps * 3 // 4)
        num = num[1:]
    elif method == "matched":
        num, den = matched(ratio, Tm)
    else:
        raise ValueError(method)
    return Tz(num, den, 0)


def matched(ratio, T):
    """Poles and finite zeros by z = e^{sT}; of the zeros at infinity one stays there,
    the others go to z = −1; the leading Laurent coefficient at s = 0 is kept:
    lim s^k C(s) = lim ((z−1)/T)^k C(z)."""
    poles = [(mp.exp(p * T), m) for p, m in ratio.poles()]
    zeros = [(mp.exp(p * T), m) for p, m in ratio.zeros()]
    excess = len(ratio.den) - len(ratio.num)
    if excess > 1:
        zeros.append((mp.mpc(-1), excess - 1))
    num, den = ep.expanded(zeros), ep.expanded(poles)
    n, d = leading_at(ep.to_mp(ratio.num), 0, 1), leading_at(ep.to_mp(ratio.den), 0, 1)
    nz, dz = leading_at(num, 1, T), leading_at(den, 1, T)
    assert n[0] - d[0] == nz[0] - dz[0]
    return ep.scale(num, n[1] / d[1] / (nz[1] / dz[1])), den


def leading_at(p, c, step):
    """(k, coefficient) of the first Taylor coefficient of p(c + step·x) that is not zero."""
    for k, v in enumerate(clean(ep.shift(p, c, len(p) - 1, step), p, step)):
        if v != 0:
            return k, v
    raise ValueError("zero polynomial")


def clean(taylor, p, step=1):
    """Taylor coefficients with rounding noise replaced by exact zeros: the noise
    is some 10^(−dps), true values of this set are above 10^(−dps/2)."""
    size = mp.fsum(abs(c) for c in p) * mp.mpf(10) ** (-mp.dps * 3 // 4)
    return [0 * v if abs(v) < size * mp.mpf(step) ** k else v for k, v in enumerate(taylor)]
