//! What derivatives are taken with respect to, by name.

use crate::errors::input;
use pyo3::prelude::*;
use scalewright_core::coupling::sensitivity::Parameter;
use scalewright_core::thresholds::Direction;

/// Names of what the coupling and the matching depend on, each with what it is.
const PARAMETERS: [(&str, Parameter); 4] = [
    ("alpha_s", Parameter::AlphaS),
    ("charm", Parameter::Mass(4)),
    ("bottom", Parameter::Mass(5)),
    ("top", Parameter::Mass(6)),
];
/// The name of the logarithm of the scale of the output.
const SCALE: &str = "ln_q2";

/// The parameter of that name, or the scale.
pub fn direction(py: Python<'_>, given: &str) -> PyResult<Direction> {
    if given == SCALE {
        return Ok(Direction::Scale);
    }
    let found = PARAMETERS.into_iter().find(|(name, _)| *name == given);
    found.map(|(_, parameter)| Direction::Parameter(parameter)).ok_or_else(|| {
        let names = PARAMETERS.map(|(name, _)| name);
        input(py, format!("parameter = {given:?}: it must be {SCALE:?} or one of {names:?}"))
    })
}
