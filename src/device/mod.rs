//! The transistor: terminal voltages in, current and exact slopes out, eight corners at a time.
//! Knows no circuit.
//!
//! Every law is written for an n-channel device with voltages referred to its bulk; a p-channel
//! device is the same law with voltages and currents mirrored, which the circuit does.

pub mod bank;
pub mod charge;
pub mod constants;
pub mod square;

use crate::numeric::lanes::{Lanes, WIDTH};
use crate::numeric::scalar;
use crate::process::{Law, Mosfet, Resistor as ResistorCard};
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

    /// Slopes of the channel current and of the impact-ionisation current over drain, gate, source
    /// and bulk. Currents follow voltage differences alone, so each row sums to zero.
    #[inline(always)]
    pub fn slopes(&self) -> ([Lanes; 4], [Lanes; 4]) {
        let [bg, bd, bs] = self.ib_slopes;
        (
            [self.gds, self.gm, -self.gms, self.gms - self.gds - self.gm],
            [bd, bg, bs, -(bd + bg + bs)],
        )
    }
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
#[expect(
    clippy::large_enum_variant,
    reason = "a device sits in its circuit, where Newton reads it; an address more would cost there"
)]
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
    let loss = width_loss(mosfet);
    current / (inversion * specific) * effective_length(mosfet, length) + loss
}

/// Inversion coefficient of a drawn size at `current`; the inverse of [`width_for`].
pub fn inversion_of(mosfet: &Mosfet, nominal: f64, current: f64, width: f64, length: f64) -> f64 {
    let loss = width_loss(mosfet);
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

/// Gate voltage to the bulk that gives `inversion` with the source at `source` volts, at the
/// card's temperature: the long-channel closed form without corrections.
///
/// VP = VS + UT (2q + ln q), VG = VT0 + VP + gamma (sqrt(phi + VP) - sqrt(phi)) (the inverse of
/// VP(VG), Enz & Vittoz 2006); square law: VG = VS + VT(VS) + 2 UT sqrt(IC).
pub fn gate_voltage(
    mosfet: &Mosfet,
    nominal: f64,
    inversion: f64,
    source: f64,
    length: f64,
) -> f64 {
    let ut = constants::thermal_voltage(nominal);
    match &mosfet.law {
        Law::Charge(law) => {
            let q = inversion_charge(inversion);
            let vp = source + ut * (2.0 * q + scalar::ln(q));
            let (phi, gamma) = (law.phi.at(length), law.gamma.at(length));
            let body = law.body_gamma.at(length) - gamma;
            law.threshold.at(length)
                + vp
                + gamma * ((phi + vp).max(0.01).sqrt() - phi.sqrt())
                + body * ((phi + source).max(0.01).sqrt() - phi.sqrt())
        }
        Law::Square(law) => {
            let body = law.gamma * ((law.phi + source).max(0.01).sqrt() - law.phi.sqrt());
            source + law.threshold + body + 2.0 * ut * inversion.sqrt()
        }
    }
}

/// Inversion coefficient of a diode-connected device with its source on the bulk and its gate at
/// `gate` volts; the inverse of [`gate_voltage`] at source 0. Zero where it is off.
pub fn inversion_at(mosfet: &Mosfet, nominal: f64, gate: f64, length: f64) -> f64 {
    let ut = constants::thermal_voltage(nominal);
    match &mosfet.law {
        Law::Charge(law) => {
            let (phi, gamma) = (law.phi.at(length), law.gamma.at(length));
            let shifted = gate - law.threshold.at(length) + phi + gamma * phi.sqrt();
            let root = (shifted + gamma * gamma / 4.0)
                .max(gamma * gamma / 4.0)
                .sqrt();
            let surface = root - gamma / 2.0;
            let q = charge::charge_of((surface * surface - phi) / ut);
            q * q + q
        }
        Law::Square(law) => {
            let vov = (gate - law.threshold).max(0.0);
            (vov / (2.0 * ut)).powi(2)
        }
    }
}

/// Saturation voltage at an inversion coefficient and the card's temperature, V:
/// UT (2 sqrt(IC + 1/4) + 3) (Binkley 2008); square law Vov = 2 UT sqrt(IC).
pub fn saturation_voltage(mosfet: &Mosfet, nominal: f64, inversion: f64) -> f64 {
    let ut = constants::thermal_voltage(nominal);
    match &mosfet.law {
        Law::Charge(_) => ut * (2.0 * (inversion + 0.25).sqrt() + 3.0),
        Law::Square(_) => 2.0 * ut * inversion.sqrt(),
    }
}

/// Normalised charge at the source of a saturated device: q^2 + q = IC.
fn inversion_charge(inversion: f64) -> f64 {
    // The positive root, in the form that keeps its digits for small IC.
    2.0 * inversion / (1.0 + (1.0 + 4.0 * inversion).sqrt())
}

/// Drawn minus effective width, m.
pub fn width_loss(mosfet: &Mosfet) -> f64 {
    match &mosfet.law {
        Law::Charge(law) => law.width_loss,
        Law::Square(law) => law.width_loss,
    }
}

/// Drawn length of a resistor body, m: squares times width.
pub fn resistor_length(card: &ResistorCard, width: f64, ohms: f64) -> f64 {
    width * ohms / card.sheet
}

/// Standard deviation of one body's relative error: a pair's A_R / sqrt(W L), divided by sqrt 2.
pub fn resistor_mismatch(card: &ResistorCard, width: f64, ohms: f64) -> f64 {
    card.mismatch / (2.0 * width * resistor_length(card, width, ohms)).sqrt()
}

/// Area of `units` bodies, m^2.
pub fn resistor_area(card: &ResistorCard, width: f64, ohms: f64, units: u32) -> f64 {
    let length = resistor_length(card, width, ohms);
    f64::from(units) * (width + card.border_width) * (length + card.border_length)
}
