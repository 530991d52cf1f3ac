//! The one integration binary: a plain list of modules.

mod input;
mod physics;
