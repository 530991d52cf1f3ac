//! Quantities, diagnostics, specs and process cards.

mod curve;
