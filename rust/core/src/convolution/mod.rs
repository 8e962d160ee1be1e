//! Layer 3: a formula and a grid make a matrix.
//!
//! With `F(x) = x f(x)`, `x (P * f)(x) = int_x^1 dz P(z) F(x/z)`; in nodes `K[i][j] = int dz P(z) L_j(x_i/z)`.

mod below;
mod coefficients;
mod formulas;
mod kept;
mod matrices;
mod points;
mod rows;
mod store;

pub use coefficients::{CoefficientSet, coefficients_on};
pub use matrices::Convolved;
pub use points::quadrature_z;
pub use rows::massive_rows;
pub use store::{Derived, KernelSet, convolve_values, kernels_on};
