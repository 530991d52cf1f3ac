//! All integration tests, one module per part of the program.

mod input;
mod job;
mod physics;
mod report;
