//! The quantities of a spec: name, permitted range, example.

use crate::units::{Amp, Kelvin, Ohm, SquareMetre, Volt, Watt};
use crate::yaml::quantities;

quantities! {
    /// Supply range.
    Supply: Volt = "supply", "0.3 V" to "60 V", like "1.62 V to 1.98 V";
    /// Temperature range.
    Temperature: Kelvin = "temperature", "-60 degC" to "200 degC", like "-40 degC to 125 degC";
    /// Nominal temperature.
    Nominal: Kelvin = "nominal temperature", "-60 degC" to "200 degC", like "27 degC";
    /// Reference current.
    ReferenceCurrent: Amp = "reference current", "100 pA" to "10 mA", like "10 uA",
        note "a current is positive: the key \"flows\" says which way it goes";
    /// Voltage of the reference pin.
    PinRange: Volt = "range of the reference pin", "0 V" to "60 V", like "0 V to 1.2 V";
    /// Tolerance of the reference.
    Tolerance: f64 = "tolerance of the reference", "0 %" to "50 %", like "2 %";
    /// Output current.
    OutputCurrent: Amp = "output current", "10 pA" to "100 mA", like "20 uA",
        note "a current is positive: the key \"kind\" says which way it goes";
    /// Ratio to the reference.
    Ratio: f64 = "ratio", "0.000001" to "1000000", like "2";
    /// Voltage between an output and its rail.
    OutputRange: Volt = "range of the output", "10 mV" to "60 V", like "0.25 V to 1.4 V",
        note "counted from the output's own rail, where no transistor can deliver any current";
    /// Accuracy of an output.
    Accuracy: f64 = "accuracy", "0.001 %" to "100 %", like "1.5 %";
    /// Standard deviations.
    Sigma: f64 = "number of standard deviations", "0.5 sigma" to "8 sigma", like "3 sigma";
    /// Output resistance.
    OutputResistance: Ohm = "output resistance", "100 Ohm" to "100 TOhm", like "2.5 MOhm";
    /// Area limit.
    Area: SquareMetre = "area limit", "0.1 um2" to "1000 mm2", like "20000 um2";
    /// Overhead current limit.
    OverheadCurrent: Amp = "limit of the overhead current", "10 pA" to "1 A", like "60 uA";
    /// Power limit.
    Power: Watt = "power limit", "10 pW" to "10 W", like "200 uW";
}
