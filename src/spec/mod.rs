//! What the designer asks for: a [`Spec`] with nothing optional left open and nothing unchecked.

mod card;
mod check;
pub mod defaults;
mod file;
mod quantities;

pub use card::{CardFacts, check_against_card};
pub use check::{Located, Vocabulary, load, read};
pub use quantities::ALL as QUANTITIES;

use crate::units::{Amp, Kelvin, Ohm, Range, SquareMetre, Volt, Watt};
use serde::Serialize;

/// A checked requirements table.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Spec {
    /// The file's stem; names the folder under `results/`.
    pub name: String,
    /// One line for people.
    pub title: String,
    /// The process card as the spec names it: a shipped name, or a path relative to the spec.
    pub card: String,
    /// Supply range; the nominal supply is its midpoint.
    pub supply: Range<Volt>,
    /// Temperature range, with the nominal temperature inside it.
    pub temperature: Temperatures,
    /// Names of the card's process corners, in the order they are reported; the first is nominal.
    pub corners: Vec<String>,
    /// Where the one current comes from.
    pub reference: Reference,
    /// The currents wanted.
    pub outputs: Vec<Output>,
    /// Budgets of the whole network.
    pub limits: Limits,
    /// Figures that span the front, by name, in order; at least one.
    pub trade: Vec<String>,
    /// How hard to look.
    pub search: Search,
}

/// Temperatures at which everything is checked.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Temperatures {
    /// Lowest.
    pub least: Kelvin,
    /// Nominal; inside the range.
    pub nominal: Kelvin,
    /// Highest.
    pub most: Kelvin,
}

/// The source of the reference current.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub enum Reference {
    /// A current made elsewhere.
    Current {
        /// Its value.
        current: Amp,
        /// Which way it flows at the network's pin.
        flows: Flow,
        /// Voltage of the pin, to ground, over which the source delivers its current.
        range: Range<Volt>,
        /// How many equal currents are on offer, at least one.
        copies: u32,
        /// Accuracy of the current itself as a fraction (0 = exact): it adds to the error of
        /// every output that is held to its current, and to none that is held to its ratio.
        tolerance: f64,
    },
    /// A resistor from the supply into a sink-side input leg; part of the design and of its area.
    Resistor {
        /// The current at the nominal corner.
        current: Amp,
    },
}

impl Reference {
    /// Nominal current.
    pub fn current(&self) -> Amp {
        match *self {
            Reference::Current { current, .. } | Reference::Resistor { current } => current,
        }
    }
    /// The rail whose families the reference feeds directly.
    pub fn rail(&self) -> Rail {
        match self {
            Reference::Current {
                flows: Flow::OutOfNetwork,
                ..
            } => Rail::Source,
            _ => Rail::Sink,
        }
    }
}

/// Direction of the reference current at the network's pin.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
pub enum Flow {
    /// Pushed into the pin: it feeds a sink-side input leg.
    IntoNetwork,
    /// Pulled out of the pin: it feeds a source-side input leg.
    OutOfNetwork,
}

/// Which rail a leg hangs on.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize)]
pub enum Rail {
    /// n-channel legs to ground: they sink current.
    Sink,
    /// p-channel legs to the supply: they source current.
    Source,
}

impl Rail {
    /// The other rail.
    pub fn opposite(self) -> Rail {
        match self {
            Rail::Sink => Rail::Source,
            Rail::Source => Rail::Sink,
        }
    }
}

/// One current wanted.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Output {
    /// Unique name: letters, digits, underscore; starts with a letter.
    pub name: String,
    /// Sink or source.
    pub rail: Rail,
    /// How much.
    pub target: Target,
    /// How many equal ones, at least one.
    pub count: u32,
    /// Voltage between the pin and the output's own rail over which it must work: above ground
    /// for a sink, below the supply for a source.
    pub range: Range<Volt>,
    /// How accurate, if it matters.
    pub accuracy: Option<Accuracy>,
    /// Least output resistance, if it matters.
    pub output_resistance: Option<Ohm>,
}

/// What an output is held to.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub enum Target {
    /// A current.
    Current(Amp),
    /// A multiple of the reference current.
    Ratio(f64),
}

/// Permitted current error: systematic part plus `sigma` standard deviations of mismatch.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Accuracy {
    /// Limit as a fraction (0.01 = 1 %).
    pub limit: f64,
    /// Standard deviations of the mismatch part that count.
    pub sigma: f64,
    /// Against the stated current, or against the stated ratio to the actual reference.
    pub of: AccuracyOf,
}

/// What an accuracy is measured against.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
pub enum AccuracyOf {
    /// The stated current: the reference's own error counts.
    Current,
    /// The ratio to the actual reference current: it does not.
    Ratio,
}

/// Budgets; `None` is unlimited.
#[derive(Debug, Clone, Copy, PartialEq, Default, Serialize)]
pub struct Limits {
    /// Total area.
    pub area: Option<SquareMetre>,
    /// Supply current of everything that is not an output.
    pub overhead_current: Option<Amp>,
    /// Overhead current times the largest supply.
    pub power: Option<Watt>,
}

/// How hard to look, and from which seed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
pub struct Search {
    /// Size of the sweep and of the polishing.
    pub effort: Effort,
    /// Same spec, same seed: same answer.
    pub seed: u64,
    /// Rank of the network whose limits are priced; `None` is the knee of the front.
    pub price_of: Option<u32>,
}

/// Search effort.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize)]
pub enum Effort {
    /// A coarse sweep: a first answer.
    Quick,
    /// The default.
    Normal,
    /// A fine sweep and long polishing.
    Thorough,
}

impl Spec {
    /// Nominal current of an output.
    pub fn target(&self, output: &Output) -> Amp {
        match output.target {
            Target::Current(current) => current,
            Target::Ratio(ratio) => Amp(ratio * self.reference.current().0),
        }
    }
    /// Largest overhead current that the limits of current and power allow, A; infinite where there
    /// is neither.
    pub fn overhead_limit(&self) -> f64 {
        let by_current = self.limits.overhead_current.map_or(f64::INFINITY, |l| l.0);
        let by_power = self
            .limits
            .power
            .map_or(f64::INFINITY, |l| l.0 / self.supply.most.0);
        by_current.min(by_power)
    }
}

/// JSON Schema of a spec's file.
pub fn schema() -> serde_json::Value {
    schemars::SchemaGenerator::default()
        .into_root_schema_for::<file::SpecFile>()
        .to_value()
}
