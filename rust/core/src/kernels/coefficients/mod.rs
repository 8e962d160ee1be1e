//! Coefficient functions.

mod charged;
mod heavy;
mod massive;

pub use massive::{Massive, MassiveKernel};
