#!/usr/bin/env python3
"""Reference values for the package: run  python3 generate.py > reference.json

State-space systems with random decimals; their transfer functions are evaluated at rational points s
by Gaussian elimination on (sI - A) in Python's fractions, and det(sI - A) with them: no
characteristic polynomial is formed.
"""
import json
import random
from fractions import Fraction as F

rnd = random.Random(7)


def eliminate(m, rhs):
    """det(m) and the solution x of m x = rhs."""
    n = len(m)
    m = [row[:] + [r] for row, r in zip(m, rhs)]
    det = F(1)
    for k in range(n):
        p = next(i for i in range(k, n) if m[i][k])
        if p != k:
            m[k], m[p] = m[p], m[k]
            det = -det
        det *= m[k][k]
        m[k] = [v / m[k][k] for v in m[k]]
        for i in range(n):
            if i != k and m[i][k]:
                f = m[i][k]
                m[i] = [u - f * v for u, v in zip(m[i], m[k])]
    return det, [row[n] for row in m]


def decimal(digits):
    return F(rnd.randint(-10**digits, 10**digits), 10 ** rnd.randint(0, digits))


def case(n, digits):
    a = [[decimal(digits) if rnd.random() < 0.6 else F(0) for _ in range(n)] for _ in range(n)]
    b = [decimal(digits) for _ in range(n)]
    c = [decimal(digits) for _ in range(n)]
    d = decimal(digits)
    points = []
    while len(points) < 3:
        s = F(rnd.randint(-999, 999), 10)
        try:
            det, x = eliminate([[(s if i == j else 0) - a[i][j] for j in range(n)] for i in range(n)], b)
        except StopIteration:  # s is an eigenvalue
            continue
        points.append({"s": str(s), "det": str(det), "g": str(sum(u * v for u, v in zip(c, x)) + d)})
    return {
        "a": [[str(v) for v in row] for row in a],
        "b": [[str(v)] for v in b], "c": [[str(v) for v in c]], "d": [[str(d)]],
        "points": points,
    }


sizes = [(1, 3), (2, 3), (3, 4), (4, 6), (5, 4), (8, 6), (12, 5), (20, 4)]
print(json.dumps({"systems": [case(n, k) for n, k in sizes]}, indent=1))
