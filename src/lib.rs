//! biasloom: from a table of bias-current requirements to verified networks of MOS mirrors.
//!
//! A spec comes in, becomes candidates, becomes networks, becomes a report: [`spec`] and [`process`]
//! read what is asked and what the silicon does, [`explore`] is the pipeline, and [`report`] lays
//! out what it ends in. A module uses only those below it; DEVELOPERS.md shows the order, and how to
//! add a cell, a figure or a format.
//!
//! ```
//! use biasloom::explore::{Silent, explore};
//! use biasloom::network::Job;
//! use biasloom::process::Card;
//! use biasloom::spec::{CardFacts, Vocabulary, check_against_card, read};
//! use std::sync::atomic::AtomicBool;
//!
//! let text = "
//! card: textbook-basic
//! supply: 3 V
//! temperature: 27 degC
//! corners: [TT]
//! reference: { current: 100 uA, flows: into network, range: 0 V to 2 V }
//! outputs:
//!   - { name: tail, kind: sink, current: 100 uA, range: 0.5 V to 2 V, accuracy: 5 % }
//! search: { effort: quick }
//! ";
//! let words = Vocabulary { figures: &["area", "overhead_current"], cards: &["textbook-basic"] };
//! let located = read(text, "tail", "tail.yaml", &words).map_err(|faults| faults.render(false))?;
//! let card = Card::load(&located.spec.card).map_err(|faults| faults.render(false))?;
//! let facts = CardFacts {
//!     name: card.name.clone(),
//!     corners: card.corner_names().into_iter().map(str::to_owned).collect(),
//!     supply_max: card.supply_max,
//!     has_resistor: card.resistor.is_some(),
//! };
//! let spec = check_against_card(located, &facts).map_err(|faults| faults.render(false))?;
//! let job = Job { spec: &spec, card: &card };
//! let outcome = explore(&job, &Silent, &AtomicBool::new(false));
//! assert!(!outcome.front.is_empty());
//! for network in &outcome.front {
//!     assert!(network.broken.is_empty());
//!     assert!(network.outputs[0].error <= 0.05);
//! }
//! # Ok::<(), String>(())
//! ```

pub mod assembly;
pub mod cells;
pub mod circuit;
pub mod cli;
pub mod device;
pub mod diag;
pub mod explore;
pub mod figures;
pub mod front;
pub mod network;
pub mod numeric;
pub mod process;
pub mod proof;
pub mod report;
pub mod search;
pub mod spec;
pub mod units;
pub mod yaml;

/// The listings of DEVELOPERS.md, run by `cargo test`.
#[cfg(doctest)]
#[doc = include_str!("../DEVELOPERS.md")]
pub struct Developers;
