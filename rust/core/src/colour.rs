//! Colour factors of SU(3), and the combinations that appear in kernels.

/// Casimir of the fundamental representation.
pub const CF: f64 = 4.0 / 3.0;
/// Casimir of the adjoint representation.
pub const CA: f64 = 3.0;
/// Normalisation of the generators: `tr(T^a T^b) = TR delta^ab`.
pub const TR: f64 = 0.5;
/// `CF TR`, the factor of most heavy-quark loops.
pub const CF_TR: f64 = CF * TR;
/// `CA TR`.
pub const CA_TR: f64 = CA * TR;
