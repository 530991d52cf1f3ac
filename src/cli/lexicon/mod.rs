//! Everything that has a name, gathered from the catalogues: what `list` lists and `explain`
//! explains. A new cell, figure, format, key or card appears here by itself.

mod corners;
mod keys;
mod parts;
mod terms;

pub use parts::PARTS;

use crate::cells::CELLS;
use crate::figures::{Better, FIGURES};
use crate::process::{Loaded, SHIPPED};
use crate::report::FORMATS;
use crate::{process, spec};
use clap::ValueEnum;
use std::path::Path;

/// What kind of thing a word names.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, ValueEnum)]
#[value(rename_all = "snake_case")]
pub enum Kind {
    /// Mirror circuits.
    Cells,
    /// Figures of merit.
    Figures,
    /// Keys of a spec.
    SpecKeys,
    /// Keys of a process card.
    CardKeys,
    /// Process cards that come with the program.
    Cards,
    /// Formats of a report.
    Formats,
    /// Process corners of the shipped cards.
    Corners,
    /// Parts of an error budget.
    ErrorParts,
    /// Words of the trade, and our own.
    Terms,
}

impl Kind {
    /// Every kind, in the order of reports.
    pub const ALL: [Kind; 9] = [
        Kind::Cells,
        Kind::Figures,
        Kind::SpecKeys,
        Kind::CardKeys,
        Kind::Cards,
        Kind::Formats,
        Kind::Corners,
        Kind::ErrorParts,
        Kind::Terms,
    ];

    /// Its name on the command line.
    pub fn name(self) -> &'static str {
        match self {
            Kind::Cells => "cells",
            Kind::Figures => "figures",
            Kind::SpecKeys => "spec_keys",
            Kind::CardKeys => "card_keys",
            Kind::Cards => "cards",
            Kind::Formats => "formats",
            Kind::Corners => "corners",
            Kind::ErrorParts => "error_parts",
            Kind::Terms => "terms",
        }
    }

    /// What one of it is called.
    pub fn one(self) -> &'static str {
        match self {
            Kind::Cells => "cell",
            Kind::Figures => "figure",
            Kind::SpecKeys => "key of a spec",
            Kind::CardKeys => "key of a process card",
            Kind::Cards => "shipped process card",
            Kind::Formats => "format",
            Kind::Corners => "process corner",
            Kind::ErrorParts => "part of an error budget",
            Kind::Terms => "term",
        }
    }

    /// What they are, after their number.
    pub fn about(self) -> &'static str {
        match self {
            Kind::Cells => "mirror circuits that a network may be built of",
            Kind::Figures => "figures of merit; any of them may span the front",
            Kind::SpecKeys => "keys of a spec, the table of currents you write",
            Kind::CardKeys => "keys of a process card, what the silicon does",
            Kind::Cards => "process cards that come with the program",
            Kind::Formats => "formats of a report",
            Kind::Corners => "process corners of the shipped cards",
            Kind::ErrorParts => "parts of an error budget",
            Kind::Terms => "words of the trade, and our own",
        }
    }
}

/// One word and what it means.
#[derive(Debug, Clone, PartialEq)]
pub struct Entry {
    /// What kind of thing it names.
    pub kind: Kind,
    /// The word, unique within its kind; a key carries its tables, such as `outputs.range`.
    pub word: String,
    /// What it is, one sentence.
    pub summary: String,
    /// A drawing in text.
    pub drawing: Option<String>,
    /// More, paragraph by paragraph.
    pub text: Vec<String>,
    /// Where it is published or where it comes from.
    pub source: Option<String>,
}

impl Entry {
    fn new(kind: Kind, word: impl Into<String>, summary: impl Into<String>) -> Entry {
        Entry {
            kind,
            word: word.into(),
            summary: summary.into(),
            drawing: None,
            text: Vec::new(),
            source: None,
        }
    }

    fn says(mut self, paragraph: impl Into<String>) -> Entry {
        self.text.push(paragraph.into());
        self
    }

    fn from(mut self, source: impl Into<String>) -> Entry {
        self.source = Some(source.into());
        self
    }

    /// The word without its tables.
    pub fn last(&self) -> &str {
        match self.kind {
            Kind::SpecKeys | Kind::CardKeys => self.word.rsplit('.').next().unwrap_or(&self.word),
            _ => &self.word,
        }
    }
}

/// Every entry, kind by kind.
pub fn lexicon() -> Vec<Entry> {
    let mut all = Vec::new();
    all.extend(cells());
    all.extend(figures());
    all.extend(keys::of(Kind::SpecKeys, &spec::schema()));
    all.extend(keys::of(Kind::CardKeys, &process::schema()));
    all.extend(cards());
    all.extend(formats());
    all.extend(corners::entries());
    all.extend(parts::entries());
    all.extend(terms::entries());
    all
}

fn cells() -> Vec<Entry> {
    CELLS
        .iter()
        .map(|cell| Entry {
            drawing: Some(cell.drawing().to_owned()),
            ..Entry::new(Kind::Cells, cell.name(), cell.summary())
                .says(cell.how())
                .from(cell.source())
        })
        .collect()
}

fn figures() -> Vec<Entry> {
    FIGURES
        .iter()
        .map(|figure| {
            let better = match figure.better() {
                Better::Less => "Less is better",
                Better::More => "More is better",
            };
            let unit = match figure.unit() {
                "1" => "a fraction, shown in per cent".to_owned(),
                unit => format!("SI unit {unit}"),
            };
            Entry::new(Kind::Figures, figure.name(), figure.summary())
                .says(figure.definition())
                .says(format!("{better}; {unit}."))
                .from(figure.source())
        })
        .collect()
}

/// A shipped card opens with a comment that says what it is for.
fn cards() -> Vec<Entry> {
    SHIPPED
        .iter()
        .map(|(name, text)| {
            let comment: Vec<&str> = text
                .lines()
                .map_while(|line| line.strip_prefix('#'))
                .map(str::trim)
                .collect();
            let title = match Loaded::load(name, Path::new("")) {
                Ok(loaded) => loaded.card.title,
                Err(faults) => faults.render(false),
            };
            Entry::new(Kind::Cards, *name, title).says(comment.join(" "))
        })
        .collect()
}

fn formats() -> Vec<Entry> {
    FORMATS
        .iter()
        .map(|format| {
            let files = format.files.join(", ");
            let numbered = if files.contains("NN") {
                "; NN is the rank of a network"
            } else {
                ""
            };
            Entry::new(Kind::Formats, format.name, format.about)
                .says(format!("Files: {files}{numbered}."))
        })
        .collect()
}
