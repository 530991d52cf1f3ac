//! Netlists and their DC solution in eight lanes; knows no mirror.
//!
//! [`netlist`] is what is drawn, [`dc`] solves it, [`small_signal`] differentiates the solution.

pub mod dc;
pub mod netlist;
pub mod small_signal;
