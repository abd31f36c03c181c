"""The generator against figures from outside it, and against other routes.

Sources stand beside the figures. "Recomputed" figures were given with the digits
written here by somebody else's high-precision arithmetic.
"""
from fractions import Fraction

from mpmath import mp

import analysis
import exactpoly as ep
import poles
import sampled


def check():
    with mp.workdps(120):
        hold_equivalents()
        limiting_zeros()
        margins()
        largest_gains()
        largest_tick()
        error_constants()
        maps()
        between_ticks()
        hold_by_matrix_exponential()
        stepping()
        dominant_among_all()
    naive_double_precision()


def near(got, want, digits, what):
    """want is a string rounded to its last place: half a unit there, and a tenth more for double rounding."""
    scale = mp.mpf(10) ** -digits
    assert abs(got - mp.mpf(want)) <= scale * mp.mpf("0.51"), "%s: %s, want %s" % (what, mp.nstr(got, 20), want)


def near_all(got, wants, digits, what):
    assert len(got) == len(wants), what
    for g, w in zip(got, wants):
        near(g, w, digits, what)


def tz(plant, T, delay="0"):
    g = sampled.hold(ep.parse(plant), Fraction(T), Fraction(delay))
    return g, analysis.strip(g.num)


def hold_equivalents():
    # Ogata, Discrete-Time Control Systems (from memory; recomputed)
    g, num = tz("1/(s*(s + 1))", 1)
    near_all(num, ["0.367879441171442", "0.264241117657115"], 15, "1/(s(s+1)) numerator")
    near(g.den[1], "-1.36787944117144", 14, "denominator")
    near(g.den[2], "0.367879441171442", 15, "denominator")
    g, num = tz("1/(s + 1)", 1, "1/2")  # recomputed
    near_all(num, ["0.393469340287", "0.238651218541"], 12, "1/(s+1), half a tick")
    assert g.delay == 1
    g, num = tz("1/s^2", 1, "1/2")  # recomputed; exact
    near_all(num, ["0.125", "0.75", "0.125"], 90, "1/s², half a tick")
    g, num = tz("1/s^2", "1/1000")  # T²/2·(z+1)/(z−1)²
    near_all(num, ["5e-7", "5e-7"], 90, "1/s²")


def limiting_zeros():
    # Astrom, Hagander, Sternby, Automatica 20, 1984 (roots of the Euler polynomials, recomputed)
    for n, wants in ((2, ["-1"]), (3, ["-0.2679491924", "-3.732050808"]), (4, ["-0.1010205144", "-1", "-9.898979486"]),
                     (5, ["-0.0430962882", "-0.4305753471", "-2.322473887", "-23.20385448"])):
        _, num = tz("1/s^%d" % n, 1)
        got = sorted((r.real for r in ep.roots(num)), reverse=True)
        assert len(got) == len(wants)
        for g, w in zip(got, wants):
            near(g, w, len(w.partition(".")[2]), "zeros of 1/s^%d" % n)


def loop(plant, controller, rate, **more):
    timing = {k: more.pop(k) for k in ("update", "conversion", "compute") if k in more}
    return analysis.Loop(dict(plant=plant, controller=controller, map=more.pop("map", "tustin"), **more), dict(rate=rate, **timing))


def margins():
    # plant 1/(s(s+1)), controller 1 (recomputed)
    c = loop("1/(s*(s + 1))", "1", "1 Hz").continuous()
    near(c["crossover_rad_s"], "0.786151377757", 12, "continuous crossover")
    near(c["phase_margin_deg"], "51.8272923730", 10, "continuous phase margin")
    w = mp.sqrt((mp.sqrt(5) - 1) / 2)  # closed form: w²(w² + 1) = 1, margin 90° − atan w
    near(c["delay_margin_s"], (mp.pi / 2 - mp.atan(w)) / w, 60, "continuous delay margin")
    for rate, update, w, pm, digits in (("2 Hz", "when_ready", "0.782499522392", "40.7579773827", 10), ("2 Hz", "next_tick", "0.782499522392", "18.3410173306", 10),
                                        ("1 Hz", "when_ready", "0.771734028099", "30.3842728003", 10), ("1 Hz", "next_tick", "0.771734028099", "-13.8328299", 7)):
        d = loop("1/(s*(s + 1))", "1", rate, update=update).sampled()
        near(d["crossover_rad_s"], w, 12, rate)
        near(d["phase_margin_deg"], pm, digits, rate)
        assert d["stable"] == (not pm.startswith("-"))


def largest_gains():
    # the gain at which the same loop becomes unstable (recomputed)
    for rate, update, want in (("1 Hz", "when_ready", "2.392211191177"), ("2 Hz", "when_ready", "4.361993867092"), ("10 Hz", "when_ready", "20.33892560993"),
                               ("1 Hz", "next_tick", "0.8047185265209"), ("10 Hz", "next_tick", "6.846364201313")):
        d = loop("1/(s*(s + 1))", "1", rate, update=update).sampled()
        gain = 1 / max(x["gain"] for x in d["phase_crossings"])
        near(gain, want, len(want.partition(".")[2]), "largest gain at " + rate)


def largest_tick():
    # 10/(s(s+1)) is unstable above T = 0.207146502944 s (recomputed); Kv = 10, ramp error 0.1
    for T, stable in (("0.207146502943", True), ("0.207146502945", False)):
        rate = 1 / Fraction(T)
        a = analysis.Loop(dict(plant="10/(s*(s + 1))", controller="1", map="tustin"), dict(rate="%d/%d Hz" % (rate.numerator, rate.denominator)))
        d = a.sampled()
        assert d["stable"] == stable, T
        if stable:
            near(d["kv"], "10", 80, "Kv")
            near(d["steady"]["ramp"]["tracking_error"], "0.1", 80, "ramp error")


def error_constants():
    # 10(s+1)/s² at T = 0.1 s: (1.05 z − 0.95)/(z−1)², Ka = 10, parabola error 0.1
    _, num = tz("10*(s + 1)/s^2", "1/10")
    near_all(num, ["1.05", "-0.95"], 80, "10(s+1)/s²")
    d = loop("10*(s + 1)/s^2", "1", "10 Hz").sampled()
    near(d["ka"], "10", 80, "Ka")
    # a sensor lag tau makes the ramp tracking error 1/Kv − tau
    c = loop("2/(s*(0.1*s + 1))", "1", "10 Hz", sensor="1/(0.05*s + 1)").continuous()
    near(c["steady"]["ramp"]["tracking_error"], "0.45", 80, "sensor lag")
    near(c["steady"]["ramp"]["loop_error"], "0.5", 80, "sensor lag, loop error")
    # final value theorem: T(s) = (n1 s + n0)/(s² + d1 s + d0): (d1 − n1)/d0, then 2(d2 − n2)/d0 for t²
    c = loop("9*(0.5*s + 1)/s^2", "1", "10 Hz").continuous()
    near(2 * c["steady"]["parabola"]["tracking_error"], mp.mpf(2) / 9, 80, "parabola by the closed loop's coefficients")


def maps():
    # tustin moves a 300 Hz notch at 1 kHz to (fs/π)·atan(π·f/fs) = 240.576707262 Hz, a 100 Hz one to 96.892191614 Hz
    for f, want in ((300, "240.576707262"), (100, "96.892191614")):
        w = 2 * mp.pi * f
        w = Fraction(int(w * 10**30), 10**30)
        notch = ep.Ratio([1, 0, w * w], [1, 2 * w, w * w])
        z = ep.roots(sampled.mapped(notch, "tustin", Fraction(1, 1000)).num)
        near(max(mp.arg(x) for x in z) * 1000 / (2 * mp.pi), want, 9, "notch")
        z = ep.roots(sampled.mapped(notch, "prewarped", Fraction(1, 1000), w).num)
        near(max(mp.arg(x) for x in z) * 1000 / (2 * mp.pi), f, 20, "notch, prewarped")
    # derivative filter with Tf/T = 0.25
    for method, want in (("tustin", -mp.mpf(1) / 3), ("backward", "0.2"), ("forward", "-3")):
        g = sampled.mapped(ep.parse("s/(s/4 + 1)"), method, Fraction(1))
        near(-g.den[1] / g.den[0], want, 80, method)
    # triangle of an integrator is the trapezoidal rule, hold is the rectangle rule (closed forms)
    g = sampled.mapped(ep.parse("1/s"), "triangle", Fraction(1, 4))
    near_all([c / g.den[0] for c in g.num], ["0.125", "0.125"], 80, "triangle of 1/s")
    g = sampled.mapped(ep.parse("1/s"), "hold", Fraction(1, 4))
    near(analysis.strip(g.num)[0], "0.25", 80, "hold of 1/s")
    # matched: 2/(s(s+1)(s+2)) has two zeros at infinity to spare: one at −1 twice; lim s·C = 1
    g = sampled.mapped(ep.parse("2/(s*(s + 1)*(s + 2))"), "matched", Fraction(1, 10))
    k = g.num[0]
    near_all([c / k for c in g.num], ["1", "2", "1"], 80, "matched zeros")
    near(4 * k / ((1 - mp.exp(mp.mpf("-0.1"))) * (1 - mp.exp(mp.mpf("-0.2")))) * 10, "1", 80, "matched gain")


def between_ticks():
    # a digital integrator in series with plant 1/s, r = t²/2: T²/8 between the ticks (recomputed)
    d = loop("1/s", "(1.2*s + 0.5)/s", "4 Hz", map="backward").sampled()
    near(d["steady"]["parabola"]["ripple"], mp.mpf(1) / 128, 80, "T²/8")


def hold_by_matrix_exponential():
    """The hold equivalent's pulse response by companion matrices and expm, with the
    hold interval split at the switching instant, against residues and long division."""
    for text, delay in (("(s + 3)/((s + 1)^2*(s^2 + 0.1*s + 25)*s)", Fraction(7, 100)), ("(s + 3)/((s + 1)*(s + 2))", Fraction(0)), ("5/(s + 2)^4", Fraction(31, 100))):
        ratio, T = ep.parse(text), Fraction(1, 10)
        n = ratio.order()
        den, num = ep.to_mp(ratio.den), ep.to_mp(ratio.num)
        num = [mp.mpf(0)] * (n + 1 - len(num)) + num
        A, B = mp.zeros(n), mp.zeros(n, 1)
        for i in range(n - 1):
            A[i, i + 1] = 1
        for i in range(n):
            A[n - 1, i] = -den[n - i]
        B[n - 1] = 1
        Cm = mp.matrix([[num[n - i] for i in range(n)]])
        whole, part = divmod(delay, T)

        def flow(t):
            M = mp.zeros(n + 1)
            for i in range(n):
                for j in range(n):
                    M[i, j] = A[i, j] * t
                M[i, n] = B[i] * t
            return mp.expm(M, method="taylor")
        before, after = flow(sampled.rational(part)), flow(sampled.rational(T - part))
        x, got = mp.zeros(n + 1, 1), []
        for k in range(14):
            got.append((Cm * x[:n])[0])
            x[n] = 1 if k - 1 == whole and part else 0
            if part:
                x = before * x
            x[n] = 1 if k == whole else 0
            x = after * x
        g = sampled.hold(ratio, T, delay)
        want = pulse(g, 14)
        for a, b in zip(got, want):
            assert abs(a - b) < mp.mpf(10) ** -90, "%s: %s, %s" % (text, mp.nstr(a, 30), mp.nstr(b, 30))


def pulse(g, count):
    """First values of the pulse response of num/(den·z^delay)."""
    n = len(g.den) - 1
    num = [mp.mpf(0)] * (n + 1 - len(g.num)) + list(g.num)
    out = []
    for k in range(count):
        out.append((num[k] if k <= n else 0) - mp.fsum(g.den[i] * out[k - i] for i in range(1, min(k, n) + 1)))
    return ([mp.mpf(0)] * g.delay + out)[:count]


def stepping():
    """Steady errors, ripple included, against a loop stepped from rest until its transient
    is below 1e-25: plant states by expm, the controller as its difference equation."""
    spec = dict(plant="3/(0.5*s + 1)", controller="0.3*(s + 2.5)/s", map="tustin", sensor="1/(0.2*s + 1)")
    timing = dict(rate="5 Hz", conversion="20 ms", compute="50 ms")
    a = analysis.Loop(spec, timing)
    want = a.sampled()["steady"]["ramp"]
    T, tau = sampled.rational(a.T), sampled.rational(a.delay)
    # x = (y, m, u): y' = −2y + 6u, m' = 5y − 5m
    M = mp.matrix([[-2, 0, 6], [5, -5, 0], [0, 0, 0]])
    grid = 80  # points a tick; tau = 0.07 s is 28 of them
    one = mp.expm(M * T / grid, method="taylor")
    C = a.digital_controller()
    b0, b1, a1 = C.num[0] / C.den[0], C.num[1] / C.den[0], C.den[1] / C.den[0]
    first, rest = mp.expm(M * tau, method="taylor"), mp.expm(M * (T - tau), method="taylor")
    x = mp.zeros(3, 1)
    e0 = u = mp.mpf(0)
    for k in range(400):
        e = k * T - x[1]
        u, e0 = b0 * e + b1 * e0 - a1 * u, e
        last, x = x.copy(), first * x
        x[2] = u
        x = rest * x
    errors, x = [], last
    for i in range(grid):
        if i == mp.nint(grid * tau / T):
            x[2] = u
        errors.append((399 + mp.mpf(i) / grid) * T - x[0])
        x = one * x
    assert abs(errors[0] - want["tracking_error"]) < mp.mpf(10) ** -25, "steady ramp error by stepping"
    # Scanned, not refined: an extreme inside a piece is missed by at most |e''|/2·(T/grid/2)² each,
    # and between two changes of u, |e''| = 2|y'| < 4, y' being near the slope 1 of r.
    seen = max(errors) - min(errors)
    assert 0 <= want["ripple"] - seen + mp.mpf(10) ** -25 < 2 * 2 * (T / grid / 2) ** 2, (want["ripple"], seen)
    assert want["ripple"] > mp.mpf("1e-3"), "no ripple to compare"


def dominant_among_all():
    """The dominant poles of a loop with delay, found one by one, are the first of all its
    poles as the expanded polynomial gives them."""
    a = analysis.Loop(dict(plant="1/(0.5*s + 1)", controller="0.9*(0.5*s + 1.1)/s", map="backward", dead_time="268 ms"), dict(rate="50 Hz", compute="3 ms"))
    every = a.sampled()["poles"]
    whole, poles.WHOLE = poles.WHOLE, 0
    few = a.sampled()
    poles.WHOLE = whole
    assert not few["poles_complete"] and 8 <= len(few["poles"]) < len(every)
    for p, q in zip(few["poles"], every):
        assert abs(mp.mpc(*p) - mp.mpc(*q)) < mp.mpf(10) ** -60 * abs(mp.mpc(*q))


def naive_double_precision():
    """What coefficient polynomials in double precision make of the loop with Ka = 36 at 100 kHz and 1 MHz."""
    import loops

    spec = next(s for s in loops.LOOPS if s["name"] == "Ka of 36")
    for timing in spec["timings"]:
        if timing["rate"] not in ("100 kHz", "1 MHz"):
            continue
        with mp.workdps(200):
            a = analysis.Loop(spec, timing)
            C, g = a.digital_controller(), sampled.hold(a.PH, a.T, a.dead + a.delay)
            num = [float(c) for c in ep.mul(C.num, analysis.strip(g.num))]
            den = [float(c / C.den[0]) for c in ep.mul(C.den, g.den)]
            T = float(a.T)
        n = len(den) - 1
        second = sum(c * (n - i) * (n - i - 1) for i, c in enumerate(den)) / 2  # den''(1)/2
        ka = sum(num) / second / T**2 / float(C.den[0]) if second else float("nan")
        assert not abs(ka - 36) < 3.6, "double precision was expected to fail here: %r" % ka
