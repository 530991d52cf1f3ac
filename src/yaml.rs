//! Reading YAML files so that every fault is reported at once, with its exact place.
//!
//! A text becomes a tree of [`Node`]s that keeps duplicate keys; a [`Reader`] walks the tree by the
//! tables that `record!` and `choice!` define and collects faults; the same tables write the JSON
//! Schema, so that the two cannot disagree. Places are looked up afterwards, one fault at a time:
//! the parser tells a position only when it fails, so a second walk fails on purpose at the node in
//! question.
//!
//! Stands between the files' own modules and `units` and `diag`.

mod kinds;
mod node;
mod reader;
mod record;

pub use kinds::{
    Choice, Either, Fixable, Fraction, List, Measure, Name, Quantity, Span, Text, Whole,
    read_choice,
};
pub(crate) use kinds::{choice, quantities};
pub use node::{Node, Source, Value};
pub use reader::{At, Entry, Read, Reader, Slots, described};
pub(crate) use record::record;
