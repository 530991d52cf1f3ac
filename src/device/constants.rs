//! Physical constants (SI 2019, exact) and what follows from them alone.

/// Boltzmann constant, J/K.
pub const BOLTZMANN: f64 = 1.380649e-23;
/// Elementary charge, C.
pub const CHARGE: f64 = 1.602176634e-19;

/// kT/q, V, at `temperature` kelvin.
pub fn thermal_voltage(temperature: f64) -> f64 {
    BOLTZMANN * temperature / CHARGE
}

/// Band gap of silicon, eV: 1.16 - 7.02e-4 T^2 / (T + 1108), the form used with charge-based
/// models (Bucher et al., EPFL-EKV v2.6 report, 1997).
pub fn band_gap(temperature: f64) -> f64 {
    1.16 - 7.02e-4 * temperature * temperature / (temperature + 1108.0)
}
