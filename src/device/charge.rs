//! The charge-based all-region law.
//!
//! Enz, Krummenacher, Vittoz, *Analog Integr. Circuits Signal Process.* 8, 1995; Enz & Vittoz,
//! *Charge-Based MOS Transistor Modeling*, Wiley 2006; Bucher et al., EPFL-EKV v2.6 report, 1997.
//! One expression from weak to strong inversion and from triode to saturation, with corrections
//! that a card switches off by its values. Every slope is exact.
//!
//! In order, with all voltages referred to the bulk (UT = kT/q):
//!
//! 1. threshold: VT = VT0 - sigma Vx ln(1 + VDS/Vx) + (gamma_b - gamma)(sqrt(phi + VS) - sqrt(phi))
//! 2. VG' = VG - VT + phi + gamma sqrt(phi); VP = VG' - phi - gamma (sqrt(VG' + gamma^2/4) - gamma/2)
//! 3. n = 1 + gamma / (2 sqrt(phi + VP + 4 UT))
//! 4. 2 q + ln q = (VP - V)/UT at source (qs) and drain (qd)
//! 5. velocity saturation: the drain charge cannot fall below qdsat, where
//!    qs^2 + qs - qdsat^2 - qdsat = 2 qdsat / lc with lc = 2 mu UT / (vsat L)
//!    (Enz, Chicco, Pezzotta, *IEEE Solid-State Circuits Mag.* 9, 2017). The corner is rounded:
//!    qe = (qd + qdsat + sqrt((qd - qdsat)^2 + 2 (1 - qdsat/qs)(1 - qd/qs) qdsat qd))/2 takes the
//!    place of qd from here on
//! 6. i = qs^2 + qs - qe^2 - qe; ID = 2 n KP (W/L) UT^2 i, times the factors of 7 and 8
//! 7. vertical field 1/(1 + theta UT (qs + qe)) and low charge 1/(1 + rise/(1 + qs + qe)); the
//!    current rises with VDS everywhere as long as rise is at most 1
//! 8. channel-length modulation 1 + A ln(1 + (VDS - VDSeff)/VE) with
//!    VDSeff = VDS/(1 + (VDS/VDSsat)^4)^(1/4)
//! 9. impact ionisation, drain to bulk: ID Ai (VDS - VDSeff) exp(-Bi/(VDS - VDSeff))

use super::constants::{band_gap, thermal_voltage};
use super::{Conditions, Point, Transistor};
use crate::numeric::lanes::{Lanes, WIDTH};
use crate::process::ChargeLaw;

/// Largest normalised voltage at which the charge equation is solved; above it the charge goes on
/// along its tangent. 300 UT is over 6 V of pinch-off at -40 degC, beyond any card's limits.
const V_MOST: f64 = 300.0;
/// Smallest: exp(-300) is nothing in any circuit, and its square is still a normal number.
const V_LEAST: f64 = -300.0;
/// Sharpness of the corner between triode and velocity-saturated current: 0 is a sharp corner;
/// up to 1 keeps the current rising with VDS everywhere.
const CORNER: f64 = 0.5;

/// The law at one geometry, one parameter set per lane.
#[derive(Debug, Clone, Copy)]
pub struct Charge {
    vt0: Lanes,
    gamma: Lanes,
    quarter_gamma2: Lanes,
    phi: Lanes,
    body: Lanes,
    sqrt_phi: Lanes,
    /// 2 KP (W/L) UT^2: the slope factor n joins at the bias point.
    specific: Lanes,
    ut: Lanes,
    inv_ut: Lanes,
    theta_ut: Lanes,
    rise: Lanes,
    lc: Lanes,
    clm: Lanes,
    inv_ve: Lanes,
    dibl_vx: Lanes,
    dibl: Lanes,
    inv_vx: Lanes,
    impact: Lanes,
    impact_voltage: Lanes,
    /// Corrections that are there at all, the same in every lane.
    has: Has,
}

#[derive(Debug, Clone, Copy, Default)]
struct Has {
    body: bool,
    dibl: bool,
    velocity: bool,
    clm: bool,
    impact: bool,
}

/// Slope factor n at pinch-off voltage 0 and the card's temperature.
pub fn slope_factor(law: &ChargeLaw, nominal: f64, length: f64) -> f64 {
    let ut = thermal_voltage(nominal);
    1.0 + law.gamma.at(length) / (2.0 * (law.phi.at(length) + 4.0 * ut).sqrt())
}

impl Charge {
    /// Parameters at a drawn geometry (m) in eight lanes of conditions.
    pub fn new(
        law: &ChargeLaw,
        nominal: f64,
        width: f64,
        length: f64,
        lanes: &[Conditions; WIDTH],
    ) -> Charge {
        let t = Lanes::from_fn(|i| lanes[i].temperature);
        let ratio = t / nominal;
        let ln_ratio = ratio.ln();
        let ut = Lanes::from_fn(|i| thermal_voltage(lanes[i].temperature));
        let (threshold, threshold_tc) = (law.threshold.at(length), law.threshold_tc.at(length));
        let vt0 = Lanes::from_fn(|i| {
            threshold - threshold_tc * (lanes[i].temperature - nominal) + lanes[i].threshold_shift
        });
        // phi(T) = phi T/T0 - 3 UT ln(T/T0) - Eg(T0) T/T0 + Eg(T)  (EPFL-EKV v2.6 report).
        let phi_nominal = law.phi.at(length);
        let phi = Lanes::from_fn(|i| {
            let r = ratio.0[i];
            phi_nominal * r - 3.0 * ut.0[i] * ln_ratio.0[i] - band_gap(nominal) * r
                + band_gap(lanes[i].temperature)
        })
        .max(Lanes::splat(0.2));
        let gain = Lanes::from_fn(|i| lanes[i].gain);
        let scale = (ln_ratio * law.kp_exponent.at(length)).exp();
        let aspect = (width - law.width_loss) / (length - law.length_loss);
        let gamma = law.gamma.at(length);
        let body = law.body_gamma.at(length) - gamma;
        // Mobility falls with temperature as KP does; the saturation velocity is taken constant.
        let lc = if law.saturation_velocity.at(length).is_finite() {
            2.0 * law.mobility.at(length) * scale * ut
                / (law.saturation_velocity.at(length) * (length - law.length_loss))
        } else {
            Lanes::ZERO
        };
        let dibl = law.dibl.at(length);
        let vx = law.dibl_voltage.at(length);
        let clm = law.clm_strength.at(length);
        let impact = law.impact_strength.at(length);
        Charge {
            vt0,
            gamma: Lanes::splat(gamma),
            quarter_gamma2: Lanes::splat(gamma * gamma / 4.0),
            phi,
            body: Lanes::splat(body),
            sqrt_phi: phi.sqrt(),
            specific: 2.0 * law.kp.at(length) * aspect * gain * scale * ut * ut,
            ut,
            inv_ut: 1.0 / ut,
            theta_ut: law.theta.at(length) * ut,
            rise: Lanes::splat(law.mobility_rise.at(length)),
            lc,
            clm: Lanes::splat(clm),
            inv_ve: Lanes::splat(1.0 / law.clm_voltage.at(length)),
            dibl_vx: Lanes::splat(dibl * vx),
            dibl: Lanes::splat(dibl),
            inv_vx: Lanes::splat(1.0 / vx),
            impact: Lanes::splat(impact),
            impact_voltage: Lanes::splat(law.impact_voltage.at(length)),
            has: Has {
                body: body != 0.0,
                dibl: dibl != 0.0,
                velocity: lc.largest() > 0.0,
                clm: clm != 0.0,
                impact: impact != 0.0,
            },
        }
    }
}

/// Solves 2 q + ln q = v for the normalised charge. Returns q and dq/dv = q/(1 + 2q).
///
/// In u = ln q the equation is 2 e^u + u = v. A rational start (Remez-like fit, |error| < 4e-4
/// for v from -6 to 300; below, u = v) is followed by one step of the inverse series of
/// a (e^d - 1 - d) + d = x with a = 2q/(1 + 2q), x = residual/(1 + 2q), whose first omitted term
/// is below 1e-17. One exponential in all.
#[inline(always)]
fn charge(v: Lanes) -> (Lanes, Lanes) {
    const P: [f64; 7] = [
        -0.8529170339070088,
        0.2295438587393786,
        0.06051272831100234,
        0.016590489093442955,
        0.001159632320621129,
        3.915333000882756e-05,
        1.2810576090792085e-07,
    ];
    const D: [f64; 7] = [
        1.0,
        0.3640544955812571,
        0.08137330453407109,
        0.008781595176814826,
        0.00048434918852315197,
        9.259851896002475e-06,
        1.7912386897494514e-08,
    ];
    let top = Lanes::splat(V_MOST);
    let v0 = v.max(Lanes::splat(V_LEAST)).min(top);
    let t = v0.max(Lanes::splat(-6.0));
    let t2 = t * t;
    let t4 = t2 * t2;
    let num = (P[0] + P[1] * t) + t2 * (P[2] + P[3] * t) + t4 * ((P[4] + P[5] * t) + t2 * P[6]);
    let den = (D[0] + D[1] * t) + t2 * (D[2] + D[3] * t) + t4 * ((D[4] + D[5] * t) + t2 * D[6]);
    let start = Lanes::select(v0.lt(Lanes::splat(-6.0)), v0, num / den);
    let q = start.exp();
    let inv = 1.0 / (1.0 + 2.0 * q);
    let a = 2.0 * q * inv;
    let x = (v0 - start - 2.0 * q) * inv;
    // d = x - a/2 x^2 + (3a^2 - a)/6 x^3 - (15a^3 - 10a^2 + a)/24 x^4 + ...
    let c2 = -0.5 * a;
    let c3 = a * (3.0 * a - 1.0) * (1.0 / 6.0);
    let c4 = -(a * ((15.0 * a - 10.0) * a + 1.0)) * (1.0 / 24.0);
    let d = x + x * x * (c2 + x * (c3 + x * c4));
    // e^d to fifth order: |d| < 6e-3.
    let growth = d * (1.0 + d * (0.5 + d * (1.0 / 6.0 + d * (1.0 / 24.0 + d * (1.0 / 120.0)))));
    let q = q + q * growth;
    let slope = q / (1.0 + 2.0 * q);
    (q + (v.max(top) - top) * slope, slope)
}

/// q, for tests and closed forms, one number.
pub fn charge_of(v: f64) -> f64 {
    charge(Lanes::splat(v)).0.0[0]
}

impl Transistor for Charge {
    #[inline(always)]
    fn at(&self, vg: Lanes, vd: Lanes, vs: Lanes) -> Point {
        // A device is symmetric: with VD below VS the two exchange roles.
        let swapped = vd.lt(vs);
        let high = Lanes::select(swapped, vs, vd);
        let low = Lanes::select(swapped, vd, vs);
        let p = self.forward(vg, high, low);
        if !swapped.any() {
            return p;
        }
        Point {
            id: Lanes::select(swapped, -p.id, p.id),
            gm: Lanes::select(swapped, -p.gm, p.gm),
            gms: Lanes::select(swapped, p.gds, p.gms),
            gds: Lanes::select(swapped, p.gms, p.gds),
            // Impact current needs VDS beyond saturation; it has no reversed twin.
            ib: Lanes::select(swapped, Lanes::ZERO, p.ib),
            ib_slopes: p.ib_slopes.map(|s| Lanes::select(swapped, Lanes::ZERO, s)),
            vdssat: p.vdssat,
        }
    }

    fn widened(&self, factor: f64) -> Charge {
        Charge {
            specific: self.specific * factor,
            ..*self
        }
    }
}

impl Charge {
    #[inline(always)]
    fn forward(&self, vg: Lanes, vd: Lanes, vs: Lanes) -> Point {
        let vds = vd - vs;
        // 1. Threshold; slopes of the effective gate voltage over VDS and VS.
        let mut gate = vg - self.vt0;
        let mut gate_vds = Lanes::ZERO;
        let mut gate_vs = Lanes::ZERO;
        if self.has.dibl {
            let arg = 1.0 + vds * self.inv_vx;
            gate += self.dibl_vx * arg.ln();
            gate_vds = self.dibl / arg;
        }
        if self.has.body {
            let floor = -0.5 * self.phi;
            let root = (self.phi + vs.max(floor)).sqrt();
            gate -= self.body * (root - self.sqrt_phi);
            gate_vs = Lanes::select(vs.lt(floor), Lanes::ZERO, -0.5 * self.body / root);
        }
        // 2. Pinch-off. The root is held above gamma/2, where VP ends at -phi.
        let shifted = gate + self.phi + self.gamma * self.sqrt_phi;
        let half_gamma = 0.5 * self.gamma;
        let floor = half_gamma + 1e-3;
        let square = shifted + self.quarter_gamma2;
        let off = square.lt(floor * floor);
        let root = square.max(floor * floor).sqrt();
        let surface = root - half_gamma;
        let vp = surface * surface - self.phi;
        let vp_gate = Lanes::select(off, Lanes::ZERO, surface / root);
        // 3. Slope factor: sqrt(phi + VP + 4 UT).
        let depth2 = surface * surface + 4.0 * self.ut;
        let depth = depth2.sqrt();
        let n_excess = half_gamma / depth;
        let n = 1.0 + n_excess;
        let n_vp = -0.5 * n_excess / depth2;
        // 4. Charges.
        let (qs, qs_v) = charge((vp - vs) * self.inv_ut);
        let (qd, qd_v) = charge((vp - vd) * self.inv_ut);
        // 5. Velocity saturation.
        let (qdsat, qdsat_qs, qe, qe_qs, qe_qd) = if self.has.velocity {
            let is = qs * (qs + 1.0);
            let b = self.lc + 2.0;
            let r = (b * b + 4.0 * self.lc * self.lc * is).sqrt();
            let qdsat = 2.0 * self.lc * is / (b + r);
            let qdsat_qs = self.lc * (2.0 * qs + 1.0) / (2.0 * self.lc * qdsat + b);
            // qe = (qd + qdsat + sqrt((qd - qdsat)^2 + 4 c (1 - s) qdsat qd (1 - x))) / 2 with
            // s = qdsat/qs, x = qd/qs: exactly qs at qd = qs, exactly qdsat at qd = 0.
            let inv_qs = 1.0 / qs;
            let s = qdsat * inv_qs;
            let x = qd * inv_qs;
            let bow = 4.0 * CORNER * (1.0 - s) * (1.0 - x) * qdsat * qd;
            let gap = qd - qdsat;
            let r = (gap * gap + bow).sqrt();
            let inv_r = 0.5 / r;
            let bow_qd = 4.0 * CORNER * (1.0 - s) * qdsat * (1.0 - 2.0 * x);
            let bow_qdsat = 4.0 * CORNER * (1.0 - x) * qd * (1.0 - 2.0 * s);
            // d/dqs at fixed qd and qdsat: both s and x fall.
            let bow_qs = 4.0 * CORNER * qdsat * qd * inv_qs * (s * (1.0 - x) + x * (1.0 - s));
            let qe = 0.5 * (qd + qdsat + r);
            let qe_qd = 0.5 + 0.5 * (2.0 * gap + bow_qd) * inv_r;
            let qe_qdsat = 0.5 + 0.5 * (bow_qdsat - 2.0 * gap) * inv_r;
            let qe_qs = 0.5 * bow_qs * inv_r + qe_qdsat * qdsat_qs;
            (qdsat, qdsat_qs, qe, qe_qs, qe_qd)
        } else {
            (Lanes::ZERO, Lanes::ZERO, qd, Lanes::ZERO, Lanes::ONE)
        };
        // 6. Current.
        let sum = qs + qe;
        let i = (qs - qe) * (sum + 1.0);
        let i_qe = -(2.0 * qe + 1.0);
        let i_qs = 2.0 * qs + 1.0 + i_qe * qe_qs;
        let i_qd = i_qe * qe_qd;
        // 7. Mobility, as a function of the sum of the charges.
        let low = 1.0 + sum;
        let d1 = 1.0 + self.theta_ut * sum;
        let d2 = low + self.rise;
        let inv = 1.0 / (d1 * d2);
        let mob = low * inv;
        let mob_sum = inv - mob * inv * (self.theta_ut * d2 + d1);
        let mob_qs = mob_sum * (1.0 + qe_qs);
        let mob_qd = mob_sum * qe_qd;
        // 8. Channel-length modulation. VDSsat/UT = 2 (qs - qdsat) + 4: Binkley, *Tradeoffs and
        // Optimization in Analog CMOS Design*, 2008, 2 sqrt(IC + 1/4) + 3, less what velocity
        // saturation takes.
        let vdssat = self.ut * (2.0 * (qs - qdsat) + 4.0);
        let vdssat_qs = 2.0 * self.ut * (1.0 - qdsat_qs);
        let (m, m_vds, m_qs, beyond, beyond_vds, beyond_qs) = if self.has.clm || self.has.impact {
            let x = vds / vdssat;
            let x2 = x * x;
            let x4 = x2 * x2;
            let root = (1.0 + x4).sqrt().sqrt();
            let inv = 1.0 / (root * (1.0 + x4));
            let beyond = vds - vds / root;
            let beyond_vds = 1.0 - inv;
            let beyond_qs = -(x4 * x * inv) * vdssat_qs;
            let arg = 1.0 + beyond * self.inv_ve;
            let m = 1.0 + self.clm * arg.ln();
            let m_beyond = self.clm * self.inv_ve / arg;
            (
                m,
                m_beyond * beyond_vds,
                m_beyond * beyond_qs,
                beyond,
                beyond_vds,
                beyond_qs,
            )
        } else {
            let z = Lanes::ZERO;
            (Lanes::ONE, z, z, z, z, z)
        };
        let scale = self.specific * n * m;
        let im = i * mob;
        let id = scale * im;
        // Slopes over qs, qd, VDS and VP at the others fixed.
        let id_qs = scale * (i_qs * mob + i * mob_qs) + self.specific * n * im * m_qs;
        let id_qd = scale * (i_qd * mob + i * mob_qd);
        let id_vds = self.specific * n * im * m_vds;
        let qs_vp = qs_v * self.inv_ut;
        let qd_vp = qd_v * self.inv_ut;
        let id_vp = id_qs * qs_vp + id_qd * qd_vp + self.specific * m * im * n_vp;
        let gm = id_vp * vp_gate;
        // VDS acts through CLM and barrier lowering, the body through the threshold.
        let along = id_vds + gm * gate_vds;
        let gds = along - id_qd * qd_vp;
        let gms = along + id_qs * qs_vp - gm * gate_vs;
        let (ib, ib_slopes) = if self.has.impact {
            // Below a millivolt the exponential is zero for any real Bi.
            let b = beyond.max(Lanes::splat(1e-3));
            let e = self.impact * (-(self.impact_voltage / b)).exp();
            let gain = e * b;
            let gain_b = e * (1.0 + self.impact_voltage / b);
            let ib = id * gain;
            let by_qs = id * gain_b * beyond_qs * qs_vp;
            (
                ib,
                [
                    gm * gain + by_qs * vp_gate,
                    gds * gain + id * gain_b * beyond_vds + by_qs * vp_gate * gate_vds,
                    -gms * gain - id * gain_b * beyond_vds - by_qs
                        + by_qs * vp_gate * (gate_vs - gate_vds),
                ],
            )
        } else {
            (Lanes::ZERO, [Lanes::ZERO; 3])
        };
        Point {
            id,
            gm,
            gms,
            gds,
            ib,
            ib_slopes,
            vdssat,
        }
    }
}
