//! Layer 0: numerical mathematics without a word of physics.

pub mod blocks;
pub mod chebyshev;
mod collocation;
mod dense;
pub mod endpoint;
pub mod gauss_legendre;
pub mod left_product;
pub mod matrix_ode;
pub mod polylog;
