//! Layer 5: from one number of flavours to the next, and the finished set of operators.

mod columns;
mod crossing;
mod inputs;
mod leg_columns;
mod operators;
mod options;
mod prepared;
mod probes;
mod route;
mod vector;

pub use operators::{Evolution, build};
pub use options::BuildOptions;
pub use vector::{Evolved, Vectors, evolve};
