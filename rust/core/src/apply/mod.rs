//! Layer 6: operators applied to densities, and to other operators.

mod batch;
mod compose;
mod recombine;

pub use batch::{Batch, apply};
pub use compose::{Composed, Set, compose};
pub use recombine::Blocks;

pub use crate::evolution::check_flavour;
