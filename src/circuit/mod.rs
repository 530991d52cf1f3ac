//! Netlists and their DC solution; knows no mirror.
pub mod netlist;
