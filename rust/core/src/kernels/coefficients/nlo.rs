//! Order a, exact.
//!
//! W. Bardeen, A. Buras, D. Duke, T. Muta, Phys. Rev. D 18 (1978) 3998; W. Furmanski, R. Petronzio, Z. Phys. C 11
//! (1982) 293, section 2; in the form of J. Vermaseren, A. Vogt, S. Moch, hep-ph/0504242, eqs. (4.2)-(4.3).

use super::{Coefficient, StructureFunction};
use crate::colour::{CF, TR};
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;
use crate::numerics::polylog::ZETA2;

const QUARK_PLUS: &[f64] = &[-3.0 * CF, 4.0 * CF];
const QUARK_LOCAL: f64 = -CF * (9.0 + 4.0 * ZETA2);

pub(super) fn kernel(function: StructureFunction, coefficient: Coefficient) -> Kernel {
    use StructureFunction::{F2, F3, FL};
    match (function, coefficient) {
        (F2, Coefficient::NsPlus | Coefficient::NsMinus) => vec![Term::full(f2_quark, QUARK_PLUS, QUARK_LOCAL)],
        (FL, Coefficient::NsPlus | Coefficient::NsMinus) => vec![Term::smooth(fl_quark)],
        (F3, Coefficient::NsPlus | Coefficient::NsMinus) => vec![Term::full(f3_quark, QUARK_PLUS, QUARK_LOCAL)],
        (F2, Coefficient::Gluon) => vec![Term::zero(), Term::smooth(f2_gluon)],
        (FL, Coefficient::Gluon) => vec![Term::zero(), Term::smooth(fl_gluon)],
        (F3, Coefficient::Gluon) | (_, Coefficient::PureSinglet) => vec![],
    }
    .into()
}

fn f2_quark(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    CF * (-2.0 * (1.0 + z) * (l1 - l) - 4.0 * l / y + 6.0 + 4.0 * z)
}

fn fl_quark(point: &Point) -> f64 {
    4.0 * CF * point.z
}

/// `F2` less `2 CF (1 + z)`.
fn f3_quark(point: &Point) -> f64 {
    f2_quark(point) - 2.0 * CF * (1.0 + point.z)
}

fn f2_gluon(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    4.0 * TR * ((z * z + y * y) * (l1 - l) - 1.0 + 8.0 * z * y)
}

fn fl_gluon(point: &Point) -> f64 {
    16.0 * TR * point.z * point.one_minus_z
}
