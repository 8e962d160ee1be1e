//! Layer 7: from densities to what would be measured.

mod forward;
mod structure_functions;

pub use crate::thresholds::QUARKS;
pub use forward::{Batch, CHANNELS, pull_back};
pub use structure_functions::{Factors, Part, Term, light_rows};
