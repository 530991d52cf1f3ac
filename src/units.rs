//! Quantities with their units: SI base units inside, the way people write them outside.
//!
//! Every quantity is a newtype over `f64` in its SI unit. Inner loops work on the bare `f64`
//! and say so; everything that crosses a module's border carries its type.

use serde::{Deserialize, Serialize};

macro_rules! quantity {
    ($(#[$doc:meta])* $name:ident, $symbol:literal) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, PartialOrd, Default, Serialize, Deserialize)]
        #[serde(transparent)]
        pub struct $name(pub f64);

        impl $name {
            /// The symbol of the SI unit the value is held in.
            pub const SYMBOL: &'static str = $symbol;
        }
    };
}

quantity!(/// Electric potential difference, volt.
    Volt, "V");
quantity!(/// Electric current, ampere.
    Amp, "A");
quantity!(/// Resistance, ohm.
    Ohm, "Ohm");
quantity!(/// Length, metre.
    Metre, "m");
quantity!(/// Area, square metre.
    SquareMetre, "m2");
quantity!(/// Power, watt.
    Watt, "W");
quantity!(/// Absolute temperature, kelvin.
    Kelvin, "K");

/// A closed interval `least..=most` of a quantity.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Range<T> {
    /// Lower end, inclusive.
    pub least: T,
    /// Upper end, inclusive.
    pub most: T,
}
