//! The main job: from a spec to a front of verified networks, held against outside values.

mod advice;
mod assembly;
mod build;
mod catalogue;
mod demos;
mod determinism;
mod front;
mod outside;
mod paper;
mod prices;
mod proof;
mod remeasure;
mod robustness;
mod screening;
mod structure;

use biasloom::explore::{Outcome, Silent, explore};
use biasloom::figures::FIGURES;
use biasloom::network::Job;
use biasloom::process::{self, Card};
use biasloom::spec::{self, CardFacts, Effort, Spec, Vocabulary};
use std::sync::atomic::AtomicBool;

/// A checked spec with its card.
pub struct Task {
    pub spec: Spec,
    pub card: Card,
}

impl Task {
    /// Reads a spec as the program would.
    pub fn read(name: &str, text: &str) -> Task {
        let figures: Vec<&str> = FIGURES.iter().map(|f| f.name()).collect();
        let cards = process::shipped_names();
        let vocabulary = Vocabulary {
            figures: &figures,
            cards: &cards,
        };
        let shown = format!("{name}.yaml");
        let located = spec::read(text, name, &shown, &vocabulary)
            .unwrap_or_else(|faults| panic!("{}", faults.render(false)));
        let card = Card::load(&located.spec.card)
            .unwrap_or_else(|faults| panic!("{}", faults.render(false)));
        let facts = CardFacts {
            name: card.name.clone(),
            corners: card.corners.iter().map(|c| c.name.clone()).collect(),
            supply_max: card.supply_max,
            has_resistor: card.resistor.is_some(),
        };
        let spec = spec::check_against_card(located, &facts)
            .unwrap_or_else(|faults| panic!("{}", faults.render(false)));
        Task { spec, card }
    }

    /// One of `specs/`, at an effort.
    pub fn shipped(name: &str, effort: Effort) -> Task {
        let path = format!("{}/specs/{name}.yaml", env!("CARGO_MANIFEST_DIR"));
        let text = std::fs::read_to_string(path).expect("a shipped spec");
        let mut task = Task::read(name, &text);
        task.spec.search.effort = effort;
        task
    }

    pub fn job(&self) -> Job<'_> {
        Job {
            spec: &self.spec,
            card: &self.card,
        }
    }

    pub fn explore(&self) -> Outcome {
        explore(&self.job(), &Silent, &AtomicBool::new(false))
    }
}
