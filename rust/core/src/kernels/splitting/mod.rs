//! Splitting functions in the MS-bar scheme, `d f/d ln mu^2 = sum_k a^(k+1) P_k * f`, `a = alpha_s/(4 pi)`.
//!
//! The singlet quark kernel is `NsPlus + PureSinglet`, that of the valence `NsMinus + NsSea`.

mod lo;
mod nlo;
mod nnlo_nonsinglet;
mod nnlo_singlet;

use super::kernel::Kernel;

/// Number of orders known here: LO, NLO, NNLO.
pub const ORDERS: usize = 3;

/// What goes into what.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Channel {
    /// Differences of `q + qbar`.
    NsPlus,
    /// Differences of `q - qbar`.
    NsMinus,
    /// What the valence has beyond `NsMinus`; begins at NNLO.
    NsSea,
    /// What the singlet quark has beyond `NsPlus`, of all flavours.
    PureSinglet,
    /// Quark singlet from the gluon, the sum over all `2 nf` quarks included.
    QuarkGluon,
    /// Gluon from the quark singlet.
    GluonQuark,
    /// Gluon from the gluon.
    GluonGluon,
}

impl Channel {
    /// Every channel, in the order of the declaration.
    pub const ALL: [Self; 7] = [
        Self::NsPlus,
        Self::NsMinus,
        Self::NsSea,
        Self::PureSinglet,
        Self::QuarkGluon,
        Self::GluonQuark,
        Self::GluonGluon,
    ];

    /// Short name for messages and tables.
    pub const fn name(self) -> &'static str {
        match self {
            Self::NsPlus => "ns+",
            Self::NsMinus => "ns-",
            Self::NsSea => "ns-sea",
            Self::PureSinglet => "pure singlet",
            Self::QuarkGluon => "qg",
            Self::GluonQuark => "gq",
            Self::GluonGluon => "gg",
        }
    }
}

/// The coefficient `P_order` of `a^(order+1)`: 0 is LO, 1 NLO, 2 NNLO; zero beyond.
pub fn kernel(order: usize, channel: Channel) -> Kernel {
    match order {
        0 => lo::kernel(channel),
        1 => nlo::kernel(channel),
        2 => match channel {
            Channel::NsPlus | Channel::NsMinus | Channel::NsSea => nnlo_nonsinglet::kernel(channel),
            _ => nnlo_singlet::kernel(channel),
        },
        _ => Kernel::default(),
    }
}
