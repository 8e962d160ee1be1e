//! Coefficient functions: at single points, as matrices on a grid, as rows for single values of x.

use crate::arrays::{copied, count, handed_over, slice};
use crate::detached;
use crate::errors::input;
use crate::grid::Grid;
use crate::kernels::{Parts, channel, distances, parts};
use numpy::{PyArrayDyn, PyReadonlyArray1};
use pyo3::prelude::*;
use scalewright_core::convolution::{coefficients_on, convolve_values, kernels_on, massive_rows as core_rows};
use scalewright_core::kernels::coefficients::{self, Coefficient, Massive, StructureFunction};
use scalewright_core::kernels::splitting;
use scalewright_core::numerics::blocks::Matrix;
use scalewright_core::numerics::endpoint::Logarithms;

/// All threads.
const ALL: usize = 0;

#[pyfunction]
pub fn splitting_matrix(
    py: Python<'_>,
    grid: &Grid,
    order: i64,
    channel: &str,
    nf: i64,
) -> PyResult<Py<PyArrayDyn<f64>>> {
    let order = up_to(py, order, splitting::ORDERS - 1)?;
    let (channel, nf) = (self::channel(py, channel)?, count(py, "nf", nf)?);
    let set = detached::run(py, ALL, None, |watch| kernels_on(&grid.core, watch))?;
    square(py, &set.splitting(order, channel, nf as f64).matrix)
}

#[pyfunction]
pub fn coefficient_matrix(
    py: Python<'_>,
    grid: &Grid,
    order: i64,
    structure_function: &str,
    coefficient: &str,
    nf: i64,
) -> PyResult<Py<PyArrayDyn<f64>>> {
    let (function, coefficient) = named(py, structure_function, coefficient)?;
    let order = up_to(py, order, function.highest_order())?;
    let nf = count(py, "nf", nf)?;
    let set = detached::run(py, ALL, None, |watch| coefficients_on(&grid.core, watch))?;
    square(py, &set.matrix(order, function, coefficient, nf as f64))
}

/// A kernel of the user, its regular part at the points of `Grid.quadrature_z`.
#[pyfunction]
pub fn convolution_matrix(
    py: Python<'_>,
    grid: &Grid,
    regular: PyReadonlyArray1<'_, f64>,
    plus: PyReadonlyArray1<'_, f64>,
    local: f64,
) -> PyResult<Py<PyArrayDyn<f64>>> {
    let (regular, plus) = (slice(py, "regular", &regular)?, slice(py, "plus", &plus)?);
    let kernel = detached::run(py, ALL, None, |watch| convolve_values(&grid.core, regular, plus, local, watch))?;
    square(py, &kernel.matrix)
}

#[pyfunction]
pub fn massive_rows(
    py: Python<'_>,
    grid: &Grid,
    what: &str,
    x: PyReadonlyArray1<'_, f64>,
    q2: PyReadonlyArray1<'_, f64>,
    mass: f64,
) -> PyResult<Py<PyArrayDyn<f64>>> {
    let what = massive(py, what)?;
    let (x, q2) = (slice(py, "x", &x)?, slice(py, "q2", &q2)?);
    let rows = detached::run(py, ALL, None, |watch| core_rows(&grid.core, what, x, q2, mass, watch))?;
    handed_over(py, &[x.len(), grid.core.nodes()], rows)
}

#[pyfunction]
pub fn coefficient_function<'py>(
    py: Python<'py>,
    order: i64,
    structure_function: &str,
    coefficient: &str,
    nf: i64,
    z: PyReadonlyArray1<'_, f64>,
    one_minus_z: PyReadonlyArray1<'_, f64>,
) -> PyResult<Parts<'py>> {
    let (function, coefficient) = named(py, structure_function, coefficient)?;
    let order = up_to(py, order, function.highest_order())?;
    let nf = count(py, "nf", nf)?;
    parts(py, &coefficients::kernel(order, function, coefficient), nf as f64, &z, &one_minus_z)
}

#[pyfunction]
pub fn massive_coefficient<'py>(
    py: Python<'py>,
    what: &str,
    w: PyReadonlyArray1<'_, f64>,
    one_minus_w: PyReadonlyArray1<'_, f64>,
    q2: f64,
    mass: f64,
) -> PyResult<Parts<'py>> {
    let what = massive(py, what)?;
    for (name, value) in [("q2", q2), ("mass", mass)] {
        if !(value > 0.0 && value.is_finite()) {
            return Err(input(py, format!("{name} = {value:?}: it must be positive and finite")));
        }
    }
    let kernel = what.at(q2, mass);
    let values: Vec<f64> =
        distances(py, &w, &one_minus_w)?.into_iter().map(|t| kernel.regular(&Logarithms::at(t))).collect();
    Ok((copied(py, &values), copied(py, &kernel.plus), kernel.local))
}

fn square(py: Python<'_>, matrix: &Matrix) -> PyResult<Py<PyArrayDyn<f64>>> {
    let values = (0..matrix.rows()).flat_map(|i| matrix.row(i).iter().copied()).collect();
    handed_over(py, &[matrix.rows(), matrix.cols()], values)
}

fn up_to(py: Python<'_>, order: i64, highest: usize) -> PyResult<usize> {
    let order = count(py, "order", order)?;
    if order > highest {
        return Err(input(py, format!("order = {order}: it must be from 0 to {highest}")));
    }
    Ok(order)
}

fn named(py: Python<'_>, function: &str, coefficient: &str) -> PyResult<(StructureFunction, Coefficient)> {
    Ok((
        chosen(py, "structure_function", function, StructureFunction::ALL, StructureFunction::name)?,
        chosen(py, "coefficient", coefficient, Coefficient::ALL, Coefficient::name)?,
    ))
}

fn massive(py: Python<'_>, what: &str) -> PyResult<Massive> {
    chosen(py, "what", what, Massive::ALL, Massive::name)
}

/// The entry of that name.
fn chosen<T: Copy, const N: usize>(
    py: Python<'_>,
    argument: &str,
    given: &str,
    all: [T; N],
    name: fn(T) -> &'static str,
) -> PyResult<T> {
    all.into_iter().find(|&entry| name(entry) == given).ok_or_else(|| {
        let names = all.map(name);
        input(py, format!("{argument} = {given:?}: it must be one of {names:?}"))
    })
}
