//! Layer 5: from one number of flavours to the next, and the finished set of operators.

mod columns;
mod crossing;
mod crossing_slope;
mod inputs;
mod operators;
mod options;
mod prepared;
mod pull_back;
mod route;
mod sensitivity;
mod vector;

pub use operators::{Evolution, build};
pub use options::BuildOptions;
pub use pull_back::{InputRows, Place, QUARKS, RowAt};
pub use sensitivity::Direction;
pub use vector::{Vectors, evolve};
