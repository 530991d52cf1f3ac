//! All integration tests, one module per part of the program.

mod cli;
mod input;
mod job;
mod physics;
mod project;
mod report;
