//! Errors of the core as the exceptions of `scalewright.errors`.

use pyo3::prelude::*;
use pyo3::types::PyType;
use scalewright_core::error::Error;

/// The exception for an error: one match, no wildcard arm.
pub fn exception(py: Python<'_>, error: &Error) -> PyErr {
    let class = match error {
        Error::Argument { .. } | Error::Shape { .. } | Error::Tolerance { .. } => "InputError",
        Error::OutOfRange { .. } | Error::LandauPole { .. } => "RangeError",
        Error::Interrupted => return pyo3::exceptions::PyKeyboardInterrupt::new_err(()),
    };
    raise(py, class, error.to_string())
}

/// An exception for what should never happen: a panic of the core.
pub fn internal(py: Python<'_>, message: &str) -> PyErr {
    raise(py, "ScalewrightError", format!("internal error, please report: {message}"))
}

/// An exception for an argument that does not fit.
pub fn input(py: Python<'_>, message: String) -> PyErr {
    raise(py, "InputError", message)
}

fn raise(py: Python<'_>, class: &str, message: String) -> PyErr {
    let class = py.import("scalewright.errors").and_then(|module| module.getattr(class));
    match class.and_then(|class| Ok(class.cast_into::<PyType>()?)) {
        Ok(class) => PyErr::from_type(class, message),
        Err(error) => error,
    }
}
