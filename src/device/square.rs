//! The square law, for textbook cards: Shichman & Hodges, IEEE JSSC 3(3), 1968.
//!
//! VT = VT0 + gamma (sqrt(phi + VSB) - sqrt(phi)); beta = KP W/L;
//! saturation: beta/2 (VGS - VT)^2 (1 + VDS/VA); triode:
//! beta ((VGS - VT) VDS - VDS^2/2)(1 + VDS/VA); cut off below VT. VA = VA' L (drawn length).

use super::{Conditions, Point, Transistor};
use crate::numeric::lanes::{Lanes, WIDTH};
use crate::process::SquareLaw;

/// The law at one geometry, one parameter set per lane.
#[derive(Debug, Clone, Copy)]
pub struct Square {
    vt0: Lanes,
    gamma: Lanes,
    phi: Lanes,
    sqrt_phi: Lanes,
    beta: Lanes,
    lambda: Lanes,
}

impl Square {
    /// Parameters at a drawn geometry (m) in eight lanes of conditions.
    pub fn new(
        law: &SquareLaw,
        nominal: f64,
        width: f64,
        length: f64,
        lanes: &[Conditions; WIDTH],
    ) -> Square {
        let t = Lanes::from_fn(|i| lanes[i].temperature);
        let scale = ((t / nominal).ln() * law.kp_exponent).exp();
        let gain = Lanes::from_fn(|i| lanes[i].gain);
        Square {
            vt0: Lanes::from_fn(|i| {
                law.threshold - law.threshold_tc * (lanes[i].temperature - nominal)
                    + lanes[i].threshold_shift
            }),
            gamma: Lanes::splat(law.gamma),
            phi: Lanes::splat(law.phi),
            sqrt_phi: Lanes::splat(law.phi.sqrt()),
            beta: law.kp * gain * scale * ((width - law.width_loss) / (length - law.length_loss)),
            lambda: Lanes::splat(1.0 / (law.early_per_length * length)),
        }
    }
}

impl Transistor for Square {
    #[inline(always)]
    fn at(&self, vg: Lanes, vd: Lanes, vs: Lanes) -> Point {
        let swapped = vd.lt(vs);
        let high = Lanes::select(swapped, vs, vd);
        let low = Lanes::select(swapped, vd, vs);
        let vds = high - low;
        let floor = -0.5 * self.phi;
        let root = (self.phi + low.max(floor)).sqrt();
        let vt = self.vt0 + self.gamma * (root - self.sqrt_phi);
        let vt_vs = Lanes::select(low.lt(floor), Lanes::ZERO, 0.5 * self.gamma / root);
        let vov = (vg - low - vt).max(Lanes::ZERO);
        // In saturation the channel's share of VDS stops at Vov.
        let triode = vds.lt(vov);
        let v = Lanes::select(triode, vds, vov);
        let m = 1.0 + self.lambda * vds;
        let core = self.beta * (vov - 0.5 * v) * v;
        let id = core * m;
        let gm = self.beta * v * m;
        let gds =
            core * self.lambda + Lanes::select(triode, self.beta * (vov - vds) * m, Lanes::ZERO);
        let gms = gm * (1.0 + vt_vs) + gds;
        Point {
            id: Lanes::select(swapped, -id, id),
            gm: Lanes::select(swapped, -gm, gm),
            gms: Lanes::select(swapped, gds, gms),
            gds: Lanes::select(swapped, gms, gds),
            ib: Lanes::ZERO,
            ib_slopes: [Lanes::ZERO; 3],
            vdssat: vov,
        }
    }

    fn widened(&self, factor: f64) -> Square {
        Square {
            beta: self.beta * factor,
            ..*self
        }
    }
}
