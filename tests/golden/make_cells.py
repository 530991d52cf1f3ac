#!/usr/bin/env python3
"""Writes the golden tables beside this script: mirrors solved in Python (charge_model.py for the
devices, MINPACK's hybrid method through scipy for the equations), to be compared with the
program's own solutions; and single devices with every correction on.

Run again whenever the values of a card they use change:  python3 tests/golden/make_cells.py
"""
import math
import random
from pathlib import Path

from scipy.optimize import fsolve

from charge_model import Card, Curve, Device, Law

HERE = Path(__file__).resolve().parent
CASES = {"generic-180": 320, "generic-65": 190}  # per cell and rail


class Mirror:
    """One random mirror, seen from its rail: every voltage positive, every device n-channel."""

    def __init__(self, rng, card, rail):
        log = lambda low, high: math.exp(rng.uniform(math.log(low), math.log(high)))
        kind = "n" if rail == "sink" else "p"
        self.card, self.rail = card, rail
        law = card.n if rail == "sink" else card.p
        self.corner = rng.choice(sorted(card.corners))
        self.temperature = round(rng.uniform(233.15, 398.15), 2)
        self.supply = round(rng.uniform(0.75, 1.0) * card.supply_max, 3)
        self.vout = round(rng.uniform(0.0, self.supply), 3)
        self.units_in, self.units_out = rng.randint(1, 8), rng.randint(1, 8)
        size = lambda: (round(log(law.width_range[0], law.width_range[1] / 2), 9),
                        round(log(law.length_range[0], law.length_range[1] / 2), 9))
        self.mirror, self.cascode = size(), size()
        # A weak diode of its own size.
        w, l = self.mirror
        self.bias = (max(round(w / rng.uniform(2, 8), 9), law.width_range[0]), l)
        # Inversion from weak to strong; UT^2 KP W/L is the order of the specific current.
        specific = 2.6 * law.kp(l) * (w / l) * 0.02585**2
        unit = specific * log(0.01, 60)
        self.current = float(f"{unit * self.units_in:.6g}")
        self.bias_current = float(f"{unit * rng.uniform(0.3, 1.5):.6g}")
        self.ohms = float(f"{rng.uniform(0.03, 0.5) / unit:.6g}")
        shift, gain = card.corners[self.corner][kind]
        self.make = lambda s: Device(law, card.nominal, s[0], s[1], self.temperature, shift, gain)
        dt = self.temperature - card.nominal
        self.factor = card.corners[self.corner]["resistor"] * (1 + card.tc1 * dt + card.tc2 * dt**2)


# For each cell: the unknown nodes, starting values, and the current that each node is left with, in
# units of the input current. `i(device, vd, vg, vs)` is the whole drain current; the bulk is the rail.

def current(device, vd, vg, vs):
    channel, impact = device.currents(vg, vd, vs)
    return channel + impact


def simple(c):
    m = c.make(c.mirror)

    def balance(v):
        return [c.units_in * current(m, v[0], v[0], 0) / c.current - 1]

    return ["in"], [0.5], balance, lambda v: c.units_out * current(m, c.vout, v[0], 0)


def degenerated(c):
    m = c.make(c.mirror)
    r = c.ohms * c.factor

    def balance(v):
        line, s, t = v
        a = c.units_in * current(m, line, line, s)
        b = c.units_out * current(m, c.vout, line, t)
        return [a / c.current - 1,
                (c.units_in * s / r - a) / c.current,
                (c.units_out * t / r - b) / c.current]

    return (["in", "in_s", "out_s"], [0.6, 0.1, 0.1], balance,
            lambda v: c.units_out * v[2] / r)


def stacked(c, m, k, line, gate, y):
    """What the output leg leaves at its middle node."""
    low = c.units_out * current(m, y, line, 0)
    high = c.units_out * current(k, c.vout, gate, y)
    return (low - high) / c.current


def cascode(c):
    m, k = c.make(c.mirror), c.make(c.cascode)

    def balance(v):
        gate, line, y = v
        high = c.units_in * current(k, gate, gate, line)
        low = c.units_in * current(m, line, line, 0)
        return [high / c.current - 1, (low - high) / c.current, stacked(c, m, k, line, gate, y)]

    return (["in", "in_g", "out_d"], [1.0, 0.5, 0.4], balance,
            lambda v: c.units_out * current(m, v[2], v[1], 0))


def wide_swing(c):
    m, k, b = c.make(c.mirror), c.make(c.cascode), c.make(c.bias)

    def balance(v):
        line, gate, x, y = v
        high = c.units_in * current(k, line, gate, x)
        low = c.units_in * current(m, x, line, 0)
        return [high / c.current - 1,
                current(b, gate, gate, 0) / c.bias_current - 1,
                (low - high) / c.current,
                stacked(c, m, k, line, gate, y)]

    return (["in", "bias", "in_d", "out_d"], [0.5, 0.8, 0.2, 0.2], balance,
            lambda v: c.units_out * current(m, v[3], v[0], 0))


def self_biased(c):
    m, k = c.make(c.mirror), c.make(c.cascode)
    # One body carries the whole input current.
    r = c.ohms / c.units_in * c.factor

    def balance(v):
        gate, line, x, y = v
        through = (gate - line) / r
        high = c.units_in * current(k, line, gate, x)
        low = c.units_in * current(m, x, line, 0)
        return [through / c.current - 1,
                (high - through) / c.current,
                (low - high) / c.current,
                stacked(c, m, k, line, gate, y)]

    return (["in", "in_g", "in_d", "out_d"], [0.8, 0.5, 0.2, 0.2], balance,
            lambda v: c.units_out * current(m, v[3], v[1], 0))


CELLS = [simple, degenerated, cascode, wide_swing, self_biased]


def solve(case, cell, rng):
    """Node voltages from the rail, or None where no solution between the rails is found."""
    names, start, balance, output = cell(case)
    for attempt in range(6):
        guess = [v + (rng.uniform(-0.3, 0.3) if attempt else 0.0) for v in start]
        try:
            v, info, status, _ = fsolve(balance, guess, xtol=1e-14, full_output=True, maxfev=2000)
        except (ValueError, OverflowError, ZeroDivisionError):
            continue
        if max(abs(r) for r in balance(v)) > 1e-11:
            continue
        if all(-1e-9 <= x <= case.supply for x in v):
            return names, [float(x) for x in v], output(v)
    return None


def make_cell(cell):
    rng = random.Random(cell.__name__)
    lines, names = [], None
    for name, count in CASES.items():
        card = Card(name)
        for rail in ("sink", "source"):
            made = 0
            while made < count:
                case = Mirror(rng, card, rail)
                found = solve(case, cell, rng)
                if found is None:
                    continue
                names, v, amps = found
                if rail == "source":
                    v = [case.supply - x for x in v]
                given = [name, rail, case.corner, case.temperature, case.supply, case.vout,
                         case.current, case.bias_current, *case.mirror, *case.cascode, *case.bias,
                         case.ohms, case.units_in, case.units_out]
                lines.append(",".join([*map(str, given), *(f"{x:.17g}" for x in [amps, *v])]))
                made += 1
    head = ["card", "rail", "corner", "kelvin", "supply", "vout", "current", "bias_current",
            "width", "length", "cascode_width", "cascode_length", "bias_width", "bias_length",
            "ohms", "units_in", "units_out", "amps", *names]
    text = "\n".join([",".join(head), *lines]) + "\n"
    (HERE / f"{cell.__name__}.csv").write_text(text)
    print(f"{cell.__name__}: {len(lines)} cases")


RANGES = {
    "threshold": (0.2, 0.9), "threshold_tc": (2e-4, 2e-3), "gamma": (0.2, 0.9),
    "body_gamma": (0.1, 0.9), "phi": (0.6, 1.0), "kp": (3e-5, 6e-4), "kp_exponent": (-2, -0.2),
    "theta": (0.0, 0.6), "mobility_rise": (0.0, 0.9), "saturation_velocity": (5e4, 2e5),
    "mobility": (0.005, 0.05), "clm_strength": (0.0, 0.2), "clm_voltage": (0.1, 3.0),
    "dibl": (0.0, 0.08), "dibl_voltage": (0.1, 2.0), "impact_strength": (0.1, 10.0),
    "impact_voltage": (2.0, 12.0),
}


def make_devices(count=1200):
    """Single devices with random parameters, every correction on."""
    rng = random.Random("devices")
    lines = []
    while len(lines) < count:
        values = {k: float(f"{rng.uniform(a, b):.6g}") for k, (a, b) in RANGES.items()}
        law = Law.__new__(Law)
        for key, value in {**Law.ABSENT, **values}.items():
            setattr(law, key, Curve([1e-6], [value]))
        kelvin, shift = round(rng.uniform(233.15, 398.15), 2), round(rng.uniform(-0.05, 0.05), 4)
        gain = round(rng.uniform(0.8, 1.25), 4)
        vg, vd, vs = (round(x, 4) for x in
                      (rng.uniform(-0.1, 3), rng.uniform(-0.15, 3.3), rng.uniform(-0.15, 1.5)))
        device = Device(law, 300.15, 5e-6, 0.5e-6, kelvin, shift, gain)
        channel, impact = device.currents(vg, vd, vs)
        # Near VDS = 0 the difference of two charges loses digits in either program.
        if abs(channel) < 1e-15 or abs(vd - vs) < 1e-3:
            continue
        given = [*values.values(), kelvin, shift, gain, vg, vd, vs]
        lines.append(",".join([*map(str, given), f"{channel:.17g}", f"{impact:.17g}"]))
    head = ",".join([*RANGES, "kelvin", "shift", "gain", "vg", "vd", "vs", "channel", "impact"])
    (HERE / "devices.csv").write_text("\n".join([head, *lines]) + "\n")
    print(f"devices: {len(lines)} cases")


if __name__ == "__main__":
    make_devices()
    for cell in CELLS:
        make_cell(cell)
