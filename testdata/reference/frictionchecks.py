"""What the runs of friction.py are held to, and the hunting cycle of the loop in continuous time."""
import numpy as np
from mpmath import mp, mpf
from scipy.integrate import solve_ivp

from drymass import Mass
from kept import num


def energy(spec, mass):
    """J·v²/2 after each stretch = before + (u − going·Fc)·Δy − β·∫v² dt, the loss by quadrature."""
    for v0, going, u, span in mass.pieces[:25]:
        m = Mass(spec, v0)
        m.going = going
        y1, v1 = m.at(u, span)
        loss = mass.beta * mp.quad(lambda t: m.at(u, t)[1] ** 2, [0, span])
        assert abs(mass.J * (v1**2 - v0**2) / 2 - (u - going * mass.fc) * y1 + loss) < mpf(10) ** -40


def by_scipy(spec, rows):
    """The run under the efforts found, by a general integrator with event search, 1e-9."""
    J, fc, fs, T, delay = (float(num(spec[n])) for n in ("J", "coulomb", "static", "period_s", "delay_s"))
    beta = float(num(spec["b"]) + num(spec["viscous"]))
    x, going, worst, last = np.zeros(2), 0, 0.0, 0.0
    zero = lambda t, x, *a: x[1]  # noqa: E731
    zero.terminal = True
    for y, v, u in rows[:150]:
        worst = max(worst, abs(x[0] - float(y)), abs(x[1] - float(v)))
        for effort, span in ((last, delay), (float(u), T - delay)):
            t = 0.0
            while t < span:
                if going == 0:
                    if abs(effort) <= fs:
                        break
                    going = int(np.sign(effort))
                zero.direction = -going
                run = solve_ivp(lambda t, x, e, g: [x[1], (e - g * fc - beta * x[1]) / J], (t, span), x, args=(effort, going), events=zero,
                                method="DOP853", rtol=1e-12, atol=1e-14)
                x, t = run.y[:, -1], run.t[-1]
                if run.status == 1:
                    x, going = np.array([x[0], 0.0]), 0
        last = float(u)
    assert worst < 1e-9, "%s: SciPy differs by %g" % (spec["name"], worst)


def coasting(base):
    """Free run from v0 to rest: b = Fv = 0 in v0·J/Fc seconds over J·v0²/(2·Fc); else (J/β)·ln(1 + β·v0/Fc)."""
    for b, viscous in (("0", "0"), ("0.1", "0.04")):
        m, beta = Mass(dict(base, b=b, viscous=viscous), 3), num(b) + num(viscous)
        m.hold(mpf(0), mpf(2))
        c = beta * 3 / m.fc
        free = m.J / beta * mp.log(1 + c) if beta else None
        want = (3 * m.J / m.fc, m.J * 9 / (2 * m.fc)) if beta == 0 else (free, m.J / beta * 3 - m.fc / beta * free)
        assert m.going == 0 and abs(m.events[0][0] - want[0]) < mpf(10) ** -45 and abs(m.y - want[1]) < mpf(10) ** -45


def hunting(spec):
    """The same loop in continuous time, u = Kp·e + Ki·∫e − Kd·v: its symmetric cycle.

    It breaks loose at e0 with I = Fs − Kp·e0, slips by x' = Ax, x = (e, v, I, 1), to v = 0 at t1, where e must be −e0;
    I then runs from I1 to −I0 at the rate −Ki·e0. Half the cycle gives all: amplitude e0, as e falls
    throughout the slip, and period 2·(t1 + (I1 + I0)/(Ki·e0)).
    """
    J, fc, fs, kp, ki, kd = (num(spec[n]) for n in ("J", "coulomb", "static", "kp", "ki", "kd"))
    loss = num(spec["b"]) + num(spec["viscous"]) + kd
    A = mp.matrix([[0, -1, 0, 0], [kp / J, -loss / J, 1 / J, -fc / J], [ki, 0, 0, 0], [0, 0, 0, 0]])

    hundredth = mp.expm(A / 100)

    def slip(e0):
        x, t = mp.matrix([e0, 0, fs - kp * e0, 1]), mpf(0)
        while t == 0 or x[1] > 0:
            x, t = hundredth * x, t + mpf(1) / 100
        for _ in range(9):  # Newton on v(t) = 0: from 2 digits, 9 doublings are past 80
            step = x[1] / (A * x)[1]
            x, t = mp.expm(-A * step) * x, t - step
        assert abs(x[1]) < mpf(10) ** (8 - mp.dps)
        return t, x

    guess = (fs - fc) / kp
    e0 = mp.findroot(lambda e: slip(e)[1][0] + e, (guess * mpf("0.8"), guess), solver="secant", tol=mpf(10) ** -(2 * mp.dps - 30))
    t1, x1 = slip(e0)
    return {"amplitude": e0, "slip_s": t1, "period_s": 2 * (t1 + (x1[2] + fs - kp * e0) / (ki * e0))}
