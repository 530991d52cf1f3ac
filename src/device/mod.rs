//! The transistor: terminal voltages in, current and exact slopes out, eight corners at a time.
//! Knows no circuit.
//!
//! Every law is written for an n-channel device with voltages referred to its bulk; a p-channel
//! device is the same law with voltages and currents mirrored, which the circuit does.

pub mod charge;
pub mod constants;
pub mod square;

use crate::numeric::lanes::{Lanes, WIDTH};
use crate::process::{Law, Mosfet};
use charge::Charge;
use square::Square;

/// What a law returns at a bias point. Conductances in siemens, currents in ampere.
#[derive(Debug, Clone, Copy)]
pub struct Point {
    /// Channel current, drain to source.
    pub id: Lanes,
    /// d id / d VG.
    pub gm: Lanes,
    /// -d id / d VS.
    pub gms: Lanes,
    /// d id / d VD.
    pub gds: Lanes,
    /// Impact-ionisation current, drain to bulk.
    pub ib: Lanes,
    /// Slopes of `ib`: d/dVG, d/dVD, d/dVS.
    pub ib_slopes: [Lanes; 3],
    /// Saturation voltage VDSsat, V.
    pub vdssat: Lanes,
}

impl Point {
    /// No current, no slope.
    pub const OFF: Point = Point {
        id: Lanes::ZERO,
        gm: Lanes::ZERO,
        gms: Lanes::ZERO,
        gds: Lanes::ZERO,
        ib: Lanes::ZERO,
        ib_slopes: [Lanes::ZERO; 3],
        vdssat: Lanes::ZERO,
    };
}

/// A transistor law at fixed geometry, one parameter set per lane.
pub trait Transistor {
    /// Current and slopes at gate, drain and source voltages referred to the bulk.
    fn at(&self, vg: Lanes, vd: Lanes, vs: Lanes) -> Point;
    /// Scales the width: the same device `factor` times as wide.
    fn widened(&self, factor: f64) -> Self;
}

/// Conditions of one lane.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Conditions {
    /// Temperature, K.
    pub temperature: f64,
    /// Shift of the threshold, V.
    pub threshold_shift: f64,
    /// Factor on the gain.
    pub gain: f64,
}

/// A device in eight lanes, by whichever law the card chose.
#[derive(Debug, Clone, Copy)]
pub enum Device {
    /// Charge-based.
    Charge(Charge),
    /// Square law.
    Square(Square),
}

impl Device {
    /// The device of `width` by `length` (drawn, metres) in eight lanes of conditions; card
    /// parameters hold at `nominal` kelvin.
    pub fn new(
        mosfet: &Mosfet,
        nominal: f64,
        width: f64,
        length: f64,
        lanes: &[Conditions; WIDTH],
    ) -> Device {
        match &mosfet.law {
            Law::Charge(law) => Device::Charge(Charge::new(law, nominal, width, length, lanes)),
            Law::Square(law) => Device::Square(Square::new(law, nominal, width, length, lanes)),
        }
    }

    /// Current and slopes; see [`Transistor::at`].
    #[inline(always)]
    pub fn at(&self, vg: Lanes, vd: Lanes, vs: Lanes) -> Point {
        match self {
            Device::Charge(d) => d.at(vg, vd, vs),
            Device::Square(d) => d.at(vg, vd, vs),
        }
    }

    /// The same device `factor` times as wide.
    pub fn widened(&self, factor: f64) -> Device {
        match self {
            Device::Charge(d) => Device::Charge(d.widened(factor)),
            Device::Square(d) => Device::Square(d.widened(factor)),
        }
    }
}

/// Drawn width that gives a unit of `current` the inversion coefficient `inversion` at drawn
/// `length` and the card's temperature, m.
///
/// IC = I / (2 n KP (W/L) UT^2) with n at pinch-off voltage 0 (Enz & Vittoz 2006, ch. 4). For the square
/// law n = 1, so that IC = (Vov / 2 UT)^2.
pub fn width_for(mosfet: &Mosfet, nominal: f64, current: f64, inversion: f64, length: f64) -> f64 {
    let specific = specific_current(mosfet, nominal, length);
    let loss = match &mosfet.law {
        Law::Charge(law) => law.width_loss,
        Law::Square(law) => law.width_loss,
    };
    current / (inversion * specific) * effective_length(mosfet, length) + loss
}

/// Inversion coefficient of a drawn size at `current`; the inverse of [`width_for`].
pub fn inversion_of(mosfet: &Mosfet, nominal: f64, current: f64, width: f64, length: f64) -> f64 {
    let loss = match &mosfet.law {
        Law::Charge(law) => law.width_loss,
        Law::Square(law) => law.width_loss,
    };
    current * effective_length(mosfet, length)
        / (specific_current(mosfet, nominal, length) * (width - loss))
}

/// 2 n KP UT^2 at the card's temperature, A (the specific current of a square device).
pub fn specific_current(mosfet: &Mosfet, nominal: f64, length: f64) -> f64 {
    let ut = constants::thermal_voltage(nominal);
    let (kp, n) = match &mosfet.law {
        Law::Charge(law) => (
            law.kp.at(length),
            charge::slope_factor(law, nominal, length),
        ),
        Law::Square(law) => (law.kp, 1.0),
    };
    2.0 * n * kp * ut * ut
}

/// Drawn length minus its loss, m.
pub fn effective_length(mosfet: &Mosfet, length: f64) -> f64 {
    match &mosfet.law {
        Law::Charge(law) => length - law.length_loss,
        Law::Square(law) => length - law.length_loss,
    }
}

/// Standard deviations of *one* device's threshold (V) and gain (fraction): a pair's difference
/// divided by sqrt 2 (Pelgrom, Duinmaijer, Welbers, JSSC 24, 1989), on drawn sizes.
pub fn mismatch_of(mosfet: &Mosfet, width: f64, length: f64) -> (f64, f64) {
    let root = (2.0 * width * length).sqrt();
    (
        mosfet.mismatch.threshold / root,
        mosfet.mismatch.gain / root,
    )
}

/// Area of `units` equal devices side by side, m^2, by the card's rule.
pub fn area_of(mosfet: &Mosfet, width: f64, length: f64, units: u32) -> f64 {
    let rule = &mosfet.area;
    let m = f64::from(units);
    let along = if rule.shared {
        m * length + (m + 1.0) * rule.border_length / 2.0
    } else {
        m * (length + rule.border_length)
    };
    (width + rule.border_width) * along
}
