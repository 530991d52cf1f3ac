//! Reading a spec with its process card.

use crate::diag::{Diagnostic, Diagnostics};
use crate::figures::FIGURES;
use crate::process::{Card, Loaded, shipped_names};
use crate::spec::{self, CardFacts, Spec, Vocabulary};
use std::path::Path;

/// A spec and its card, both checked.
pub struct Input {
    /// What is asked.
    pub spec: Spec,
    /// The process.
    pub card: Card,
    /// What can be used, but hardly as intended.
    pub warnings: Diagnostics,
}

/// Reads a spec and the card it names.
///
/// # Errors
/// Every fault of the spec; if it has none, every fault of the card; if that has none either, every
/// fault that shows only when the two are seen together.
pub fn read(path: &Path) -> Result<Input, Diagnostics> {
    let figures: Vec<&str> = FIGURES.iter().map(|figure| figure.name()).collect();
    let cards = shipped_names();
    let vocabulary = Vocabulary {
        figures: &figures,
        cards: &cards,
    };
    let located = spec::load(path, &vocabulary)?;
    let warnings = located.warnings.clone();
    let folder = path.parent().unwrap_or(Path::new(""));
    let with_warnings = |faults: Diagnostics| {
        let mut all = warnings.clone();
        all.append(faults);
        all
    };
    let card = Loaded::load(&located.spec.card, folder)
        .map_err(with_warnings)?
        .card;
    let spec = spec::check_against_card(located, &facts(&card)).map_err(with_warnings)?;
    Ok(Input {
        spec,
        card,
        warnings,
    })
}

fn facts(card: &Card) -> CardFacts {
    CardFacts {
        name: card.name.clone(),
        corners: card.corner_names().into_iter().map(str::to_owned).collect(),
        supply_max: card.supply_max,
        has_resistor: card.resistor.is_some(),
    }
}

/// Folder of a spec's results under the working folder.
///
/// # Errors
/// The spec's name is no name of a folder (a file called `..yaml`).
pub fn results(spec: &Spec) -> Result<std::path::PathBuf, Diagnostics> {
    match spec.name.as_str() {
        "" | "." | ".." => Err(Diagnostic::error(
            "the name of the spec's file gives no name for the folder of its results",
        )
        .hint("name a folder with --out")
        .into()),
        name => Ok(Path::new("results").join(name)),
    }
}
