//! The border between the core and Python: arrays, handles, errors and nothing else.

mod arrays;
mod coefficients;
mod detached;
mod errors;
mod grid;
mod kernels;
mod observables;
mod operators;
mod sensitivity;
mod theory;

use pyo3::prelude::*;

/// The compiled core.
#[pymodule(gil_used = false)]
mod _core {
    #[pymodule_export]
    use crate::coefficients::{
        coefficient_function, coefficient_matrix, convolution_matrix, massive_coefficient, massive_rows,
        splitting_matrix,
    };
    #[pymodule_export]
    use crate::grid::Grid;
    #[pymodule_export]
    use crate::kernels::{matching_element, splitting_function};
    #[pymodule_export]
    use crate::observables::light_rows;
    #[pymodule_export]
    use crate::operators::{Evolution, apply, build, compose, evolve};
    #[pymodule_export]
    use crate::theory::Theory;
}
