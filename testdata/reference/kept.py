"""How the generators of the hardware effects keep their values.

    main(file, derive)    derive() gives a list of cases; written to file, or with --check compared with it

Every case is derived at 50 and at 80 digits; both must agree to 30, and so must all that is not a
number: which branch was taken, how many ticks. 20 digits are written. A branch that float64 might
take the other way is no use as a reference, so each generator calls clear() at each decision: the
distance from its threshold, in the units of the quantity, which must be above 1e-8 (float64 errs by
some 1e-14 on quantities near 1 in these runs).

Numbers are decimal strings, null is not applicable, parameters stand as they were written. Ints are
JSON numbers: ticks and counts.
"""
import argparse
import json
import os

from mpmath import mp, mpf

HERE = os.path.dirname(os.path.abspath(__file__))
LOW, HIGH = 50, 80
AGREE = mpf(10) ** -30
DIGITS = 20
ZERO = mpf(10) ** -40  # a value below this is written as 0: what is exactly 0 comes out near 1e-50
CLEAR = mpf(10) ** -8


def clear(distance, what, least=CLEAR):
    """A decision stands clear of its threshold, or the case is refused."""
    assert abs(distance) > least, "%s: only %s from the threshold" % (what, mp.nstr(distance, 5))


def num(text):
    """A parameter as written, "3/20" or "0.15", exact to the working precision."""
    top, _, bottom = text.partition("/")
    return mpf(top) / mpf(bottom or "1")


def close(a, b):
    return abs(a - b) <= AGREE * max(1, abs(b))


def agree(a, b, path="", close=close):
    """Every number of a is close to that of b; structure, words and whole numbers exactly."""
    if isinstance(a, dict):
        assert a.keys() == b.keys(), path
        for k in a:
            agree(a[k], b[k], path + "/" + k, close)
    elif isinstance(a, (list, tuple)):
        assert len(a) == len(b), path
        for i, (x, y) in enumerate(zip(a, b)):
            agree(x, y, path + "/%d" % i, close)
    elif isinstance(a, mpf):
        assert close(a, b), "%s: %s, %s" % (path, mp.nstr(a, 45), mp.nstr(b, 45))
    else:
        assert type(a) is type(b) and a == b, "%s: %r, %r" % (path, a, b)


def written(v):
    if isinstance(v, dict):
        return {k: written(x) for k, x in v.items()}
    if isinstance(v, (list, tuple)):
        return [written(x) for x in v]
    if isinstance(v, mpf):
        return "0.0" if abs(v) < ZERO else mp.nstr(v, DIGITS, min_fixed=-5, max_fixed=15)
    assert v is None or isinstance(v, (bool, int, str)), v
    return v


def text(cases):
    """One case a block, one key a line."""
    blocks = []
    for c in cases:
        lines = ["    %s: %s" % (json.dumps(k), json.dumps(v, ensure_ascii=False)) for k, v in c.items()]
        blocks.append("  {\n" + ",\n".join(lines) + "\n  }")
    return "[\n" + ",\n".join(blocks) + "\n]\n"


def main(file, derive):
    parser = argparse.ArgumentParser()
    parser.add_argument("--check", action="store_true", help="derive afresh and compare with the file, write nothing")
    check = parser.parse_args().check
    with mp.workdps(LOW):
        low = derive()
        with mp.workdps(HIGH):
            high = derive()
        agree(low, high, file)
        body = text(written(low))
    path = os.path.join(HERE, file)
    if check:
        with open(path, encoding="utf-8") as f:
            assert f.read() == body, "%s does not hold what its generator derives: run it" % file
        print("%s: %d cases, as stored" % (file, len(low)))
        return
    with open(path + ".new", "w", encoding="utf-8") as f:
        f.write(body)
    os.replace(path + ".new", path)
    print("%s: %d cases" % (file, len(low)))
