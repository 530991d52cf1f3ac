#!/usr/bin/env python3
"""Writes exp_ln.csv: exponential and logarithm to 60 digits (mpmath), each as a double plus the
remainder that the double leaves, so that an error can be measured in fractions of its last place.

Arguments: over the whole range, around the reduction's borders, near 0 and near 1.
Columns: function, argument, nearest double, remainder; doubles as the hexadecimal of their bits.
"""
import random
import struct
from pathlib import Path

from mpmath import mp, mpf

mp.dps = 60


def bits(x):
    return struct.pack(">d", float(x)).hex()


def row(name, f, x):
    exact = f(mpf(x))
    head = float(exact)
    return f"{name},{bits(x)},{bits(head)},{bits(exact - mpf(head))}"


def main():
    rng = random.Random(20)
    ln2 = float(mp.log(2))
    exps = [0.0, 1.0, -1.0, 0.5, -700.0, 700.0, 1e-300, -1e-300, 1e-17, -1e-17]
    exps += [rng.uniform(-700, 700) for _ in range(200)]
    exps += [rng.uniform(-2, 2) for _ in range(100)]
    exps += [(k + 0.5) * ln2 * (1 + rng.uniform(-1, 1) * 1e-12) for k in range(-40, 40)]
    exps += [rng.choice((-1, 1)) * 10 ** rng.uniform(-18, -1) for _ in range(60)]
    lns = [1.0, 2.0, 0.5, 2.2250738585072014e-308, 1.7976931348623157e308]
    lns += [10 ** rng.uniform(-307, 308) for _ in range(200)]
    lns += [rng.uniform(0.4, 2.6) for _ in range(100)]
    lns += [2 ** 0.5 * 2.0 ** k * (1 + rng.uniform(-1, 1) * 1e-12) for k in range(-40, 40)]
    lns += [1 + rng.choice((-1, 1)) * 10 ** rng.uniform(-15, -1) for _ in range(60)]
    lines = ["function,argument,head,remainder"]
    lines += [row("exp", mp.exp, x) for x in exps]
    lines += [row("ln", mp.log, x) for x in lns]
    Path(__file__).with_name("exp_ln.csv").write_text("\n".join(lines) + "\n")


main()
