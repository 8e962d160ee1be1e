//! Matching of densities across a heavy-quark threshold.

use super::kernel::Kernel;
pub use crate::coupling::masses::MassKind;

/// tmp
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[allow(missing_docs)]
pub enum Element { HeavyGluon, HeavyQuark, GluonGluon, GluonQuark, LightQuark, HeavyHeavy, GluonHeavy }
#[allow(missing_docs)]
impl Element { pub const ALL: [Self;7]=[Self::HeavyGluon, Self::HeavyQuark, Self::GluonGluon, Self::GluonQuark, Self::LightQuark, Self::HeavyHeavy, Self::GluonHeavy]; }
/// tmp
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[allow(missing_docs)]
pub enum HeavyGluonForm { Exact, Compact }
/// tmp
pub fn kernel(_o: usize, _e: Element, _k: MassKind, _f: HeavyGluonForm) -> [Kernel;3] { Default::default() }
