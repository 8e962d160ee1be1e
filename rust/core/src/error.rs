//! What can go wrong in the core: one variant a cause, the offending value in its fields.

use std::fmt::Display;

/// Why the core could not do what it was asked.
///
/// The binding maps each variant to one Python exception; a variant that means "asked outside what was
/// computed" is marked so in its description.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum Error {
    /// An argument is outside of what is allowed.
    #[error("{name} = {value}: {allowed}")]
    Argument {
        /// Name of the argument as the user knows it.
        name: &'static str,
        /// What was given.
        value: String,
        /// What is allowed.
        allowed: String,
    },
    /// An array has the wrong shape.
    #[error("{name} has shape {given:?}: it must be {expected:?}")]
    Shape {
        /// Name of the array as the user knows it.
        name: &'static str,
        /// The shape given.
        given: Vec<usize>,
        /// The shape that fits.
        expected: Vec<usize>,
    },
    /// Asked outside the range that was computed (a range error).
    #[error("{name} = {value}: {allowed}")]
    OutOfRange {
        /// Name of the argument as the user knows it.
        name: &'static str,
        /// What was given.
        value: String,
        /// What was computed.
        allowed: String,
    },
    /// The running coupling meets the Landau pole between two scales.
    #[error(
        "alpha_s grows beyond {limit} between {from_q2:?} and {to_q2:?} GeV^2 with nf = {nf} (Landau pole): \
         choose a smaller alpha_s or a higher scale"
    )]
    LandauPole {
        /// Number of flavours of the stretch.
        nf: usize,
        /// Where the stretch begins, GeV^2.
        from_q2: f64,
        /// Where it was to end, GeV^2.
        to_q2: f64,
        /// Largest `alpha_s` that the solution is followed to.
        limit: f64,
    },
    /// The evolution did not reach its tolerance within the number of steps allowed.
    #[error(
        "evolution with nf = {nf} reached {reached:.1e} in {steps} steps: the tolerance is {tolerance:.1e}; \
         ask for a larger tolerance"
    )]
    Tolerance {
        /// Number of flavours of the stretch.
        nf: usize,
        /// Error estimate reached.
        reached: f64,
        /// Error asked for.
        tolerance: f64,
        /// Steps taken.
        steps: usize,
    },
    /// The user asked to stop.
    #[error("stopped before the end")]
    Interrupted,
}

/// Result of the core.
pub type Result<T> = std::result::Result<T, Error>;

/// Refuses an argument that is not allowed.
pub(crate) fn require(name: &'static str, value: &dyn Display, holds: bool, allowed: &str) -> Result<()> {
    if holds {
        return Ok(());
    }
    Err(Error::Argument { name, value: value.to_string(), allowed: allowed.to_owned() })
}
