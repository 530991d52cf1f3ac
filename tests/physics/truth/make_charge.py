#!/usr/bin/env python3
"""Writes charge.csv: the root of 2 q + ln q = v to 60 digits (q = W(2 e^v)/2 with Lambert's W, and
Newton in ln q to polish), as a double plus the remainder that the double leaves.

Columns: v, nearest double to q, remainder; doubles as the hexadecimal of their bits.
"""
import random
import struct
from pathlib import Path

from mpmath import exp, lambertw, log, mp, mpf

mp.dps = 60


def bits(x):
    return struct.pack(">d", float(x)).hex()


def root(v):
    v = mpf(v)
    u = log(lambertw(2 * exp(v)).real / 2)
    for _ in range(3):
        u -= (2 * exp(u) + u - v) / (2 * exp(u) + 1)
    assert abs(2 * exp(u) + u - v) < mpf(10) ** -50 * (1 + abs(v))
    return exp(u)


def main():
    rng = random.Random(21)
    vs = [-300.0, 300.0, 0.0, -6.0, -5.0, 5.0, 20.0]
    vs += [rng.uniform(-300, 300) for _ in range(200)]
    vs += [rng.uniform(-12, 40) for _ in range(400)]
    vs += [-6 + rng.uniform(-1, 1) * 1e-9 for _ in range(20)]
    lines = ["v,head,remainder"]
    for v in vs:
        q = root(v)
        head = float(q)
        lines.append(f"{bits(v)},{bits(head)},{bits(q - mpf(head))}")
    Path(__file__).with_name("charge.csv").write_text("\n".join(lines) + "\n")


main()
