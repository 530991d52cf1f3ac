//! The physics from the ground up: arithmetic, transistor, circuit, published circuits.

mod devices;
mod draft;
mod numeric;
mod support;
mod textbook;
