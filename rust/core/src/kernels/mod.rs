//! The formulas: pure functions of z; no grid, no coupling, no nodes.

pub mod coefficients;
pub mod kernel;
pub mod matching;
pub mod splitting;
