#!/usr/bin/env python3
"""The DC solution of the five-transistor wide-swing cascode in batched numpy: the same law with exact
slopes, the same Newton, start and stopping rule as the program's. It is batched in two shapes: over
the corners of one circuit, circuits one after the other as a search meets them, and over as many
circuits at once as numpy likes best, which a search whose next circuit depends on the last answer
cannot have. Prints solutions per second of each and the mean output current, for
tests/bench/compare.sh.
"""
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "golden"))
from charge_model import K_OVER_Q, Card, band_gap  # noqa: E402

CLIMATES = 4096
CORNERS = 16  # of one circuit: five process corners at three temperatures, in whole lanes
AT_ONCE = [256, 512, 1024, 2048, 4096]
CURRENT = 10e-6
VOUT = 0.6
MIRROR, CASCODE, BIAS = (8e-6, 1e-6), (8e-6, 0.5e-6), (1.6e-6, 1e-6)
START = [0.5, 0.8, 0.2, 0.2]  # in, bias, in_d, out_d
STEP_MOST, STEP_DONE, RESIDUAL_DONE, ITERATIONS = 0.3, 3e-7, 1e-9, 60
# Rational start of the charge equation, the program's own (src/device/charge.rs).
P = [-0.8529170339070088, 0.2295438587393786, 0.06051272831100234, 0.016590489093442955,
     0.001159632320621129, 3.915333000882756e-05, 1.2810576090792085e-07]
D = [1.0, 0.3640544955812571, 0.08137330453407109, 0.008781595176814826,
     0.00048434918852315197, 9.259851896002475e-06, 1.7912386897494514e-08]


def charge(v):
    """q and dq/dv of 2 q + ln q = v."""
    v = np.clip(v, -300.0, 300.0)
    t = np.maximum(v, -6.0)
    num, den = np.full_like(t, P[6]), np.full_like(t, D[6])
    for k in range(5, -1, -1):
        num *= t
        num += P[k]
        den *= t
        den += D[k]
    u = np.where(v < -6.0, v, num / den)
    q = np.exp(u)
    inv = 1 / (1 + 2 * q)
    a = 2 * q * inv
    x = (v - u - 2 * q) * inv
    d = x + x * x * (-0.5 * a + x * (a * (3 * a - 1) / 6 - x * a * ((15 * a - 10) * a + 1) / 24))
    q = q + q * np.expm1(d)
    return q, q / (1 + 2 * q)


class Devices:
    """One transistor at many climates."""

    def __init__(self, law, nominal, size, temperature, shift, gain):
        width, length = size
        ut = self.ut = K_OVER_Q * temperature
        r = temperature / nominal
        self.vt0 = law.threshold(length) - law.threshold_tc(length) * (temperature - nominal) + shift
        self.phi = np.maximum(law.phi(length) * r - 3 * ut * np.log(r) - band_gap(nominal) * r
                              + band_gap(temperature), 0.2)
        self.root_phi = np.sqrt(self.phi)
        self.gamma = law.gamma(length)
        self.body = law.body_gamma(length) - self.gamma
        scale = r ** law.kp_exponent(length)
        effective = length - law.length_loss(length)
        self.specific = (2 * law.kp(length) * gain * scale * ut**2
                         * (width - law.width_loss(length)) / effective)
        self.theta_ut, self.rise = law.theta(length) * ut, law.mobility_rise(length)
        self.lc = (2 * law.mobility(length) * scale * ut
                   / (law.saturation_velocity(length) * effective))
        self.clm, self.ve = law.clm_strength(length), law.clm_voltage(length)
        self.sigma, self.vx = law.dibl(length), law.dibl_voltage(length)

    def take(self, index):
        """The climates at `index` only."""
        part = object.__new__(Devices)
        for key, value in vars(self).items():
            setattr(part, key, value[index] if isinstance(value, np.ndarray) else value)
        return part

    def at(self, vg, vd, vs):
        """id, gm, gds, gms. The circuit below never turns a device round on its way."""
        swapped = vd < vs
        vd, vs = np.where(swapped, vs, vd), np.where(swapped, vd, vs)
        ut, phi, gamma, lc = self.ut, self.phi, self.gamma, self.lc
        vds = vd - vs
        arg = 1 + vds / self.vx
        root = np.sqrt(phi + np.maximum(vs, -phi / 2))
        gate = vg - self.vt0 + self.sigma * self.vx * np.log(arg) - self.body * (root - self.root_phi)
        gate_vds = self.sigma / arg
        gate_vs = np.where(vs < -phi / 2, 0.0, -0.5 * self.body / root)
        square = gate + phi + gamma * self.root_phi + gamma**2 / 4
        floor = (gamma / 2 + 1e-3) ** 2
        root = np.sqrt(np.maximum(square, floor))
        surface = root - gamma / 2
        vp = surface * surface - phi
        vp_gate = np.where(square < floor, 0.0, surface / root)
        depth2 = surface * surface + 4 * ut
        excess = gamma / 2 / np.sqrt(depth2)
        n = 1 + excess
        n_vp = -0.5 * excess / depth2
        qs, qs_v = charge((vp - vs) / ut)
        qd, qd_v = charge((vp - vd) / ut)
        i_s = qs * (qs + 1)
        b = lc + 2
        qdsat = 2 * lc * i_s / (b + np.sqrt(b * b + 4 * lc * lc * i_s))
        qdsat_qs = lc * (2 * qs + 1) / (2 * lc * qdsat + b)
        inv_qs = 1 / qs
        s, x = qdsat * inv_qs, qd * inv_qs
        gap = qd - qdsat
        r = np.sqrt(gap * gap + 2 * (1 - s) * (1 - x) * qdsat * qd)
        half = 0.5 / r
        bow_qd = 2 * (1 - s) * qdsat * (1 - 2 * x)
        bow_qdsat = 2 * (1 - x) * qd * (1 - 2 * s)
        bow_qs = 2 * qdsat * qd * inv_qs * (s * (1 - x) + x * (1 - s))
        qe = 0.5 * (qd + qdsat + r)
        qe_qd = 0.5 + 0.5 * (2 * gap + bow_qd) * half
        qe_qs = (0.5 * bow_qs * half
                 + (0.5 + 0.5 * (bow_qdsat - 2 * gap) * half) * qdsat_qs)
        total = qs + qe
        i = (qs - qe) * (total + 1)
        i_qe = -(2 * qe + 1)
        i_qs = 2 * qs + 1 + i_qe * qe_qs
        i_qd = i_qe * qe_qd
        low = 1 + total
        d1, d2 = 1 + self.theta_ut * total, low + self.rise
        inv = 1 / (d1 * d2)
        mob = low * inv
        mob_sum = inv - mob * inv * (self.theta_ut * d2 + d1)
        mob_qs, mob_qd = mob_sum * (1 + qe_qs), mob_sum * qe_qd
        vdssat = ut * (2 * (qs - qdsat) + 4)
        vdssat_qs = 2 * ut * (1 - qdsat_qs)
        x = vds / vdssat
        x4 = (x * x) ** 2
        root = np.sqrt(np.sqrt(1 + x4))
        inv = 1 / (root * (1 + x4))
        beyond = vds - vds / root
        arg = 1 + beyond / self.ve
        m = 1 + self.clm * np.log(arg)
        m_beyond = self.clm / self.ve / arg
        m_vds, m_qs = m_beyond * (1 - inv), -m_beyond * x4 * x * inv * vdssat_qs
        scale = self.specific * n * m
        im = i * mob
        current = scale * im
        id_qs = scale * (i_qs * mob + i * mob_qs) + self.specific * n * im * m_qs
        id_qd = scale * (i_qd * mob + i * mob_qd)
        id_vds = self.specific * n * im * m_vds
        qs_vp, qd_vp = qs_v / ut, qd_v / ut
        gm = (id_qs * qs_vp + id_qd * qd_vp + self.specific * m * im * n_vp) * vp_gate
        along = id_vds + gm * gate_vds
        gds = along - id_qd * qd_vp
        gms = along + id_qs * qs_vp - gm * gate_vs
        return (np.where(swapped, -current, current), np.where(swapped, -gm, gm),
                np.where(swapped, gms, gds), np.where(swapped, gds, gms))


def solve(devices, current):
    """Newton at every climate; a climate that has converged leaves the batch."""
    count = len(current)
    answer, output = np.empty((count, 4)), np.empty(count)
    live = np.arange(count)
    v = np.tile(np.array(START), (count, 1))
    step = np.full(count, np.inf)
    for _ in range(ITERATIONS):
        mirror, cascode, bias = devices
        line, gate, x, y = v.T
        zero, vout = np.zeros_like(line), np.full_like(line, VOUT)
        i1, gm1, gds1, _ = mirror.at(line, x, zero)
        i2, gm2, gds2, _ = mirror.at(line, y, zero)
        i3, gm3, gds3, gms3 = cascode.at(gate, line, x)
        i4, gm4, gds4, gms4 = cascode.at(gate, vout, y)
        i5, gm5, gds5, _ = bias.at(gate, gate, zero)
        f = np.stack([i3 - current, i5 - current, i1 - i3, i2 - i4], axis=1)
        size = np.stack([abs(i3) + current, abs(i5) + current, abs(i1) + abs(i3),
                         abs(i2) + abs(i4)], axis=1)
        done = (step < STEP_DONE) & (np.max(abs(f) / size, axis=1) < RESIDUAL_DONE)
        if done.any():
            answer[live[done]], output[live[done]] = v[done], i4[done]
            keep = ~done
            live, v, f, step = live[keep], v[keep], f[keep], step[keep]
            if not len(live):
                return answer, output
            devices = [d.take(keep) for d in devices]
            current = current[keep]
            gm1, gds1, gm2, gds2, gm3, gds3, gms3, gm4, gms4, gm5, gds5 = (
                g[keep] for g in (gm1, gds1, gm2, gds2, gm3, gds3, gms3, gm4, gms4, gm5, gds5))
        j = np.zeros((len(live), 4, 4))
        j[:, 0, 0], j[:, 0, 1], j[:, 0, 2] = gds3, gm3, -gms3
        j[:, 1, 1] = gm5 + gds5
        j[:, 2, 0], j[:, 2, 1], j[:, 2, 2] = gm1 - gds3, -gm3, gds1 + gms3
        j[:, 3, 0], j[:, 3, 1], j[:, 3, 3] = gm2, -gm4, gds2 + gms4
        dx = np.clip(np.linalg.solve(j, f[:, :, None])[:, :, 0], -STEP_MOST, STEP_MOST)
        v -= dx
        step = np.max(abs(dx), axis=1)
    raise RuntimeError(f"{len(live)} climates do not converge")


def main():
    card = Card("generic-180")
    k = np.arange(CLIMATES)
    temperature = 233.15 + 165.0 * k / (CLIMATES - 1)
    names = ["TT", "SS", "FF", "SF", "FS"]
    shift = np.array([card.corners[names[i % 5]]["n"][0] for i in k])
    gain = np.array([card.corners[names[i % 5]]["n"][1] for i in k])
    current = CURRENT * (0.8 + 0.4 * ((k * 7919) % CLIMATES) / CLIMATES)
    devices = [Devices(card.n, card.nominal, size, temperature, shift, gain)
               for size in (MIRROR, CASCODE, BIAS)]

    def batches(size):
        parts = [slice(first, first + size) for first in range(0, CLIMATES, size)]
        return [([d.take(part) for d in devices], current[part]) for part in parts]

    def rate(size):
        """Solutions per second in batches of `size`."""
        work = batches(size)
        solved, start = 0, time.perf_counter()
        while time.perf_counter() - start < 2.0:
            for devices, current in work:
                solve(devices, current)
                solved += size
                if time.perf_counter() - start > 4.0:
                    break
        return solved / (time.perf_counter() - start)

    _, output = solve(devices, current)
    print(f"mean_output_current {np.mean(output):.17g}")
    print(f"solutions_per_second {rate(CORNERS):.0f} {CORNERS}")
    for size in AT_ONCE:
        print(f"solutions_per_second {rate(size):.0f} {size}")


if __name__ == "__main__":
    main()
