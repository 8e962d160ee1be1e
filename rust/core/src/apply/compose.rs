//! One set of operators after another.
//!
//! Where a set has L flavours that act alike, a sum over l of them, or one alone, goes by the same blocks: with `ns`
//! acting on what a flavour differs from the mean and `C` on the sum of all, the sum over l becomes
//! `ns (q_l - l/L q_L) + l/L C q_L`. So both sets are read with the smaller of their numbers of light flavours.

use super::recombine::{Blocks, Channel};
use crate::error::Result;
use crate::evolution::CHARM;
use crate::numerics::blocks::{Matrix, multiply_add};

/// A set at one scale: what its blocks are called, and one matrix a block.
#[derive(Debug, Clone)]
pub struct Set {
    /// Names and number of light flavours.
    pub blocks: Blocks,
    /// The blocks.
    pub values: Vec<Matrix>,
}

/// The composed set: names, number of light flavours, and blocks for each scale of the second.
pub type Composed = (Vec<String>, usize, Vec<Vec<Matrix>>);

/// `second` (at several scales) after `first`.
///
/// # Errors
/// None of its own; sets that do not fit are for the caller to refuse.
pub fn compose(first: &Set, second: &[Set]) -> Result<Composed> {
    let light = second.iter().map(|set| set.blocks.light).fold(first.blocks.light, usize::min);
    let Some(example) = second.first() else {
        return Ok((first.blocks.names().to_vec(), light, vec![]));
    };
    let pairs: Vec<(Channel, Channel)> = channels(light)
        .iter()
        .flat_map(|&output| channels(light).into_iter().map(move |input| (output, input)))
        .filter(|(output, input)| output.is_plus() == input.is_plus())
        .filter(|&(output, input)| joins(first, example, light, output, input) && stored(first, example, output, input))
        .collect();
    let has_minus = [first, example].iter().any(|set| set.blocks.has("ns-"));
    let mut names: Vec<String> =
        pairs.iter().map(|(output, input)| format!("{}<-{}", output.name(), input.name())).collect();
    names.push("ns+".into());
    if has_minus {
        names.push("ns-".into());
    }
    let values = second
        .iter()
        .map(|set| {
            let mut blocks: Vec<Matrix> =
                pairs.iter().map(|&(output, input)| product(first, set, light, output, input)).collect();
            for plus in [true, false].into_iter().take(1 + usize::from(has_minus)) {
                let both = (set.blocks.difference(plus), first.blocks.difference(plus));
                if let (Some(after), Some(before)) = both {
                    blocks.push(multiplied(&set.values[after], &first.values[before]));
                }
            }
            blocks
        })
        .collect();
    Ok((names, light, values))
}

/// Every channel of a set with this number of light flavours.
fn channels(light: usize) -> Vec<Channel> {
    let heavy = (light + 1).max(CHARM)..=6;
    let plus = [Channel::Gluon, Channel::LightPlus].into_iter().chain(heavy.clone().map(Channel::HeavyPlus));
    plus.chain([Channel::LightMinus]).chain(heavy.map(Channel::HeavyMinus)).collect()
}

/// Whether a block of differences between quarks and antiquarks need be stored: not where it falls back to `ns-`.
fn stored(first: &Set, second: &Set, output: Channel, input: Channel) -> bool {
    let same_light = first.blocks.light == second.blocks.light;
    let named = |set: &Set| set.blocks.has("light-<-light-");
    output.is_plus() || !same_light || named(first) || named(second) || (output, input) != LIGHT_MINUS
}

const LIGHT_MINUS: (Channel, Channel) = (Channel::LightMinus, Channel::LightMinus);

/// Whether any intermediate channel joins input and output.
fn joins(first: &Set, second: &Set, light: usize, output: Channel, input: Channel) -> bool {
    channels(light).into_iter().any(|middle| {
        between(second, light, output, middle).is_some() && between(first, light, middle, input).is_some()
    })
}

fn product(first: &Set, second: &Set, light: usize, output: Channel, input: Channel) -> Matrix {
    let n = first.values[0].rows();
    let mut sum = Matrix::zeros(n, n);
    for middle in channels(light) {
        let both = (between(second, light, output, middle), between(first, light, middle, input));
        if let (Some(after), Some(before)) = both {
            sum.add_scaled(1.0, &multiplied(&after, &before));
        }
    }
    sum
}

fn multiplied(left: &Matrix, right: &Matrix) -> Matrix {
    let n = left.rows();
    let mut product = Matrix::zeros(n, n);
    multiply_add(product.part_mut(0..n, 0..n), 1.0, left.part(0..n, 0..n), right.part(0..n, 0..n));
    product
}

/// The block between two channels of a set read with `light` light flavours; `None` where it vanishes.
fn between(set: &Set, light: usize, output: Channel, input: Channel) -> Option<Matrix> {
    let blocks = &set.blocks;
    let of_set = |channel: Channel| -> Channel {
        match channel {
            Channel::HeavyPlus(flavour) if flavour <= blocks.light => Channel::LightPlus,
            Channel::HeavyMinus(flavour) if flavour <= blocks.light => Channel::LightMinus,
            other => other,
        }
    };
    let share = |channel: Channel| match channel {
        Channel::LightPlus | Channel::LightMinus => light as f64 / blocks.light as f64,
        other if of_set(other) != other => 1.0 / blocks.light as f64,
        _ => 1.0,
    };
    let (whole_out, whole_in) = (of_set(output), of_set(input));
    let common = blocks.between(whole_out, whole_in).map(|block| set.values[block].clone());
    let both_light = whole_out == whole_in && matches!(whole_in, Channel::LightPlus | Channel::LightMinus);
    if !both_light {
        return common.map(|block| scaled(block, share(output)));
    }
    let difference = &set.values[blocks.difference(output.is_plus())?];
    let mut off_mean = common?;
    off_mean.add_scaled(-1.0, difference);
    let mut block = scaled(off_mean, share(output));
    if output == input {
        block.add_scaled(1.0, difference);
    }
    Some(block)
}

fn scaled(mut matrix: Matrix, factor: f64) -> Matrix {
    matrix.scale(factor);
    matrix
}
