//! Layer 4: evolution at a fixed number of flavours.

mod fixed_flavour;
mod flavours;
mod stretch;

pub use fixed_flavour::{FixedFlavour, FurtherKernel, Sector, place};
pub use flavours::{CHARM, GLUON, HEAVY_NAMES, check_flavour};
pub use stretch::{Division, Plan, Stretch, StretchSolution};
