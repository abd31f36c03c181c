"""Polynomials and rational functions over Q, and their expressions.

A polynomial is a list of Fraction in descending powers, without leading zeros.
The expression of a loop file is read by Python's own parser: every decimal
becomes a Fraction, ^ becomes **, and the names s and z are rational functions.
"""
import re
from fractions import Fraction

from mpmath import mp


def trim(p):
    i = 0
    while i < len(p) - 1 and p[i] == 0:
        i += 1
    return p[i:]


def add(a, b):
    n = max(len(a), len(b))
    a = [0 * a[0]] * (n - len(a)) + list(a)
    b = [0 * b[0]] * (n - len(b)) + list(b)
    return [x + y for x, y in zip(a, b)]


def mul(a, b):
    out = [0 * a[0] * b[0]] * (len(a) + len(b) - 1)
    for i, x in enumerate(a):
        for j, y in enumerate(b):
            out[i + j] += x * y
    return out


def scale(a, k):
    return [k * x for x in a]


def power(a, n):
    out = [1]
    for _ in range(n):
        out = mul(out, a)
    return out


def derivative(p):
    n = len(p) - 1
    return [c * (n - i) for i, c in enumerate(p[:-1])] or [0]


def divmod_exact(a, b):
    a, q = list(a), []
    while len(a) >= len(b):
        f = a[0] / b[0]
        q.append(f)
        for i, c in enumerate(b):
            a[i] -= f * c
        a.pop(0)
    return q or [Fraction(0)], trim(a or [Fraction(0)])


def gcd(a, b):
    while trim(b) != [0]:
        a, b = b, divmod_exact(a, trim(b))[1]
    a = trim(a)
    return scale(a, 1 / a[0])


def square_free(p):
    """Yun's algorithm: [(factor, multiplicity)], factors monic and coprime."""
    p = scale(p, 1 / p[0])
    if len(p) == 1:
        return []
    d = derivative(p)
    g = gcd(p, d)
    b, c = divmod_exact(p, g)[0], divmod_exact(d, g)[0]
    out, m = [], 1
    while len(b) > 1:
        d = trim(add(c, scale(derivative(b), -1)))
        if d == [0]:
            out.append((b, m))
            break
        f = gcd(b, d)
        if len(f) > 1:
            out.append((f, m))
        b, c, m = divmod_exact(b, f)[0], divmod_exact(d, f)[0], m + 1
    return out


class Ratio:
    """num/den over Q, in lowest terms, den monic."""

    def __init__(self, num, den=(Fraction(1),)):
        num, den = trim([Fraction(c) for c in num]), trim([Fraction(c) for c in den])
        g = gcd(num, den) if num != [0] else den
        num, den = divmod_exact(num, g)[0], divmod_exact(den, g)[0]
        self.num, self.den = scale(num, 1 / den[0]), scale(den, 1 / den[0])

    @staticmethod
    def of(x):
        return x if isinstance(x, Ratio) else Ratio([x])

    def __add__(self, o):
        o = Ratio.of(o)
        return Ratio(add(mul(self.num, o.den), mul(o.num, self.den)), mul(self.den, o.den))

    def __mul__(self, o):
        o = Ratio.of(o)
        return Ratio(mul(self.num, o.num), mul(self.den, o.den))

    def __truediv__(self, o):
        o = Ratio.of(o)
        return Ratio(mul(self.num, o.den), mul(self.den, o.num))

    def __pow__(self, n):
        return Ratio(power(self.num, n), power(self.den, n))

    def __neg__(self):
        return self * -1

    def __sub__(self, o):
        return self + -Ratio.of(o)

    def __rsub__(self, o):
        return Ratio.of(o) - self

    def __rtruediv__(self, o):
        return Ratio.of(o) / self

    __radd__, __rmul__ = __add__, __mul__

    def order(self):
        return len(self.den) - 1

    def poles(self):
        return grouped_roots(self.den)

    def zeros(self):
        return grouped_roots(self.num)


def parse(text):
    """The Ratio of a loop file's expression in s or z."""
    code = re.sub(r"\d+(\.\d+)?([eE][+-]?\d+)?", lambda m: 'F("%s")' % m.group(0), text)
    code = re.sub(r"\^F\(\"(\d+)\"\)", r"**\1", code)
    x = Ratio([1, 0])
    return Ratio.of(eval(code, {"__builtins__": {}}, {"F": Fraction, "s": x, "z": x}))


def seconds(text):
    """'3 ms' as a Fraction of seconds."""
    value, unit = text.split()
    return Fraction(value) * {"s": 1, "ms": Fraction(1, 10**3), "us": Fraction(1, 10**6), "ns": Fraction(1, 10**9)}[unit]


def hertz(text):
    """'3 kHz' as a Fraction of hertz."""
    value, unit = text.split()
    return Fraction(value) * {"Hz": 1, "kHz": 10**3, "MHz": 10**6}[unit]


def to_mp(p):
    """Coefficients as mp numbers; a Fraction is rounded once at the working precision."""
    return [mp.mpf(c.numerator) / c.denominator if isinstance(c, Fraction) else mp.mpmathify(c) for c in p]


def roots(p):
    """All roots of an mp polynomial without multiple roots, conjugate pairs exact."""
    p = list(p)
    zeros = 0
    while len(p) > 1 and p[-1] == 0:
        p.pop()
        zeros += 1
    n = len(p) - 1
    if n <= 0:
        return [mp.mpc(0)] * zeros
    r = abs(p[-1] / p[0]) ** (mp.mpf(1) / n)
    scaled = [c * r ** (n - i) / (p[0] * r**n) for i, c in enumerate(p)]
    found = mp.polyroots(scaled, maxsteps=4000, extraprec=mp.prec)
    return [mp.mpc(0)] * zeros + pair_up([r * x for x in found])


def pair_up(found):
    """Replace the roots of a real polynomial by exact conjugate pairs and real numbers."""
    out = []
    for x in found:
        x = mp.mpc(x)
        if abs(x.imag) <= abs(x) * mp.mpf(10) ** (-mp.dps // 2):
            out.append(mp.mpc(x.real, 0))
        elif x.imag > 0:
            out += [x, mp.conj(x)]
    assert len(out) == len(found), "complex roots that do not pair up"
    return out


def grouped_roots(p):
    """[(root, multiplicity)] of a rational polynomial; multiplicities are exact."""
    return [(x, m) for f, m in square_free(p) for x in roots(to_mp(f))]


def expanded(groups, lead=1):
    """lead·Π (x − root)^multiplicity with real coefficients."""
    p = [mp.mpc(lead)]
    for x, m in groups:
        p = mul(p, power([mp.mpc(1), -x], m))
    return [c.real for c in p]


def shift(p, c, order, step=1):
    """Ascending Taylor coefficients of p(c + step·x) up to x^order."""
    p, out = list(p), []
    for k in range(order + 1):
        if not p:
            out.append(mp.mpf(0))
            continue
        for i in range(1, len(p)):
            p[i] += c * p[i - 1]
        out.append(p.pop() * mp.mpf(step) ** k)
    return out


def rough_roots(p):
    """Roots as floats, for a scan: Weierstrass' simultaneous iteration, run until the
    steps are below 1e-20 relative. A double root comes out as two close ones."""
    p = [mp.mpc(c) for c in p]
    out = []
    while len(p) > 1 and p[-1] == 0:
        p.pop()
        out.append(0j)
    n = len(p) - 1
    if n <= 0:
        return out
    r = abs(p[-1] / p[0]) ** (mp.mpf(1) / n)
    q = [c * r ** (n - i) / (p[0] * r**n) for i, c in enumerate(p)]
    x = [mp.mpc(0.4, 0.9) ** k for k in range(n)]
    for _ in range(5000):
        worst = mp.mpf(0)
        for i in range(n):
            v = mp.polyval(q, x[i])
            for j in range(n):
                if j != i:
                    v /= x[i] - x[j]
            x[i] -= v
            worst = max(worst, abs(v) / abs(x[i]))
        if worst < 1e-20:
            return out + [complex(r * v) for v in x]
    raise ValueError("no convergence")
