//! Quantities, diagnostics, specs and process cards.

mod cards;
mod curve;
