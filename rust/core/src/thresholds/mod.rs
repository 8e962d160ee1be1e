//! Layer 5: from one number of flavours to the next, and the finished set of operators.

mod columns;
mod crossing;
mod operators;
mod route;
mod vector;

pub use operators::{BuildOptions, Evolution, build};
pub use vector::{Vectors, evolve};
