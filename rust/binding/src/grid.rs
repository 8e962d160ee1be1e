//! The grid as a frozen handle.

use crate::arrays::{block, copied, count, handed_over, slice};
use crate::errors::{exception, input};
use numpy::{PyArray1, PyArrayDyn, PyReadonlyArray1, PyReadonlyArrayDyn, PyUntypedArrayMethods};
use pyo3::prelude::*;
use scalewright_core::convolution::quadrature_z;
use scalewright_core::grid::{Grid as CoreGrid, Resolution};

/// Nodes ordered by growing u = ln(1/x); the node x = 1 is not held.
#[pyclass(frozen, module = "scalewright._core")]
pub struct Grid {
    pub(crate) core: CoreGrid,
}

#[pymethods]
impl Grid {
    #[new]
    fn new(py: Python<'_>, edges: PyReadonlyArray1<'_, f64>, degrees: PyReadonlyArray1<'_, i64>) -> PyResult<Self> {
        let degrees: Vec<usize> =
            slice(py, "degrees", &degrees)?.iter().map(|&d| count(py, "degrees", d)).collect::<PyResult<_>>()?;
        let core = CoreGrid::new(slice(py, "edges", &edges)?, &degrees).map_err(|error| exception(py, &error))?;
        Ok(Self { core })
    }

    #[staticmethod]
    fn preset(py: Python<'_>, x_min: f64, resolution: &str) -> PyResult<Self> {
        let resolution = match resolution {
            "standard" => Resolution::Standard,
            "fine" => Resolution::Fine,
            other => {
                let message = format!("resolution = {other:?}: it must be \"standard\" or \"fine\"");
                return Err(input(py, message));
            }
        };
        let core = CoreGrid::preset(x_min, resolution).map_err(|error| exception(py, &error))?;
        Ok(Self { core })
    }

    #[getter]
    fn edges<'py>(&self, py: Python<'py>) -> Bound<'py, PyArray1<f64>> {
        copied(py, self.core.edges())
    }

    #[getter]
    fn degrees<'py>(&self, py: Python<'py>) -> Bound<'py, PyArray1<i64>> {
        let degrees: Vec<i64> = self.core.degrees().iter().map(|&d| i64::try_from(d).unwrap_or(i64::MAX)).collect();
        copied(py, &degrees)
    }

    #[getter]
    fn u<'py>(&self, py: Python<'py>) -> Bound<'py, PyArray1<f64>> {
        copied(py, self.core.u())
    }

    #[getter]
    fn x<'py>(&self, py: Python<'py>) -> Bound<'py, PyArray1<f64>> {
        copied(py, &self.core.x())
    }

    fn cardinals(&self, py: Python<'_>, x: PyReadonlyArray1<'_, f64>) -> PyResult<Py<PyArrayDyn<f64>>> {
        let x = slice(py, "x", &x)?;
        let nodes = self.core.nodes();
        let mut values = vec![0.0; x.len() * nodes];
        for (&x, row) in x.iter().zip(values.chunks_mut(nodes)) {
            self.core.cardinals(x, row).map_err(|error| exception(py, &error))?;
        }
        handed_over(py, &[x.len(), nodes], values)
    }

    fn moment_weights<'py>(&self, py: Python<'py>, power: f64) -> Bound<'py, PyArray1<f64>> {
        copied(py, &self.core.moment_weights(power))
    }

    fn tails(&self, py: Python<'_>, values: PyReadonlyArrayDyn<'_, f64>) -> PyResult<Py<PyArrayDyn<f64>>> {
        let rows = block(py, "values", &values, 2)?;
        if values.shape()[1] != self.core.nodes() {
            let message = format!("values has {} nodes: the grid has {}", values.shape()[1], self.core.nodes());
            return Err(input(py, message));
        }
        let tails = rows.chunks(self.core.nodes()).flat_map(|row| self.core.tails(row)).collect();
        handed_over(py, &[values.shape()[0], self.core.panels()], tails)
    }

    fn quadrature_z<'py>(&self, py: Python<'py>) -> Bound<'py, PyArray1<f64>> {
        copied(py, &quadrature_z(&self.core))
    }
}
