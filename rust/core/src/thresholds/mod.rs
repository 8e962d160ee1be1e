//! Layer 5: from one number of flavours to the next, and the finished set of operators.

mod columns;
mod crossing;
mod crossing_slope;
mod inputs;
mod leg_columns;
mod operators;
mod options;
mod prepared;
mod probes;
mod pull_back;
mod route;
mod sensitivity;
mod split;
mod vector;

pub use operators::{Evolution, build};
pub use options::BuildOptions;
pub use pull_back::{InputRows, Place, QUARKS, RowAt};
pub use sensitivity::Direction;
pub use vector::{Evolved, Vectors, evolve};
