//! Order a^2 for the gluon and the pure singlet, parametrised.
//!
//! The exact results are E. Zijlstra, W. van Neerven, Phys. Lett. B 273 (1991) 476 and Nucl. Phys. B 383 (1992) 525.
//! In `F2` the newer form, J. Vermaseren, A. Vogt, S. Moch, hep-ph/0504242 eqs. (4.9), (4.10); in `FL` that of
//! W. van Neerven, A. Vogt, hep-ph/0006154, repeated in hep-ph/0411112 eqs. (11), (12).

use super::{Coefficient, StructureFunction};
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;

pub(super) fn kernel(function: StructureFunction, coefficient: Coefficient) -> Kernel {
    use StructureFunction::{F2, FL};
    let regular = match (function, coefficient) {
        (F2, Coefficient::PureSinglet) => f2_pure_singlet,
        (F2, Coefficient::Gluon) => f2_gluon,
        (FL, Coefficient::PureSinglet) => fl_pure_singlet,
        (FL, Coefficient::Gluon) => fl_gluon,
        _ => return Kernel::default(),
    };
    vec![Term::zero(), Term::smooth(regular)].into()
}

fn f2_pure_singlet(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * (l1 * (8.0 / 3.0 * l1 - 32.0 / 3.0) + 9.8937)
        + y * y * (9.57 - 13.41 * z + 0.08 * l1 * l1 * l1)
        + 5.667 * z * l * l * l
        - l * l * l1 * (20.26 - 33.93 * z)
        + 43.36 * y * l
        + l * l * (40.0 / 9.0 * l - 1.053)
        + 5.2903 * y * y / z
}

fn f2_gluon(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    l1 * (-34.88 + l1 * (-24.0 + 58.0 / 9.0 * l1)) + 30.586 - y * (25.08 + 760.3 * z + 29.65 * l1 * l1 * l1)
        + 1204.0 * z * l * l
        + l * l1 * (293.8 + 711.2 * z + 1043.0 * l)
        + l * (115.6 + l * (-7.109 + 70.0 / 9.0 * l))
        + 11.9033 * y / z
}

fn fl_pure_singlet(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * y * ((15.94 - 5.212 * z) * l1 + (19.27 - 2.370 / z) * y) + l * ((0.421 + 1.520 * z) * l + 28.09 * y)
}

fn fl_gluon(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * (l1 * ((94.74 - 49.20 * z) * l1 + 864.8) + 39.66 * l - 5.333 / z) + z * l * (1161.0 * l1 + 60.06 * l)
}
