//! Random laws and conditions, and devices made from them without a card file.

use biasloom::device::{Conditions, Device};
use biasloom::numeric::lanes::WIDTH;
use biasloom::process::{AreaRule, ChargeLaw, Curve, Law, Mismatch, Mosfet, Noise, SquareLaw};
use biasloom::units::{Metre, Range, Volt};
use rand::Rng;
use rand_pcg::Pcg64;

/// A card's transistor with a law of one's own; everything else is out of the way.
pub fn mosfet(law: Law) -> Mosfet {
    Mosfet {
        deck_model: "m".into(),
        length: Range {
            least: Metre(1e-8),
            most: Metre(1e-3),
        },
        width: Range {
            least: Metre(1e-8),
            most: Metre(1e-3),
        },
        grid: Metre(1e-9),
        vds_max: Volt(5.0),
        vgs_max: Volt(5.0),
        law,
        mismatch: Mismatch {
            threshold: 5e-9,
            gain: 1e-8,
        },
        area: AreaRule {
            border_width: 0.0,
            border_length: 0.0,
            shared: false,
        },
        noise: Noise {
            oxide_capacitance: 4e-3,
            flicker: 1e-25,
            flicker_exponent: 1.0,
        },
    }
}

/// A device of a law at a drawn size.
pub fn device(
    law: Law,
    nominal: f64,
    width: f64,
    length: f64,
    lanes: &[Conditions; WIDTH],
) -> Device {
    Device::new(&mosfet(law), nominal, width, length, lanes)
}

/// The same conditions in every lane, nothing shifted.
pub fn at_temperature(temperature: f64) -> [Conditions; WIDTH] {
    [Conditions {
        temperature,
        threshold_shift: 0.0,
        gain: 1.0,
    }; WIDTH]
}

/// Eight different temperatures, shifts and gains.
pub fn random_conditions(rng: &mut Pcg64) -> [Conditions; WIDTH] {
    std::array::from_fn(|_| Conditions {
        temperature: rng.random_range(233.0..400.0),
        threshold_shift: rng.random_range(-0.05..0.05),
        gain: rng.random_range(0.8..1.25),
    })
}

/// A charge-based law with no correction: body factor, surface potential and KP only.
pub fn plain_charge(threshold: f64, gamma: f64, phi: f64, kp: f64) -> ChargeLaw {
    let c = Curve::constant;
    ChargeLaw {
        width_loss: 0.0,
        length_loss: 0.0,
        threshold: c(threshold),
        threshold_tc: c(0.0),
        gamma: c(gamma),
        body_gamma: c(gamma),
        phi: c(phi),
        kp: c(kp),
        kp_exponent: c(0.0),
        theta: c(0.0),
        mobility_rise: c(0.0),
        saturation_velocity: c(f64::INFINITY),
        mobility: c(0.04),
        clm_strength: c(0.0),
        clm_voltage: c(1.0),
        dibl: c(0.0),
        dibl_voltage: c(1.0),
        impact_strength: c(0.0),
        impact_voltage: c(1.0),
    }
}

/// A charge-based law with random parameters and every correction on.
pub fn random_charge(rng: &mut Pcg64) -> ChargeLaw {
    let mut within = |low: f64, high: f64| Curve::constant(rng.random_range(low..high));
    ChargeLaw {
        threshold: within(0.2, 0.9),
        threshold_tc: within(0.2e-3, 2e-3),
        gamma: within(0.2, 0.9),
        body_gamma: within(0.1, 0.9),
        phi: within(0.6, 1.0),
        kp: within(30e-6, 600e-6),
        kp_exponent: within(-2.0, -0.2),
        theta: within(0.01, 0.6),
        mobility_rise: within(0.01, 0.9),
        saturation_velocity: within(0.5e5, 2e5),
        mobility: within(0.005, 0.05),
        clm_strength: within(0.01, 0.2),
        clm_voltage: within(0.1, 3.0),
        dibl: within(0.001, 0.08),
        dibl_voltage: within(0.1, 2.0),
        impact_strength: within(0.1, 10.0),
        impact_voltage: within(2.0, 30.0),
        width_loss: 0.02e-6,
        length_loss: 0.05e-6,
    }
}

/// A square law with random parameters.
pub fn random_square(rng: &mut Pcg64) -> SquareLaw {
    SquareLaw {
        width_loss: 0.0,
        length_loss: 0.05e-6,
        threshold: rng.random_range(0.2..0.9),
        threshold_tc: rng.random_range(0.2e-3..2e-3),
        gamma: rng.random_range(0.0..0.9),
        phi: rng.random_range(0.6..1.0),
        kp: rng.random_range(30e-6..600e-6),
        kp_exponent: rng.random_range(-2.0..-0.2),
        early_per_length: rng.random_range(3e6..50e6),
    }
}

/// Either law.
pub fn random_law(rng: &mut Pcg64) -> Law {
    if rng.random() {
        Law::Charge(random_charge(rng))
    } else {
        Law::Square(random_square(rng))
    }
}
