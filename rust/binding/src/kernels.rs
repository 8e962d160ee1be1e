//! Kernels at single points, for looking at them and for tests.

use crate::arrays::{copied, count, slice};
use crate::errors::input;
use numpy::{PyArray1, PyReadonlyArray1};
use pyo3::prelude::*;
use scalewright_core::kernels::kernel::Kernel;
use scalewright_core::kernels::matching::{self, Element, HeavyGluonForm, MassKind};
use scalewright_core::kernels::splitting::{self, Channel};
use scalewright_core::numerics::endpoint::Point;

/// Regular values, plus coefficients, local part.
pub type Parts<'py> = (Bound<'py, PyArray1<f64>>, Bound<'py, PyArray1<f64>>, f64);

/// The channel of a name.
pub fn channel(py: Python<'_>, name: &str) -> PyResult<Channel> {
    let found = Channel::ALL.into_iter().find(|channel| channel.name() == name);
    found.ok_or_else(|| {
        let names: Vec<&str> = Channel::ALL.iter().map(|channel| channel.name()).collect();
        input(py, format!("channel = {name:?}: it must be one of {names:?}"))
    })
}

#[pyfunction]
pub fn splitting_function<'py>(
    py: Python<'py>,
    order: i64,
    channel: &str,
    nf: i64,
    z: PyReadonlyArray1<'_, f64>,
    one_minus_z: PyReadonlyArray1<'_, f64>,
) -> PyResult<Parts<'py>> {
    let order = count(py, "order", order)?;
    if order >= splitting::ORDERS {
        return Err(input(py, format!("order = {order}: it must be 0, 1 or 2")));
    }
    let kernel = splitting::kernel(order, self::channel(py, channel)?);
    parts(py, &kernel, nf as f64, &z, &one_minus_z)
}

#[pyfunction]
#[expect(clippy::too_many_arguments, reason = "arguments of Python")]
pub fn matching_element<'py>(
    py: Python<'py>,
    order: i64,
    element: &str,
    power_of_log: i64,
    pole: bool,
    compact: bool,
    z: PyReadonlyArray1<'_, f64>,
    one_minus_z: PyReadonlyArray1<'_, f64>,
) -> PyResult<Parts<'py>> {
    let element = match element {
        "heavy<-gluon" => Element::HeavyGluon,
        "heavy<-quark" => Element::HeavyQuark,
        "gluon<-gluon" => Element::GluonGluon,
        "gluon<-quark" => Element::GluonQuark,
        "quark<-quark" => Element::LightQuark,
        "heavy<-heavy" => Element::HeavyHeavy,
        "gluon<-heavy" => Element::GluonHeavy,
        other => {
            let message = format!(
                "element = {other:?}: it must be one of heavy<-gluon, heavy<-quark, gluon<-gluon, gluon<-quark, \
                 quark<-quark, heavy<-heavy, gluon<-heavy"
            );
            return Err(input(py, message));
        }
    };
    let (order, power) = (count(py, "order", order)?, count(py, "power_of_log", power_of_log)?);
    if !(1..=2).contains(&order) || power > 2 {
        return Err(input(py, format!("order = {order}, power_of_log = {power}: at most 2, the order at least 1")));
    }
    let kind = if pole { MassKind::Pole } else { MassKind::Msbar };
    let form = if compact { HeavyGluonForm::Compact } else { HeavyGluonForm::Exact };
    parts(py, &matching::kernel(order, element, kind, form)[power], 0.0, &z, &one_minus_z)
}

/// The three parts of a kernel at z.
pub fn parts<'py>(
    py: Python<'py>,
    kernel: &Kernel,
    nf: f64,
    z: &PyReadonlyArray1<'_, f64>,
    one_minus_z: &PyReadonlyArray1<'_, f64>,
) -> PyResult<Parts<'py>> {
    let values: Vec<f64> =
        distances(py, z, one_minus_z)?.into_iter().map(|t| kernel.regular(&Point::at(t), nf)).collect();
    Ok((copied(py, &values), copied(py, &kernel.plus(nf)), kernel.local(nf)))
}

/// `ln(1/z)` from z and 1 - z.
pub fn distances(
    py: Python<'_>,
    z: &PyReadonlyArray1<'_, f64>,
    one_minus_z: &PyReadonlyArray1<'_, f64>,
) -> PyResult<Vec<f64>> {
    let (z, one_minus_z) = (slice(py, "z", z)?, slice(py, "one_minus_z", one_minus_z)?);
    if z.len() != one_minus_z.len() {
        return Err(input(py, format!("z has {} entries, one_minus_z {}: equal numbers", z.len(), one_minus_z.len())));
    }
    // The smaller of the two is the one that holds all digits.
    Ok(z.iter().zip(one_minus_z).map(|(&z, &rest)| if z < 0.5 { -z.ln() } else { -(-rest).ln_1p() }).collect())
}
