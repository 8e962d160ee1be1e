//! The theory as a frozen handle.

use crate::arrays::{copied, count, slice};
use crate::errors::{exception, input};
use crate::sensitivity::direction;
use numpy::{PyArray1, PyReadonlyArray1};
use pyo3::prelude::*;
use scalewright_core::coupling::masses::{MassKind, Masses};
use scalewright_core::error::Result as CoreResult;
use scalewright_core::theory::{Assumptions, Theory as CoreTheory};
use scalewright_core::thresholds::Direction;

/// Everything assumed, checked.
#[pyclass(frozen, module = "scalewright._core")]
pub struct Theory {
    pub(crate) core: CoreTheory,
}

#[pymethods]
impl Theory {
    #[new]
    #[pyo3(signature = (*, order, alpha_s, alpha_s_q2, alpha_s_nf, masses, pole, thresholds_q2, fewest, most,
                        evolution_mu2_ratio, running_loops, compact))]
    #[expect(clippy::too_many_arguments, reason = "keyword arguments of Python")]
    fn new(
        py: Python<'_>,
        order: i64,
        alpha_s: f64,
        alpha_s_q2: f64,
        alpha_s_nf: i64,
        masses: PyReadonlyArray1<'_, f64>,
        pole: bool,
        thresholds_q2: PyReadonlyArray1<'_, f64>,
        fewest: i64,
        most: i64,
        evolution_mu2_ratio: f64,
        running_loops: i64,
        compact: bool,
    ) -> PyResult<Self> {
        let [charm, bottom, top] = three(py, "masses", &masses)?;
        let kind = if pole { MassKind::Pole } else { MassKind::Msbar };
        let given = Assumptions {
            order: count(py, "order", order)?,
            alpha_s,
            alpha_s_q2,
            alpha_s_nf: count(py, "nf of the coupling", alpha_s_nf)?,
            masses: Masses { charm, bottom, top, kind },
            thresholds_q2: three(py, "thresholds_q2", &thresholds_q2)?,
            fewest: count(py, "fewest flavours", fewest)?,
            most: count(py, "most flavours", most)?,
            evolution_mu2_ratio,
            running_loops: count(py, "running_loops", running_loops)?,
            compact_heavy_gluon: compact,
        };
        let core = CoreTheory::new(given).map_err(|error| exception(py, &error))?;
        Ok(Self { core })
    }

    fn alpha_s<'py>(
        &self,
        py: Python<'py>,
        mu2: PyReadonlyArray1<'_, f64>,
        nf: PyReadonlyArray1<'_, i64>,
    ) -> PyResult<Bound<'py, PyArray1<f64>>> {
        elementwise(py, &mu2, &nf, |mu2, nf| self.core.alpha_s(mu2, nf))
    }

    fn alpha_s_derivative<'py>(
        &self,
        py: Python<'py>,
        parameter: &str,
        mu2: PyReadonlyArray1<'_, f64>,
        nf: PyReadonlyArray1<'_, i64>,
    ) -> PyResult<Bound<'py, PyArray1<f64>>> {
        let direction = direction(py, parameter)?;
        elementwise(py, &mu2, &nf, |mu2, nf| match direction {
            Direction::Parameter(parameter) => self.core.alpha_s_derivative(parameter, mu2, nf),
            Direction::Scale => self.core.alpha_s_slope(mu2, nf),
        })
    }

    fn nf_at<'py>(&self, py: Python<'py>, q2: PyReadonlyArray1<'_, f64>) -> PyResult<Bound<'py, PyArray1<i64>>> {
        let q2 = slice(py, "q2", &q2)?;
        let nf: Vec<i64> = q2.iter().map(|&q2| i64::try_from(self.core.nf_at(q2)).unwrap_or(0)).collect();
        Ok(copied(py, &nf))
    }
}

/// `value(mu2, nf)` of each pair.
fn elementwise<'py>(
    py: Python<'py>,
    mu2: &PyReadonlyArray1<'_, f64>,
    nf: &PyReadonlyArray1<'_, i64>,
    value: impl Fn(f64, usize) -> CoreResult<f64>,
) -> PyResult<Bound<'py, PyArray1<f64>>> {
    let values: Vec<f64> = slice(py, "mu2", mu2)?
        .iter()
        .zip(slice(py, "nf", nf)?)
        .map(|(&mu2, &nf)| value(mu2, count(py, "nf", nf)?).map_err(|error| exception(py, &error)))
        .collect::<PyResult<_>>()?;
    Ok(copied(py, &values))
}

fn three(py: Python<'_>, name: &str, array: &PyReadonlyArray1<'_, f64>) -> PyResult<[f64; 3]> {
    let values = slice(py, name, array)?;
    values.try_into().map_err(|_| input(py, format!("{name} has {} entries: it must have 3", values.len())))
}
