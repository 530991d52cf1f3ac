//! The loop, the grid, screening and polish; no mirror and no electricity beyond what the cells
//! and figures say.

pub mod pool;
