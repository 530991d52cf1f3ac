//! Quantities, diagnostics, specs and process cards.

mod card_faults;
mod cards;
mod curve;
mod files;
mod places;
mod schema;
mod spec_faults;
mod specs;
mod units;

use biasloom::diag::Diagnostics;
use biasloom::process;
use biasloom::spec::{self, CardFacts, Located, Spec, Vocabulary};

/// Figures as a caller would hand them in.
const FIGURES: &[&str] = &[
    "area",
    "overhead_current",
    "power",
    "current_error",
    "headroom",
];

fn read_spec(text: &str) -> Result<Located, Diagnostics> {
    let cards = process::shipped_names();
    let vocabulary = Vocabulary {
        figures: FIGURES,
        cards: &cards,
    };
    spec::read(text, "tern", "specs/tern.yaml", &vocabulary)
}

fn facts(card: &process::Card) -> CardFacts {
    CardFacts {
        name: card.name.clone(),
        corners: card
            .corners
            .iter()
            .map(|corner| corner.name.clone())
            .collect(),
        supply_max: card.supply_max,
        has_resistor: card.resistor.is_some(),
    }
}

/// A spec read and checked against its card.
fn full_spec(text: &str) -> Result<Spec, Diagnostics> {
    let located = read_spec(text)?;
    let card = process::Card::load(&located.spec.card)?;
    spec::check_against_card(located, &facts(&card))
}

/// The shipped specs: file stem and text.
fn shipped_specs() -> Vec<(String, String)> {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("specs");
    let mut specs: Vec<(String, String)> = std::fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|e| e == "yaml"))
        .map(|path| {
            let stem = path.file_stem().unwrap().to_string_lossy().into_owned();
            (stem, std::fs::read_to_string(&path).unwrap())
        })
        .collect();
    specs.sort();
    specs
}
