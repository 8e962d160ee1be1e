//! Coefficient functions of light quarks in the MS-bar scheme at `mu_r = mu_f = Q`, `C = sum_k a^k C_k`,
//! `a = alpha_s/(4 pi)`.
//!
//! What they multiply, with couplings `g_q`, `h_q` of the quarks to the bosons and `<g> = sum_q g_q/nf`:
//!
//! - `F2/x`, `FL/x`: `sum_q g_q C_ns (q + qbar) + <g> (C_ps Sigma + C_g g)`;
//! - `F3`: `sum_q h_q C_ns (q - qbar)`.
//!
//! `*` is the convolution of the splitting functions, so that `F2` and `FL` follow from `x q` and `x g`, and `x F3`
//! from `x (q - qbar)`. The factor nf of the gluon and of the pure singlet is in the kernels. Scale logarithms
//! are left to those who have the matrices.
//!
//! Which one when: [`kernel`] for light quarks; [`Massive`] for charm and bottom with their masses, at order a.

mod charged;
mod heavy;
mod lo;
mod massive;
mod n3lo_longitudinal;
mod nlo;
mod nnlo_nonsinglet;
mod nnlo_singlet;

use super::kernel::Kernel;
pub use massive::{Massive, MassiveKernel, Onset};

/// A structure function of deep inelastic scattering.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum StructureFunction {
    /// `F2`.
    F2,
    /// `FL = F2 - 2 x F1`.
    FL,
    /// `x F3`.
    F3,
}

impl StructureFunction {
    /// Every structure function, in the order of the declaration.
    pub const ALL: [Self; 3] = [Self::F2, Self::FL, Self::F3];

    /// Name for messages and tables.
    pub const fn name(self) -> &'static str {
        match self {
            Self::F2 => "F2",
            Self::FL => "FL",
            Self::F3 => "xF3",
        }
    }

    /// Highest power of a known here.
    pub const fn highest_order(self) -> usize {
        match self {
            Self::F2 | Self::F3 => 2,
            Self::FL => 3,
        }
    }
}

/// What a coefficient function multiplies.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Coefficient {
    /// Quarks, continued from even moments in `F2` and `FL` (photon, Z, `W+ + W-`); in `F3` the counterpart for
    /// `W+ - W-`, where it multiplies differences of `q + qbar`.
    NsPlus,
    /// Quarks, continued from odd moments: `W+ - W-` in `F2` and `FL`; neutral current, `W+ + W-` in `F3`.
    NsMinus,
    /// What the singlet quark has beyond `NsPlus`.
    PureSinglet,
    /// The gluon.
    Gluon,
}

impl Coefficient {
    /// Every coefficient, in the order of the declaration.
    pub const ALL: [Self; 4] = [Self::NsPlus, Self::NsMinus, Self::PureSinglet, Self::Gluon];

    /// Short name for messages and tables.
    pub const fn name(self) -> &'static str {
        match self {
            Self::NsPlus => "ns+",
            Self::NsMinus => "ns-",
            Self::PureSinglet => "pure singlet",
            Self::Gluon => "gluon",
        }
    }
}

/// The coefficient of `a^order`: orders 0, 1 and 2, of `FL` also 3; zero beyond.
///
/// Order 3 of `FL` is for photon exchange and has no [`Coefficient::NsMinus`].
pub fn kernel(order: usize, function: StructureFunction, coefficient: Coefficient) -> Kernel {
    match (order, coefficient) {
        (0, _) => lo::kernel(function, coefficient),
        (1, _) => nlo::kernel(function, coefficient),
        (2, Coefficient::NsPlus | Coefficient::NsMinus) => nnlo_nonsinglet::kernel(function, coefficient),
        (2, Coefficient::PureSinglet | Coefficient::Gluon) => nnlo_singlet::kernel(function, coefficient),
        (3, _) if function == StructureFunction::FL => n3lo_longitudinal::kernel(coefficient),
        _ => Kernel::default(),
    }
}
