#!/usr/bin/env python3
"""Reference values from SciPy's cont2discrete (1.10.1) for ten invented systems.

    /usr/bin/python3 scipy_reference.py > scipy_reference.json

Each equivalent is taken in state space (scipy.signal.cont2discrete of A, B, C, D) and
evaluated at points z by a linear solve. "tolerance" is what float64 can promise
there: 64·n·2^-52·cond(zI − A_d), plus the growth n·2^-52·(|A|·T) of the matrix
exponential, relative to |C||(zI−A)^-1||B| + |D|.
"""
import json
import numpy as np
from scipy import signal

SYSTEMS = [
    ("lag", [1.0], [1.0, 1.0]),
    ("motor", [2.0], [1.0, 1.0, 0.0]),
    ("double integrator", [3.0], [1.0, 0.0, 0.0]),
    ("resonance", [100.0], [1.0, 1.0, 100.0]),
    ("lead", [4.2 * 0.25, 4.2], [0.0625, 1.0]),
    ("notch", [1.0, 0.5, 400.0], [1.0, 30.0, 400.0]),
    ("pi", [0.5, 2.0], [1.0, 0.0]),
    ("third order", [5.0, 10.0], [1.0, 6.0, 11.0, 6.0]),
    ("right half plane", [-1.0, 2.0], [1.0, 1.5, -1.0]),
    ("fifth order", [1.0, 3.0, 2.0], [1.0, 8.0, 45.0, 118.0, 164.0, 80.0]),
]
PERIODS = [0.5, 0.0625, 0.001953125]  # dyadic: the same number in both programs
METHODS = {"hold": "zoh", "tustin": "bilinear", "forward": "euler", "backward": "backward_diff", "triangle": "foh"}
ANGLES = [0.3, 1.1, 2.5]  # rad a tick, on the unit circle; and one point outside it


def main():
    out = []
    for name, num, den in SYSTEMS:
        A, B, C, D = signal.tf2ss(num, den)
        n = A.shape[0]
        for T in PERIODS:
            for ours, theirs in METHODS.items():
                Ad, Bd, Cd, Dd, _ = signal.cont2discrete((A, B, C, D), T, method=theirs)
                points = []
                for z in [np.exp(1j * a) for a in ANGLES] + [1.5 + 0j]:
                    M = z * np.eye(n) - Ad
                    h = (Cd @ np.linalg.solve(M, Bd) + Dd)[0, 0]
                    scale = np.linalg.norm(Cd) * np.linalg.norm(np.linalg.inv(M), 2) * np.linalg.norm(Bd) + abs(Dd[0, 0])
                    u = 2.0 ** -52
                    tol = scale * n * u * (64 * np.linalg.cond(M) + np.linalg.norm(A) * T)
                    points.append(dict(z=[z.real, z.imag], h=[h.real, h.imag], tolerance=tol))
                out.append(dict(name=name, num=num[::-1], den=den[::-1], period=T, method=ours, points=points))
    print(json.dumps(out, indent=0))


main()
