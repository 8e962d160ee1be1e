//! Numerical methods without any physics.

pub mod gauss_legendre;
