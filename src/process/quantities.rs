//! The quantities of a process card: name, plausible range, example. The ranges are wide enough for
//! every planar silicon MOS process, and narrow enough to catch a
//! slip of a thousand.

use crate::yaml::quantities;

quantities! {
    /// Temperature at which the parameters hold.
    Temperature: f64 = "card temperature", "-60 degC" to "200 degC", like "27 degC";
    /// Largest supply.
    Supply: f64 = "largest supply", "0.2 V" to "100 V", like "1.98 V";
    /// Largest voltage between two terminals.
    Limit: f64 = "voltage limit", "0.2 V" to "100 V", like "1.98 V";
    /// A drawn length or width.
    Size: f64 = "drawn size", "5 nm" to "10 mm", like "0.18 um to 20 um";
    /// A drawn length of a table.
    Length: f64 = "drawn length", "5 nm" to "10 mm", like "0.5 um";
    /// Manufacturing grid.
    Grid: f64 = "manufacturing grid", "0.1 nm" to "1 um", like "5 nm";
    /// Drawn minus effective size.
    Loss: f64 = "drawn minus effective size", "-1 um" to "1 um", like "10 nm";
    /// Area added around a device.
    Border: f64 = "border", "0 um" to "100 um", like "0.6 um";
    /// Threshold voltage.
    Threshold: f64 = "threshold voltage", "-0.5 V" to "3 V", like "0.45 V";
    /// Fall of the threshold per kelvin.
    ThresholdTc: f64 = "fall of the threshold voltage", "-1 mV/K" to "5 mV/K", like "0.8 mV/K";
    /// Body factor.
    Gamma: f64 = "body factor", "0 sqrt(V)" to "5 sqrt(V)", like "0.45 sqrt(V)";
    /// Twice the Fermi potential.
    Phi: f64 = "surface potential", "0.3 V" to "1.5 V", like "0.8 V";
    /// Transconductance parameter.
    Kp: f64 = "transconductance parameter", "1 uA/V^2" to "5000 uA/V^2", like "300 uA/V^2";
    /// Exponent over absolute temperature.
    KpExponent: f64 = "temperature exponent", "-3" to "1", like "-1.5";
    /// Vertical-field mobility reduction.
    Theta: f64 = "vertical-field mobility reduction", "0 1/V" to "5 1/V", like "0.25 1/V";
    /// Rise of mobility with charge.
    MobilityRise: f64 = "rise of mobility with charge", "0" to "10", like "0.1";
    /// Saturation velocity.
    SaturationVelocity: f64 = "saturation velocity", "1e3 m/s" to "1e6 m/s", like "9e4 m/s";
    /// Low-field mobility.
    Mobility: f64 = "mobility", "1 cm2/Vs" to "3000 cm2/Vs", like "350 cm2/Vs";
    /// Channel-length modulation: strength.
    ClmStrength: f64 = "strength of channel-length modulation", "0" to "10", like "0.05";
    /// Channel-length modulation: voltage.
    ClmVoltage: f64 = "voltage of channel-length modulation", "1 mV" to "1000 V", like "0.8 V";
    /// Barrier lowering.
    Dibl: f64 = "drain-induced barrier lowering", "0 mV/V" to "500 mV/V", like "12 mV/V";
    /// Voltage at which barrier lowering saturates.
    DiblVoltage: f64 = "voltage of barrier lowering", "10 mV" to "1000 V", like "1 V";
    /// Impact ionisation: strength.
    ImpactStrength: f64 = "strength of impact ionisation", "0 1/V" to "1000 1/V", like "2 1/V";
    /// Impact ionisation: voltage.
    ImpactVoltage: f64 = "voltage of impact ionisation", "0.1 V" to "1000 V", like "25 V";
    /// Early voltage per length.
    EarlyPerLength: f64 = "Early voltage per length", "0.1 V/um" to "10000 V/um", like "20 V/um";
    /// Threshold mismatch.
    ThresholdMismatch: f64 = "threshold mismatch", "0 mV um" to "200 mV um", like "4.5 mV um";
    /// Gain-factor mismatch.
    GainMismatch: f64 = "gain mismatch", "0 % um" to "50 % um", like "1 % um";
    /// Gate capacitance per area.
    OxideCapacitance: f64 =
        "gate capacitance per area", "0.05 fF/um2" to "50 fF/um2", like "8.5 fF/um2";
    /// Flicker coefficient.
    Flicker: f64 = "flicker coefficient", "0 V^2 F" to "1e-20 V^2 F", like "1e-25 V^2 F";
    /// Flicker exponent.
    FlickerExponent: f64 = "flicker exponent", "0.5" to "2", like "1";
    /// Sheet resistance.
    Sheet: f64 = "sheet resistance", "1 mOhm/sq" to "1 MOhm/sq", like "300 Ohm/sq";
    /// First temperature coefficient.
    Tc1: f64 = "first temperature coefficient", "-20000 ppm/K" to "20000 ppm/K", like "-200 ppm/K";
    /// Second temperature coefficient.
    Tc2: f64 = "second temperature coefficient", "-100 ppm/K^2" to "100 ppm/K^2", like "0.5 ppm/K^2";
    /// Resistor mismatch.
    ResistorMismatch: f64 = "resistor mismatch", "0 % um" to "50 % um", like "2 % um";
    /// Least number of squares.
    Squares: f64 = "least length in squares", "0.1 sq" to "1000 sq", like "5 sq";
    /// Threshold shift of a corner.
    ThresholdShift: f64 = "threshold shift", "-300 mV" to "300 mV", like "40 mV";
    /// Gain deviation of a corner.
    GainShift: f64 = "gain deviation", "-60 %" to "150 %", like "-10 %";
    /// Resistor deviation of a corner.
    ResistorShift: f64 = "resistor deviation", "-60 %" to "150 %", like "+15 %";
}
