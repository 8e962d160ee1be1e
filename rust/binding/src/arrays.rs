//! numpy arrays in and out: order and shape checked here once.

use crate::errors::input;
use numpy::ndarray::{ArrayD, IxDyn};
use numpy::{PyArrayDyn, PyReadonlyArray1, PyReadonlyArrayDyn, PyUntypedArrayMethods, ToPyArray};
use pyo3::prelude::*;

/// A one-dimensional array as a slice; it must be contiguous.
pub fn slice<'a, T: numpy::Element>(
    py: Python<'_>,
    name: &str,
    array: &'a PyReadonlyArray1<'_, T>,
) -> PyResult<&'a [T]> {
    array.as_slice().map_err(|_| input(py, format!("{name}: the array must be contiguous")))
}

/// An array of `dimensions` axes as a slice; it must be C-ordered.
pub fn block<'a>(
    py: Python<'_>,
    name: &str,
    array: &'a PyReadonlyArrayDyn<'_, f64>,
    dimensions: usize,
) -> PyResult<&'a [f64]> {
    if array.ndim() != dimensions {
        return Err(input(py, format!("{name} has {} axes: it must have {dimensions}", array.ndim())));
    }
    array.as_slice().map_err(|_| input(py, format!("{name}: the array must be C-ordered")))
}

/// Values handed to Python in a shape.
pub fn handed_over(py: Python<'_>, shape: &[usize], values: Vec<f64>) -> PyResult<Py<PyArrayDyn<f64>>> {
    let array = ArrayD::from_shape_vec(IxDyn(shape), values)
        .map_err(|error| crate::errors::internal(py, &error.to_string()))?;
    Ok(PyArrayDyn::from_owned_array(py, array).unbind())
}

/// Values copied to a one-dimensional array.
pub fn copied<'py, T: numpy::Element>(py: Python<'py>, values: &[T]) -> Bound<'py, numpy::PyArray1<T>> {
    values.to_pyarray(py)
}

/// An integer as a count.
pub fn count(py: Python<'_>, name: &str, value: i64) -> PyResult<usize> {
    usize::try_from(value).map_err(|_| input(py, format!("{name} = {value}: it must not be negative")))
}
