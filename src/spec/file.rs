//! A spec as it stands in its YAML file. The tables below are what a spec may say: the reader, the
//! JSON Schema and the messages all come from them.

use super::quantities::{
    Accuracy, Area, Nominal, OutputCurrent, OutputRange, OutputResistance, OverheadCurrent,
    PinRange, Power, Ratio, ReferenceCurrent, Sigma, Supply, Temperature, Tolerance,
};
use super::{AccuracyOf, Effort, Flow, Rail};
use crate::yaml::{
    Either, Fixable, Fraction, List, Name, Quantity, Span, Text, Whole, choice, record,
};

/// Most outputs of a spec.
pub const MOST_OUTPUTS: usize = 256;

record! {
    /// A table of bias currents: what is wanted, from which reference, within which budgets.
    SpecFile = "a spec" {
        /// One line for people; the file's name if left out.
        optional title: Text,
        /// Process card: the name of a shipped one, or the path of a YAML file relative to the spec.
        required card: Text,
        /// Supply range, or one fixed supply.
        required supply: Fixable<Supply>,
        /// Temperature range, or one fixed temperature; the nominal temperature is 27 degC, or the
        /// end of the range nearest to it, unless the long form says otherwise.
        required temperature: Either<Fixable<Temperature>, TemperatureFile>,
        /// Process corners; all of the card if left out.
        optional corners: List<Name, 64>,
        /// Where the one current comes from.
        required reference: ReferenceFile,
        /// The currents wanted.
        required outputs: List<OutputFile, MOST_OUTPUTS>,
        /// Budgets of the whole network; unlimited if left out.
        optional limits: LimitsFile,
        /// Figures that span the front; area and overhead_current if left out.
        optional trade: List<Name, 8>,
        /// How hard to look.
        optional search: SearchFile,
    }
}

record! {
    /// Temperatures in the long form.
    TemperatureFile = "the temperatures" {
        /// Temperature range, or one fixed temperature.
        required range: Fixable<Temperature>,
        /// Nominal temperature, inside the range.
        optional nominal: Quantity<Nominal>,
    }
}

/// What makes the reference current.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum From {
    /// A source outside the network.
    Pin,
    /// A resistor from the supply, part of the network.
    Resistor,
}

choice! {
    From = "origin of the reference" {
        "pin" => From::Pin,
        "resistor" => From::Resistor,
    }
}

choice! {
    Flow = "direction" {
        "into network" => Flow::IntoNetwork,
        "out of network" => Flow::OutOfNetwork,
    }
}

choice! {
    Rail = "kind" {
        "sink" => Rail::Sink,
        "source" => Rail::Source,
    }
}

choice! {
    AccuracyOf = "measure of accuracy" {
        "current" => AccuracyOf::Current,
        "ratio" => AccuracyOf::Ratio,
    }
}

choice! {
    Effort = "effort" {
        "quick" => Effort::Quick,
        "normal" => Effort::Normal,
        "thorough" => Effort::Thorough,
    }
}

record! {
    /// Where the one current comes from: a pin, or a resistor from the supply.
    ReferenceFile = "the reference" {
        /// Its nominal value.
        required current: Quantity<ReferenceCurrent>,
        /// What makes it: pin (a source outside, the default) or resistor (from the supply into a
        /// sink-side input leg; part of the network and of its area).
        optional from: From,
        /// Which way it flows at the pin: into network feeds a sink-side input leg, out of network
        /// a source-side one. Needed with a pin.
        optional flows: Flow,
        /// Voltage of the pin, to ground, over which its source works. Needed with a pin.
        optional range: Span<PinRange>,
        /// How many equal currents are on offer; 1 if left out.
        optional copies: Whole<1, 64>,
        /// Accuracy of the current itself; exact if left out. Counts against outputs that are held
        /// to their current, not against those held to their ratio.
        optional tolerance: Quantity<Tolerance>,
    }
}

record! {
    /// A current wanted.
    OutputFile = "an output" {
        /// Unique name: letters, digits and underscores, a letter first.
        required name: Name,
        /// sink (into an n-channel leg to ground) or source (out of a p-channel leg to the supply).
        required kind: Rail,
        /// How much; or give a ratio.
        optional current: Quantity<OutputCurrent>,
        /// How much of the reference current, such as 2 or 1/200; or give a current.
        optional ratio: Fraction<Ratio>,
        /// How many equal ones; 1 if left out.
        optional count: Whole<1, 1000>,
        /// Voltage between the pin and its own rail over which it must work: above ground for a
        /// sink, below the supply for a source.
        required range: Span<OutputRange>,
        /// Permitted current error, systematic and mismatch together; not held to any if left out.
        optional accuracy: Either<Quantity<Accuracy>, AccuracyFile>,
        /// Least output resistance at the low end of the range; not held to any if left out.
        optional output_resistance: Quantity<OutputResistance>,
    }
}

record! {
    /// Accuracy in the long form.
    AccuracyFile = "the accuracy" {
        /// Permitted current error, systematic and mismatch together.
        required limit: Quantity<Accuracy>,
        /// Held to the stated current, or to its ratio to the actual reference; if left out, to
        /// whichever of the two the output is given by.
        optional of: AccuracyOf,
        /// Standard deviations of mismatch that count; 3 if left out.
        optional sigma: Quantity<Sigma>,
    }
}

record! {
    /// Budgets of the whole network.
    LimitsFile = "the limits" {
        /// Total area.
        optional area: Quantity<Area>,
        /// Supply current of everything that is not an output.
        optional overhead_current: Quantity<OverheadCurrent>,
        /// Overhead current times the largest supply.
        optional power: Quantity<Power>,
    }
}

record! {
    /// How hard to look, and from which seed.
    SearchFile = "the search" {
        /// quick, normal or thorough; normal if left out.
        optional effort: Effort,
        /// Same spec, same seed: same answer. 1 if left out.
        optional seed: Whole<0, { u64::MAX }>,
        /// Rank of the network whose limits are priced; the knee of the front if left out.
        optional price_of: Whole<1, 100>,
    }
}
