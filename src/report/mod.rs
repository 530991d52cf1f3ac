//! Reports: an [`Outcome`] in, bytes out. A format lays out what the outcome holds and computes
//! nothing; each is one file with one line in [`FORMATS`].

pub mod chart;
pub mod csv;
pub mod deck;
pub mod devices;
pub mod format;
pub mod json;
pub mod page;
pub mod picture;
pub mod terminal;
pub mod view;
pub mod words;
pub mod write;

use crate::explore::Outcome;
use std::path::PathBuf;

/// Files of a rendered report: paths relative to the results folder, and their bytes.
pub type Files = Vec<(PathBuf, Vec<u8>)>;

/// One way to write an outcome down.
#[derive(Debug, Clone, Copy)]
pub struct Format {
    /// Name on the command line.
    pub name: &'static str,
    /// The files it writes; `NN` stands for a network's rank.
    pub files: &'static [&'static str],
    /// What they are for, one sentence.
    pub about: &'static str,
    /// Renders an outcome; the same outcome gives the same bytes.
    pub render: fn(&Outcome) -> Files,
}

/// Every format, in the order they are listed.
pub const FORMATS: [Format; 6] = [
    page::FORMAT,
    csv::FORMAT,
    json::FORMAT,
    deck::FORMAT,
    devices::FORMAT,
    picture::FORMAT,
];

/// A format by its name.
pub fn format_named(name: &str) -> Option<&'static Format> {
    FORMATS.iter().find(|format| format.name == name)
}

/// Renders an outcome in every one of `formats`, in their order.
pub fn render(outcome: &Outcome, formats: &[Format]) -> Files {
    formats
        .iter()
        .flat_map(|format| (format.render)(outcome))
        .collect()
}
