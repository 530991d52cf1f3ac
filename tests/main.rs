//! The one integration binary: a plain list of modules.

mod input;
//! All integration tests, one module per part of the program.

mod report;
