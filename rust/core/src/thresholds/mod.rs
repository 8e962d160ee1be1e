//! Layer 5: from one number of flavours to the next, and the finished set of operators.

mod columns;
mod crossing;
mod operators;
mod route;

pub use operators::{BuildOptions, Evolution, build};
