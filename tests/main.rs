//! All integration tests, one module per part of the program.

mod input;
mod physics;
mod report;
