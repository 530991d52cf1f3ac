//! Reading a sound spec with its shipped card, for the benches.

use biasloom::figures::FIGURES;
use biasloom::process::{self, Card};
use biasloom::spec::{self, CardFacts, Spec, Vocabulary};

/// A spec with its card.
pub fn load(path: &str) -> (Spec, Card) {
    let text = std::fs::read_to_string(path).expect("a spec that can be read");
    let figures: Vec<&str> = FIGURES.iter().map(|f| f.name()).collect();
    let cards = process::shipped_names();
    let vocabulary = Vocabulary {
        figures: &figures,
        cards: &cards,
    };
    let located = spec::read(&text, path, path, &vocabulary).expect("a sound spec");
    let card = Card::load(&located.spec.card).expect("a shipped card");
    let facts = CardFacts {
        name: card.name.clone(),
        corners: card.corners.iter().map(|c| c.name.clone()).collect(),
        supply_max: card.supply_max,
        has_resistor: card.resistor.is_some(),
    };
    let spec = spec::check_against_card(located, &facts).expect("a spec that suits its card");
    (spec, card)
}
