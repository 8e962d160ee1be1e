//! Numerical tools without any physics in them.

pub mod endpoint;
pub mod polylog;
