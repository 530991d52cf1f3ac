//! Figures of merit: one file each, registered in [`FIGURES`], all computed from the readings of a
//! network solved as one circuit at every corner.

pub mod area;
pub mod current_error;
pub mod error_share;
pub mod headroom_margin;
pub mod output_resistance;
pub mod overhead_current;
pub mod power;

use crate::network::Job;
use crate::network::corners::Corner;
pub use crate::network::measure::Worst;

/// Every figure, in the order of reports. A new one is a file and two lines.
pub static FIGURES: [&dyn Figure; 7] = [
    &area::Area,
    &overhead_current::OverheadCurrent,
    &power::Power,
    &current_error::CurrentError,
    &error_share::ErrorShare,
    &headroom_margin::HeadroomMargin,
    &output_resistance::OutputResistance,
];

/// One figure of merit of a network.
pub trait Figure: Sync {
    /// Name in specs, tables and files.
    fn name(&self) -> &'static str;
    /// SI unit symbol; "1" for a fraction.
    fn unit(&self) -> &'static str;
    /// Which way is better.
    fn better(&self) -> Better;
    /// What it is, in one sentence.
    fn summary(&self) -> &'static str;
    /// How it is computed.
    fn definition(&self) -> &'static str;
    /// Where it is published, or that it is our own.
    fn source(&self) -> &'static str;
    /// Its value for a network.
    fn of(&self, subject: &Subject) -> Value;
}

/// Which way a figure is better.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Better {
    /// Less is better.
    Less,
    /// More is better.
    More,
}

/// A network with everything that was read of it.
#[derive(Debug, Clone, Copy)]
pub struct Subject<'s> {
    /// The job.
    pub job: &'s Job<'s>,
    /// Area, m^2.
    pub area: f64,
    /// The corners of the readings.
    pub corners: &'s [Corner],
    /// Overhead current per corner, A.
    pub overhead: &'s [f64],
    /// Per output: the worst of each kind.
    pub outputs: &'s [Worst],
}

/// A figure's value and where it is worst.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Value {
    /// Value, SI unit.
    pub value: f64,
    /// Corner, index.
    pub corner: Option<usize>,
    /// Output, index.
    pub output: Option<usize>,
}

/// A figure by name.
pub fn named(name: &str) -> Option<&'static dyn Figure> {
    FIGURES.iter().copied().find(|f| f.name() == name)
}

/// The output with the largest `key`, first of equals.
fn worst_output(subject: &Subject, mut key: impl FnMut(&Worst) -> f64) -> Option<(usize, f64)> {
    let mut best: Option<(usize, f64)> = None;
    for (k, worst) in subject.outputs.iter().enumerate() {
        let value = key(worst);
        if best.is_none_or(|(_, b)| value > b) {
            best = Some((k, value));
        }
    }
    best
}
