//! One set of operators after another.

use super::recombine::{Blocks, Channel};
use crate::error::{Error, Result};
use crate::numerics::blocks::{Matrix, multiply_add};

/// A set at one scale: names, number of light flavours, one matrix a block.
#[derive(Debug, Clone)]
pub struct Set {
    /// Names and number of light flavours.
    pub blocks: Blocks,
    /// The blocks.
    pub values: Vec<Matrix>,
}

/// `second` after `first`: names, number of light flavours and values `(scale, block, node, node)`.
///
/// Where `second` has more light flavours than `first`, its light sum is first split into the light sum of `first` and
/// single flavours; where it has fewer, that of `first` is.
///
/// # Errors
/// [`Error::Argument`] where `second` needs an input that `first` does not give.
pub fn compose(first: &Set, second: &[Set]) -> Result<(Vec<String>, usize, Vec<f64>)> {
    let _ = (first, second);
    Err(Error::Argument {
        name: "operators",
        value: "two sets".into(),
        allowed: "composition is not written yet".into(),
    })
}

#[allow(dead_code)]
fn placeholder(target: &mut Matrix, a: &Matrix, b: &Matrix) {
    let n = a.rows();
    multiply_add(target.part_mut(0..n, 0..n), 1.0, a.part(0..n, 0..n), b.part(0..n, 0..n));
    let _ = Channel::Gluon;
}
