//! Kernels and what they are computed from, against results of other origin.

#[path = "kernels/coefficients.rs"]
mod coefficients;
#[path = "kernels/massive.rs"]
mod massive;
#[path = "kernels/matching.rs"]
mod matching;
#[path = "kernels/moments.rs"]
mod moments;
#[path = "kernels/polylogarithms.rs"]
mod polylogarithms;
#[path = "kernels/splitting.rs"]
mod splitting;
