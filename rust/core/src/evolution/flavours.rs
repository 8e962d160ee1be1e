//! Numbers and names of flavours: those of the Particle Data Group.

use crate::error::{Error, Result};

/// The gluon.
pub const GLUON: i64 = 21;
/// The lightest quark that has a mass here; so many flavours make it the heaviest active one.
pub const CHARM: usize = 4;
/// Names of the flavours from charm on.
pub const HEAVY_NAMES: [&str; 3] = ["charm", "bottom", "top"];

/// Accepts 21 and the quarks +-1 .. +-6.
///
/// # Errors
/// [`Error::Argument`] for another number.
pub fn check_flavour(flavour: i64) -> Result<()> {
    if flavour == GLUON || (1..=6).contains(&flavour.unsigned_abs()) {
        return Ok(());
    }
    Err(Error::Argument {
        name: "flavour",
        value: flavour.to_string(),
        allowed: "must be 21 (gluon) or a quark from -6 to 6 without 0 (PDG numbers)".into(),
    })
}
