//! Every format, rendered from one shared outcome.

mod deck;
mod fixture;
mod format;
mod front;
mod json;
mod page;
mod snapshots;
mod write;
