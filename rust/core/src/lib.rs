//! Evolution of parton densities on a Chebyshev x-grid.
//!
//! Conventions: `a = alpha_s/(4 pi)`; scales are squared and in GeV^2; densities are always `F(x) = x f(x)`;
//! `u = ln(1/x)`; `d f / d ln mu^2 = sum_k a^(k+1) P_k * f` in the MS-bar scheme.
//!
//! The pipeline, each module knowing only those before it:
//!
//! - [`error`]: what can go wrong;
//! - [`numerics`]: numerical methods without any physics;
//! - [`coupling`]: the strong coupling over all scales and numbers of flavours;
//! - [`theory`]: what a build is told.
#![deny(missing_docs)]

pub mod coupling;
pub mod error;
pub mod numerics;
pub mod theory;
