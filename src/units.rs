//! Quantities with their units: SI base units inside, the way people write them outside.
//!
//! Every quantity is a newtype over `f64` in its SI unit. Inner loops work on the bare `f64`
//! and say so; everything that crosses a module's border carries its type.
//!
//! - [`parse`] reads `20 uA`, `2.5 MOhm`, `-40 degC`, `5 mV um`, `110 uA/V^2`.
//! - [`Permitted`] names a quantity and its range and writes the text of every fault.
//! - `Display` writes engineering notation, three significant digits unless a precision says
//!   otherwise: `format!("{:.4}", Amp(1e-5))` gives `10.00 uA`. `exact` writes the shortest text
//!   that reads back as the same bits.

mod dimension;
mod permitted;
mod write;

pub use dimension::{Dimension, Unit, parse, parse_unit};
pub use permitted::{Fault, Permitted};
pub use write::{engineering, exact, percent};

use serde::{Deserialize, Serialize};
use std::fmt;

macro_rules! quantity {
    ($(#[$doc:meta])* $name:ident, $symbol:literal) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, PartialOrd, Default, Serialize, Deserialize)]
        #[serde(transparent)]
        pub struct $name(pub f64);

        impl $name {
            /// The symbol of the SI unit the value is held in.
            pub const SYMBOL: &'static str = $symbol;

            /// The shortest text that reads back as the same value, such as `20 uA`.
            pub fn exact(self) -> String {
                exact(self.0, Self::SYMBOL)
            }
        }

        impl fmt::Display for $name {
            fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.pad_text(&engineering(self.0, Self::SYMBOL, f.precision().unwrap_or(3)))
            }
        }

        impl From<f64> for $name {
            fn from(value: f64) -> Self {
                Self(value)
            }
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

/// Width and alignment apply to a quantity's text as a whole; the precision was already spent on
/// its digits, and the standard `pad` would cut the text at it.
trait PadText {
    fn pad_text(&mut self, text: &str) -> fmt::Result;
}

impl PadText for fmt::Formatter<'_> {
    fn pad_text(&mut self, text: &str) -> fmt::Result {
        let Some(width) = self.width() else {
            return self.write_str(text);
        };
        match self.align() {
            Some(fmt::Alignment::Right) => write!(self, "{text:>width$}"),
            Some(fmt::Alignment::Center) => write!(self, "{text:^width$}"),
            _ => write!(self, "{text:<width$}"),
        }
    }
}

/// A closed interval `least..=most` of a quantity.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Range<T> {
    /// Lower end, inclusive.
    pub least: T,
    /// Upper end, inclusive.
    pub most: T,
}

impl<T: PartialOrd> Range<T> {
    /// Whether the interval holds a value.
    pub fn contains(&self, value: T) -> bool {
        self.least <= value && value <= self.most
    }
}

impl<T: fmt::Display> fmt::Display for Range<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let digits = f.precision().unwrap_or(3);
        f.pad_text(&format!(
            "{:.digits$} to {:.digits$}",
            self.least, self.most
        ))
    }
}
