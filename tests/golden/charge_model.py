"""The charge-based law and the card reader, written from the equations in the header of
src/device/charge.rs and from the card files alone: an implementation of its own, with Lambert's W for
the charge equation and the platform's functions.

Sources as there: Enz, Krummenacher, Vittoz, Analog Integr. Circuits Signal Process. 8, 1995;
Bucher et al., EPFL-EKV v2.6 report, 1997; Enz, Chicco, Pezzotta, IEEE Solid-State Circuits Mag. 9,
2017; Fritsch & Carlson, SIAM J. Numer. Anal. 17, 1980 (curves).
"""
import math
import re
from pathlib import Path

import yaml
from scipy.special import wrightomega

K_OVER_Q = 1.380649e-23 / 1.602176634e-19
CARDS = Path(__file__).resolve().parents[2] / "specs" / "cards"

# ---------------------------------------------------------------- cards

SCALES = {
    "V": 1.0, "mV": 1e-3, "um": 1e-6, "nm": 1e-9, "m": 1.0, "mV/K": 1e-3, "V/K": 1.0,
    "sqrt(V)": 1.0, "uA/V^2": 1e-6, "1/V": 1.0, "m/s": 1.0, "cm2/Vs": 1e-4, "mV/V": 1e-3,
    "V/V": 1.0, "Ohm/sq": 1.0, "ppm/K": 1e-6, "ppm/K^2": 1e-6, "sq": 1.0, "": 1.0, "%": 1e-2,
}


def quantity(text):
    """A number with its unit, in SI units; degrees Celsius become kelvin."""
    if isinstance(text, (int, float)):
        return float(text)
    number, unit = re.fullmatch(r"\s*([-+0-9.eE]+)\s*(.*?)\s*", text).groups()
    if unit == "degC":
        return float(number) + 273.15
    return float(number) * SCALES[unit]


def span(text):
    low, high = text.split(" to ")
    if not re.search(r"[A-Za-z]", low):
        low += " " + high.split(" ", 1)[1]
    return quantity(low), quantity(high)


class Curve:
    """A parameter over drawn length: monotone cubic in ln L, ends held."""

    def __init__(self, lengths, values):
        self.x = [math.log(l) for l in lengths]
        self.y = values
        n = len(values)
        if n == 1:
            return
        h = [self.x[i + 1] - self.x[i] for i in range(n - 1)]
        d = [(self.y[i + 1] - self.y[i]) / h[i] for i in range(n - 1)]
        slope = [d[0]]
        for i in range(1, n - 1):
            if d[i - 1] * d[i] <= 0:
                slope.append(0.0)
                continue
            # Slope of the parabola through three points, at most three times either secant.
            m = (h[i] * d[i - 1] + h[i - 1] * d[i]) / (h[i - 1] + h[i])
            slope.append(math.copysign(min(abs(m), 3 * abs(d[i - 1]), 3 * abs(d[i])), m))
        slope.append(d[-1])
        self.h, self.slope = h, slope

    def __call__(self, length):
        x = math.log(length)
        if len(self.y) == 1 or x <= self.x[0]:
            return self.y[0]
        if x >= self.x[-1]:
            return self.y[-1]
        i = max(k for k in range(len(self.x)) if self.x[k] <= x)
        t = (x - self.x[i]) / self.h[i]
        # Hermite's basis.
        h00, h10 = 2 * t**3 - 3 * t**2 + 1, t**3 - 2 * t**2 + t
        h01, h11 = -2 * t**3 + 3 * t**2, t**3 - t**2
        return (h00 * self.y[i] + h10 * self.h[i] * self.slope[i]
                + h01 * self.y[i + 1] + h11 * self.h[i] * self.slope[i + 1])


class Law:
    """Parameters of one transistor type, as curves over length."""

    ABSENT = {"theta": 0.0, "mobility_rise": 0.0, "saturation_velocity": math.inf,
              "mobility": 0.04, "clm_strength": 0.0, "clm_voltage": 1.0, "dibl": 0.0,
              "dibl_voltage": 1.0, "impact_strength": 0.0, "impact_voltage": 1.0,
              "width_loss": 0.0, "length_loss": 0.0}

    def __init__(self, block):
        parameters = dict(block["parameters"])
        lengths = [quantity(l) for l in parameters.pop("lengths", ["1 um"])]
        for name, default in self.ABSENT.items():
            setattr(self, name, Curve([1e-6], [default]))
        for name, entry in parameters.items():
            value = entry["value"]
            if isinstance(value, list):
                curve = Curve(lengths, [quantity(v) for v in value])
            else:
                curve = Curve([1e-6], [quantity(value)])
            setattr(self, name, curve)
        if "body_gamma" not in parameters:
            self.body_gamma = self.gamma
        self.length_range = span(block["length"]["value"])
        self.width_range = span(block["width"]["value"])


class Card:
    def __init__(self, name):
        self.name = name
        raw = yaml.safe_load((CARDS / f"{name}.yaml").read_text())
        self.nominal = quantity(raw["temperature"]["value"])
        self.supply_max = quantity(raw["supply_max"]["value"])
        self.n, self.p = Law(raw["nmos"]), Law(raw["pmos"])
        r = raw["resistor"]
        self.tc1, self.tc2 = quantity(r["tc1"]["value"]), quantity(r["tc2"]["value"])
        self.corners = {}
        for c in raw["corners"]:
            get = lambda key: quantity(c.get(key, 0))
            self.corners[c["name"]] = {
                "n": (get("nmos_threshold"), 1 + get("nmos_gain")),
                "p": (get("pmos_threshold"), 1 + get("pmos_gain")),
                "resistor": 1 + get("resistor"),
            }


# ---------------------------------------------------------------- the law

def band_gap(t):
    return 1.16 - 7.02e-4 * t * t / (t + 1108.0)


def charge(v):
    """2 q + ln q = v: q = omega(v + ln 2)/2 with Wright's omega."""
    if v > 300.0:  # beyond, the charge goes on along its tangent
        top = charge(300.0)
        return top + (v - 300.0) * top / (1 + 2 * top)
    return float(wrightomega(max(v, -300.0) + math.log(2.0))) / 2.0


class Device:
    """A transistor of given drawn size at a temperature and a corner's shift and gain."""

    def __init__(self, law, nominal, width, length, temperature, shift=0.0, gain=1.0):
        at = lambda curve: curve(length)
        self.ut = ut = K_OVER_Q * temperature
        r = temperature / nominal
        self.vt0 = at(law.threshold) - at(law.threshold_tc) * (temperature - nominal) + shift
        phi = (at(law.phi) * r - 3 * ut * math.log(r) - band_gap(nominal) * r
               + band_gap(temperature))
        self.phi = max(phi, 0.2)
        self.gamma, self.gamma_b = at(law.gamma), at(law.body_gamma)
        scale = r ** at(law.kp_exponent)
        effective = length - at(law.length_loss)
        self.beta = at(law.kp) * gain * scale * (width - at(law.width_loss)) / effective
        self.theta, self.rise = at(law.theta), at(law.mobility_rise)
        self.lc = 2 * at(law.mobility) * scale * ut / (at(law.saturation_velocity) * effective)
        self.clm, self.ve = at(law.clm_strength), at(law.clm_voltage)
        self.sigma, self.vx = at(law.dibl), at(law.dibl_voltage)
        self.ai, self.bi = at(law.impact_strength), at(law.impact_voltage)

    def currents(self, vg, vd, vs):
        """Channel current and impact current, n-channel, voltages to the bulk."""
        if vd < vs:
            return -self.forward(vg, vs, vd)[0], 0.0
        return self.forward(vg, vd, vs)

    def forward(self, vg, vd, vs):
        ut, phi, gamma = self.ut, self.phi, self.gamma
        vds = vd - vs
        # 1. threshold; the body term is held below VS = -phi/2
        vt = (self.vt0 - self.sigma * self.vx * math.log1p(vds / self.vx)
              + (self.gamma_b - gamma) * (math.sqrt(phi + max(vs, -phi / 2)) - math.sqrt(phi)))
        # 2. pinch-off, held 1 mV of surface root above its end at -phi
        vgp = vg - vt + phi + gamma * math.sqrt(phi)
        root = math.sqrt(max(vgp + gamma**2 / 4, (gamma / 2 + 1e-3) ** 2))
        vp = (root - gamma / 2) ** 2 - phi
        # 3. slope factor
        n = 1 + gamma / (2 * math.sqrt(phi + vp + 4 * ut))
        # 4. charges
        qs, qd = charge((vp - vs) / ut), charge((vp - vd) / ut)
        # 5. velocity saturation; the corner is rounded so that qe = qs at qd = qs, qdsat at 0
        qsat, qe = 0.0, qd
        if self.lc > 0:
            i = qs * qs + qs
            b = 2 + self.lc
            qsat = 2 * self.lc * i / (b + math.sqrt(b * b + 4 * self.lc**2 * i))
            bow = 4 * 0.5 * (1 - qsat / qs) * (1 - qd / qs) * qsat * qd
            qe = 0.5 * (qd + qsat + math.sqrt((qd - qsat) ** 2 + bow))
        # 6. to 8.
        i = (qs - qe) * (qs + qe + 1)
        total = qs + qe
        mobility = 1 / ((1 + self.theta * ut * total) * (1 + self.rise / (1 + total)))
        vdssat = ut * (2 * (qs - qsat) + 4)
        beyond = vds - vds / (1 + (vds / vdssat) ** 4) ** 0.25
        m = 1 + self.clm * math.log1p(beyond / self.ve)
        current = 2 * n * self.beta * ut * ut * i * mobility * m
        # 9. impact ionisation
        impact = 0.0
        if self.ai > 0 and beyond > 0:
            impact = current * self.ai * beyond * math.exp(max(-self.bi / beyond, -700.0))
        return current, impact
