//! Numbers and names of flavours: those of the Particle Data Group.

/// The gluon.
pub const GLUON: i64 = 21;
/// The lightest quark that has a mass here; so many flavours make it the heaviest active one.
pub const CHARM: usize = 4;
/// Names of the flavours from charm on.
pub const HEAVY_NAMES: [&str; 3] = ["charm", "bottom", "top"];
