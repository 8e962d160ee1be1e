//! Coefficient functions of a heavy quark at order a, exact in `m^2/Q^2`, at `mu_r = mu_f = Q`.
//!
//! Which one when: [`super::heavy`] is the pair made by a photon on a gluon; [`super::charged`] is the single charm
//! quark that a W makes of a light quark or a gluon.
//!
//! Each is used in the variable w that ends at 1: with `chi = rescaling * x` and `G(x) = x g(x)` or `x q(x)`,
//! the contribution is `int_chi^1 dw K(w) G(chi/w)`. A pair needs `chi = x (1 + 4 m^2/Q^2)`, a single quark
//! `chi = x (1 + m^2/Q^2)`, the slow-rescaling variable.

use super::{charged, heavy};
use crate::numerics::endpoint::Logarithms;

/// What is made of what.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Massive {
    /// `F2` of a pair made by a photon on a gluon, for charge one.
    F2Gluon,
    /// `FL` of such a pair.
    FLGluon,
    /// `F2/2` of a single charm quark made by a W on a gluon, for a mixing element of one.
    ChargedF2Gluon,
    /// `FL/2`, as above.
    ChargedFLGluon,
    /// `x F3/2`, as above; of an anti-charm quark with the other sign.
    ChargedF3Gluon,
    /// `F2/2` of a single charm quark made by a W on a light quark, beyond `xi q(xi)`.
    ChargedF2Quark,
    /// `FL/2`, as above, beyond `(1 - lambda) xi q(xi)`.
    ChargedFLQuark,
    /// `x F3/2`, as above, beyond `lambda xi q(xi)`; of an anti-charm quark on an antiquark with the other sign.
    ChargedF3Quark,
}

impl Massive {
    /// Every one, in the order of the declaration.
    pub const ALL: [Self; 8] = [
        Self::F2Gluon,
        Self::FLGluon,
        Self::ChargedF2Gluon,
        Self::ChargedFLGluon,
        Self::ChargedF3Gluon,
        Self::ChargedF2Quark,
        Self::ChargedFLQuark,
        Self::ChargedF3Quark,
    ];

    /// Short name for messages and tables.
    pub const fn name(self) -> &'static str {
        match self {
            Self::F2Gluon => "F2 gluon",
            Self::FLGluon => "FL gluon",
            Self::ChargedF2Gluon => "charged F2 gluon",
            Self::ChargedFLGluon => "charged FL gluon",
            Self::ChargedF3Gluon => "charged F3 gluon",
            Self::ChargedF2Quark => "charged F2 quark",
            Self::ChargedFLQuark => "charged FL quark",
            Self::ChargedF3Quark => "charged F3 quark",
        }
    }

    /// The kernel in w at one `Q^2` and mass; both positive, in GeV^2 and GeV.
    pub fn at(self, q2: f64, mass: f64) -> MassiveKernel {
        let m2 = mass * mass;
        match self {
            Self::F2Gluon => heavy::Pair::of(q2, m2).kernel(heavy::Pair::f2),
            Self::FLGluon => heavy::Pair::of(q2, m2).kernel(heavy::Pair::fl),
            Self::ChargedF2Gluon => charged::Single::of(q2, m2).smooth(charged::Single::f2_gluon),
            Self::ChargedFLGluon => charged::Single::of(q2, m2).smooth(charged::Single::fl_gluon),
            Self::ChargedF3Gluon => charged::Single::of(q2, m2).smooth(charged::Single::f3_gluon),
            Self::ChargedF2Quark => charged::Single::of(q2, m2).f2_quark(),
            Self::ChargedFLQuark => charged::Single::of(q2, m2).fl_quark(),
            Self::ChargedF3Quark => charged::Single::of(q2, m2).f3_quark(),
        }
    }
}

/// How a kernel begins at w = 1, in `t = ln(1/w)`: what a quadrature has to know.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Onset {
    /// Analytic in `t^(1/2)`; the nearest singularity is at i times this distance.
    Root(f64),
    /// Logarithms at t = 0, and a singularity at minus this distance.
    Logarithms(f64),
}

/// A kernel in w at one `Q^2/m^2`: an ordinary function, plus distributions and a local part.
pub struct MassiveKernel {
    /// `chi = rescaling * x`.
    pub rescaling: f64,
    /// Coefficient k multiplies `[ln^k(1-w)/(1-w)]_+`, which refers to the whole of [0, 1].
    pub plus: Vec<f64>,
    /// Coefficient of `delta(1-w)`.
    pub local: f64,
    /// How it begins at w = 1.
    pub onset: Onset,
    regular: Box<dyn Fn(&Logarithms) -> f64 + Send + Sync>,
}

impl MassiveKernel {
    /// A kernel that is nothing but an ordinary function.
    pub(super) fn smooth(
        rescaling: f64,
        onset: Onset,
        regular: impl Fn(&Logarithms) -> f64 + Send + Sync + 'static,
    ) -> Self {
        Self { rescaling, plus: vec![], local: 0.0, onset, regular: Box::new(regular) }
    }

    /// The same with plus distributions and a local part.
    pub(super) fn with(self, plus: Vec<f64>, local: f64) -> Self {
        Self { plus, local, ..self }
    }

    /// Value of the regular part at w.
    pub fn regular(&self, w: &Logarithms) -> f64 {
        (self.regular)(w)
    }
}
