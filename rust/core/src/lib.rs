//! Evolution of parton densities on a Chebyshev x-grid.
//!
//! Conventions: `a = alpha_s/(4 pi)`; scales are squared and in GeV^2; densities are always `F(x) = x f(x)`;
//! `u = ln(1/x)`; `d f / d ln mu^2 = sum_k a^(k+1) P_k * f` in the MS-bar scheme.
//!
//! The pipeline, each module knowing only those before it:
//!
//! - [`error`], [`watch`], [`threads`]: what can go wrong, who may stop long work, who does it;
//! - [`numerics`]: Chebyshev nodes, quadrature, polylogarithms, block matrices, linear equations in one variable;
//! - [`colour`]: the colour factors of SU(3);
//! - [`grid`]: where x lives;
//! - [`coupling`]: where the scale lives: running, decoupling, masses;
//! - [`theory`]: what a build is told;
//! - [`kernels`]: the formulas, pure functions of z;
//! - [`convolution`]: a formula and a grid make a matrix;
//! - [`evolution`]: from scale to scale at fixed nf;
//! - [`thresholds`]: from one nf to the next, and the finished set of operators;
//! - [`apply`]: operators applied to densities, and to other operators;
//! - [`observables`]: structure functions at points, and their rows carried back to the input.
#![deny(missing_docs)]

pub mod apply;
pub mod colour;
pub mod convolution;
pub mod coupling;
pub mod error;
pub mod evolution;
pub mod grid;
pub mod kernels;
pub mod numerics;
pub mod observables;
pub mod theory;
pub mod threads;
pub mod thresholds;
pub mod watch;
