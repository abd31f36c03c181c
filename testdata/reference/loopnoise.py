"""Variance of effort and output of a sampled loop driven by white noise on its samples; see quantized.py, noise.

    x⁺ = A·x + B·n        u = Cu·x + Du·n        y = Cy·x        x = (plant states, last effort, controller states)
"""
from mpmath import mp, mpf

from kept import num


def held(plant, t):
    """Φ, Γ of t seconds of held effort: y' = u − y, or (y, v): y' = v, v' = u − v."""
    q = mp.exp(-t)
    if plant == "1/(s + 1)":
        return mp.matrix([[q]]), mp.matrix([[1 - q]])
    return mp.matrix([[1, 1 - q], [0, q]]), mp.matrix([[t - 1 + q], [1 - q]])


def system(spec):
    """A, B, Cu, Du, Cy with y the first state."""
    T, delay, kp, ki, kd = (num(spec.get(n, "0")) for n in ("period_s", "delay_s", "kp", "ki", "kd"))
    early, last = held(spec["plant"], delay)   # under the last effort
    rest, now = held(spec["plant"], T - delay)  # under the new one
    p = early.rows
    n = p + 3  # plant, last effort, I, last sample
    cu, du = mp.zeros(1, n), -(kp + kd / T)
    cu[0, 0], cu[0, p + 1], cu[0, p + 2] = du, 1, kd / T
    A, B = mp.zeros(n), mp.zeros(n, 1)
    A[:p, :p] = rest * early
    A[:p, p] = rest * last
    for j in range(n):
        for i in range(p):
            A[i, j] += now[i] * cu[0, j]
        A[p, j] = cu[0, j]
    for i in range(p):
        B[i] = now[i] * du
    B[p] = du
    A[p + 1, p + 1], A[p + 1, 0], B[p + 1] = (1, -T * ki, -T * ki) if ki else (0, 0, 0)
    A[p + 2, 0], B[p + 2] = 1, 1
    return A, B, cu, du


def lyapunov(A, B):
    """P = A·P·Aᵀ + B·Bᵀ as n² linear equations."""
    n = A.rows
    M, rhs = mp.eye(n * n), mp.zeros(n * n, 1)
    for i in range(n):
        for j in range(n):
            rhs[i * n + j] = B[i] * B[j]
            for k in range(n):
                for m in range(n):
                    M[i * n + j, k * n + m] -= A[i, k] * A[j, m]
    x = mp.lu_solve(M, rhs)
    return mp.matrix([[x[i * n + j] for j in range(n)] for i in range(n)])


def squares(A, B, cu, du):
    """Σ of the squares of u and y after one n = 1."""
    x, vu, vy = B, du * du, mpf(0)
    for _ in range(20000):
        u = (cu * x)[0]
        vu, vy = vu + u * u, vy + x[0] ** 2
        x = A * x
        if mp.norm(x) < mpf(10) ** -30:
            return vu, vy
    raise AssertionError("the loop does not settle")


def around(spec, points=4096):
    """Means of |U/N|², |Y/N|² over the unit circle, U = −C·N/(1 + C·G); the error falls as |largest pole|^points."""
    T, kp, ki, kd = (num(spec.get(n, "0")) for n in ("period_s", "kp", "ki", "kd"))
    q, vu, vy = mp.exp(-T), mpf(0), mpf(0)
    for j in range(points):
        z = mp.expjpi(mpf(2 * j + 1) / points)  # never z = 1
        if spec["plant"] == "1/(s + 1)":
            g = (1 - q) / (z - q)
        else:
            g = ((T - 1 + q) * z + 1 - q - T * q) / ((z - 1) * (z - q))
        c = kp + ki * T / (z - 1) + kd * (z - 1) / (T * z)
        h = c / (1 + c * g)
        vu, vy = vu + abs(h) ** 2 / points, vy + abs(h * g) ** 2 / points
    return vu, vy


def case(spec):
    parts = system(spec)
    A, B, cu, du = parts
    P = lyapunov(A, B)
    vy, vu = P[0, 0], (cu * P * cu.T)[0] + du * du
    check = [squares(*parts)]
    if "delay_s" not in spec:
        check.append(around(spec))
    for u, y in check:
        assert abs(u - vu) < mpf(10) ** -30 * vu and abs(y - vy) < mpf(10) ** -30 * vy, spec
    if spec["plant"] == "1/(s + 1)" and "ki" not in spec:
        a, kp = mp.exp(-num(spec["period_s"])), num(spec["kp"])
        b = (1 - a) * kp
        closed = b * b / (1 - (a - b) ** 2)
        assert abs(vy - closed) < mpf(10) ** -45 and abs(vu - kp * kp * (1 + closed)) < mpf(10) ** -45
    gains = ["%s %s" % (n.capitalize(), spec[n]) for n in ("kp", "ki", "kd") if n in spec]
    name = "noise, %s, %s" % (spec["plant"], ", ".join(gains)) + (", late by %s s" % spec["delay_s"] if "delay_s" in spec else "")
    out = {"name": name + ", T %s" % spec["period_s"], "kind": "noise", "plant": spec["plant"]}
    out.update({n: spec.get(n, "0") for n in ("period_s", "delay_s", "kp", "ki", "kd")})
    out.update(variance_u=vu, variance_y=vy)
    return out
