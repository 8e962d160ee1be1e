//! Matching of densities across the threshold of a heavy quark H, from nl to nl + 1 flavours.
//!
//! `f^(nl+1) = (1 + a A^(1) + a^2 A^(2)) * f^(nl)` with `a = a^(nl+1)(mu)`, after M. Buza, Y. Matiounine, J. Smith,
//! W. van Neerven, hep-ph/9612398. H stands for `h + hbar`; a light quark as source for the singlet sum. Each
//! element is a polynomial in `L = ln(mu^2/m^2)` (the paper has the logarithm of the inverse). None depends on nf.
//!
//! Which form when: [`HeavyGluonForm::Exact`] unless a published number made with the compact one is to be met;
//! [`MassKind`] as the mass is given.

mod nlo;
mod nnlo_heavy;
mod nnlo_light;

use super::kernel::{Kernel, Term};
pub use crate::coupling::masses::MassKind;

/// What goes into what across the threshold; the target comes first.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Element {
    /// `h + hbar` from the gluon.
    HeavyGluon,
    /// `h + hbar` from the light singlet.
    HeavyQuark,
    /// Gluon from the gluon, beyond unity.
    GluonGluon,
    /// Gluon from the light singlet.
    GluonQuark,
    /// Each light quark from itself, beyond unity.
    LightQuark,
    /// `h + hbar` from an intrinsic `h + hbar`, beyond unity.
    HeavyHeavy,
    /// Gluon from an intrinsic `h + hbar`.
    GluonHeavy,
}

impl Element {
    /// Every element, in the order of the declaration.
    pub const ALL: [Self; 7] = [
        Self::HeavyGluon,
        Self::HeavyQuark,
        Self::GluonGluon,
        Self::GluonQuark,
        Self::LightQuark,
        Self::HeavyHeavy,
        Self::GluonHeavy,
    ];
}

/// How the constant part of `A_Hg^(2)` is computed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub enum HeavyGluonForm {
    /// In polylogarithms.
    #[default]
    Exact,
    /// The parametrisation of A. Vogt, hep-ph/0408244.
    Compact,
}

/// The part `a^order` of an element by power of `L = ln(mu^2/m^2)`: constant, L, L^2.
///
/// Order 1 and 2; nothing beyond, and at order 2 nothing for an intrinsic heavy density.
pub fn kernel(order: usize, element: Element, mass: MassKind, form: HeavyGluonForm) -> [Kernel; 3] {
    match (order, element) {
        (1, _) => nlo::kernel(element),
        (2, Element::HeavyGluon) => nnlo_heavy::from_gluon(mass, form),
        (2, Element::HeavyQuark) => nnlo_heavy::from_quark(),
        (2, Element::GluonGluon) => nnlo_light::gluon_from_gluon(mass),
        (2, Element::GluonQuark) => nnlo_light::gluon_from_quark(),
        (2, Element::LightQuark) => nnlo_light::quark_from_quark(),
        _ => std::array::from_fn(|_| Kernel::default()),
    }
}

/// Constant, L and L^2 parts, one term each.
fn by_logarithm(terms: [Term; 3]) -> [Kernel; 3] {
    terms.map(|term| vec![term].into())
}
