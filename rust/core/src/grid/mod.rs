//! Layer 1: where x lives. Panels in `u = ln(1/x)` with Chebyshev nodes in each.

mod interpolate;
mod panels;
mod resolution;

pub use panels::{Grid, Resolution};
