//! Process cards: what the silicon does, with the source of every value.

mod check;
mod curve;
mod file;
mod load;
mod quantities;

pub use check::{Line, Loaded, read};
pub use load::{SHIPPED, shipped_names};
pub use quantities::ALL as QUANTITIES;

/// JSON Schema of a card's file.
pub fn schema() -> serde_json::Value {
    schemars::SchemaGenerator::default()
        .into_root_schema_for::<file::CardFile>()
        .to_value()
}

use crate::units::{Kelvin, Metre, Range, Volt};

/// A checked process card.
#[derive(Debug, Clone, PartialEq)]
pub struct Card {
    /// Shipped name or file stem.
    pub name: String,
    /// One line for people.
    pub title: String,
    /// Temperature at which the parameters hold.
    pub temperature: Kelvin,
    /// Largest supply the devices stand.
    pub supply_max: Volt,
    /// n-channel device.
    pub nmos: Mosfet,
    /// p-channel device; every value as for an n-channel device with voltages mirrored
    /// (thresholds positive).
    pub pmos: Mosfet,
    /// Resistor, where the process has one.
    pub resistor: Option<Resistor>,
    /// Process corners; the first is nominal and shifts nothing.
    pub corners: Vec<Corner>,
}

/// One transistor type.
#[derive(Debug, Clone, PartialEq)]
pub struct Mosfet {
    /// Model name in a netlist deck.
    pub deck_model: String,
    /// Permitted drawn length.
    pub length: Range<Metre>,
    /// Permitted drawn width of one unit.
    pub width: Range<Metre>,
    /// Manufacturing grid of drawn sizes.
    pub grid: Metre,
    /// Largest drain-source voltage.
    pub vds_max: Volt,
    /// Largest gate-source voltage.
    pub vgs_max: Volt,
    /// Current law.
    pub law: Law,
    /// Mismatch of a pair (Pelgrom, Duinmaijer, Welbers, JSSC 24, 1989).
    pub mismatch: Mismatch,
    /// Area of a unit.
    pub area: AreaRule,
    /// Noise and gate capacitance.
    pub noise: Noise,
}

/// Current law of a transistor.
#[derive(Debug, Clone, PartialEq)]
#[allow(clippy::large_enum_variant, reason = "there are two of them per card")]
pub enum Law {
    /// Charge-based, all regions.
    Charge(ChargeLaw),
    /// Shichman & Hodges, JSSC 3, 1968.
    Square(SquareLaw),
}

/// A parameter over drawn length: one value, or a table interpolated monotonically in ln L.
#[derive(Debug, Clone, PartialEq)]
pub struct Curve {
    /// Drawn lengths in metres, rising; a single entry means the same value at every length.
    pub lengths: Vec<f64>,
    /// Values in SI units, one per length.
    pub values: Vec<f64>,
}

/// Parameters of the charge-based law, SI units.
#[derive(Debug, Clone, PartialEq)]
pub struct ChargeLaw {
    /// Drawn minus effective width, m.
    pub width_loss: f64,
    /// Drawn minus effective length, m.
    pub length_loss: f64,
    /// Threshold voltage at zero source-bulk voltage, V.
    pub threshold: Curve,
    /// Fall of the threshold per kelvin, V/K.
    pub threshold_tc: Curve,
    /// Body factor that sets the slope factor, sqrt(V).
    pub gamma: Curve,
    /// Body factor that sets the threshold's rise with source-bulk voltage, sqrt(V).
    pub body_gamma: Curve,
    /// Twice the Fermi potential at the card's temperature, V.
    pub phi: Curve,
    /// Transconductance parameter mu Cox, A/V^2.
    pub kp: Curve,
    /// Exponent of kp over absolute temperature (negative).
    pub kp_exponent: Curve,
    /// Vertical-field mobility reduction, 1/V.
    pub theta: Curve,
    /// Rise of mobility with charge at low charge, dimensionless.
    pub mobility_rise: Curve,
    /// Saturation velocity, m/s; infinite where the effect is absent.
    pub saturation_velocity: Curve,
    /// Low-field mobility used with the saturation velocity, m^2/(V s).
    pub mobility: Curve,
    /// Logarithmic channel-length modulation: strength A, dimensionless.
    pub clm_strength: Curve,
    /// Logarithmic channel-length modulation: voltage VE, V.
    pub clm_voltage: Curve,
    /// Drain-induced barrier lowering: sigma, V/V.
    pub dibl: Curve,
    /// Voltage Vx at which the barrier lowering saturates, V.
    pub dibl_voltage: Curve,
    /// Impact ionisation: strength Ai, 1/V.
    pub impact_strength: Curve,
    /// Impact ionisation: voltage Bi, V.
    pub impact_voltage: Curve,
}

/// Parameters of the square law, SI units.
#[derive(Debug, Clone, PartialEq)]
pub struct SquareLaw {
    /// Drawn minus effective width, m.
    pub width_loss: f64,
    /// Drawn minus effective length, m.
    pub length_loss: f64,
    /// Threshold voltage, V.
    pub threshold: f64,
    /// Fall of the threshold per kelvin, V/K.
    pub threshold_tc: f64,
    /// Body factor, sqrt(V).
    pub gamma: f64,
    /// Surface potential 2 phi_F, V.
    pub phi: f64,
    /// Transconductance parameter mu Cox, A/V^2.
    pub kp: f64,
    /// Exponent of kp over absolute temperature (negative).
    pub kp_exponent: f64,
    /// Early voltage per metre of drawn length, V/m; infinite for no output conductance.
    pub early_per_length: f64,
}

/// Pelgrom coefficients of a *pair's* difference.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Mismatch {
    /// A_VT, V m.
    pub threshold: f64,
    /// A_beta, fraction times m.
    pub gain: f64,
}

/// Area of `m` equal units side by side: `(W + border_width)` times
/// `m (L + border_length)`, or `m L + (m + 1) border_length / 2` where neighbours share a diffusion.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct AreaRule {
    /// Added to the drawn width, m.
    pub border_width: f64,
    /// Added to the drawn length, m.
    pub border_length: f64,
    /// Neighbouring units share a diffusion.
    pub shared: bool,
}

/// Noise parameters.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Noise {
    /// Gate capacitance per area, F/m^2.
    pub oxide_capacitance: f64,
    /// Flicker coefficient KF, V^2 F.
    pub flicker: f64,
    /// Flicker frequency exponent AF.
    pub flicker_exponent: f64,
}

/// A resistor type.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Resistor {
    /// Sheet resistance at the card's temperature, Ohm per square.
    pub sheet: f64,
    /// First temperature coefficient, 1/K.
    pub tc1: f64,
    /// Second temperature coefficient, 1/K^2.
    pub tc2: f64,
    /// Mismatch of a pair: A_R, fraction times m.
    pub mismatch: f64,
    /// Least drawn width, m.
    pub width: f64,
    /// Least length in squares.
    pub squares_min: f64,
    /// Added to the drawn width, m.
    pub border_width: f64,
    /// Added to the drawn length, m.
    pub border_length: f64,
}

/// A process corner.
#[derive(Debug, Clone, PartialEq)]
pub struct Corner {
    /// Name such as TT, SS, FF, SF, FS.
    pub name: String,
    /// Shift of the n-channel threshold, V.
    pub nmos_threshold: f64,
    /// Factor on the n-channel gain.
    pub nmos_gain: f64,
    /// Shift of the p-channel threshold, V.
    pub pmos_threshold: f64,
    /// Factor on the p-channel gain.
    pub pmos_gain: f64,
    /// Factor on resistors.
    pub resistor: f64,
}
