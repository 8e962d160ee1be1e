//! `FL` at order a^3 for photon exchange, parametrised; the nf^2 part of the quarks is exact.
//!
//! S. Moch, J. Vermaseren, A. Vogt, hep-ph/0411112, eqs. (13)-(15), without the contributions of the flavour class
//! `fl11`, where the two photons couple to different quark lines: their weights are not polynomials in nf.

use super::Coefficient;
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;
use crate::numerics::polylog::ZETA2;

pub(super) fn kernel(coefficient: Coefficient) -> Kernel {
    match coefficient {
        Coefficient::NsPlus => {
            vec![Term::full(plus, &[], 0.113), Term::full(plus_nf, &[], 0.006), Term::smooth(plus_nf2)]
        }
        Coefficient::NsMinus => vec![],
        Coefficient::PureSinglet => vec![Term::zero(), Term::smooth(pure_singlet_nf), Term::smooth(pure_singlet_nf2)],
        Coefficient::Gluon => vec![Term::zero(), Term::smooth(gluon_nf), Term::smooth(gluon_nf2)],
    }
    .into()
}

fn plus(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    l1 * (-2729.0 + l1 * (650.6 + l1 * (-177.40 + 512.0 / 27.0 * l1))) - 2220.5 + z * (-7884.0 + 4168.0 * z)
        - l * l1 * (844.7 * l + 517.3 * l1)
        + (195.6 * l1 - 125.3) * y * l1 * l1 * l1
        + 208.3 * z * l * l * l
        - l * (1355.7 + l * (7456.0 / 27.0 + 1280.0 / 81.0 * l))
}

fn plus_nf(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    l1 * (344.1 + l1 * (-112.35 + 1024.0 / 81.0 * l1)) + 408.4 - z * (9.345 + 919.3 * z)
        + (239.7 + 20.63 * l1) * y * l1 * l1
        + l * l1 * (887.3 + 294.5 * l - 59.14 * l1)
        - 1792.0 / 81.0 * z * l * l * l
        + l * (200.73 + 64.0 / 3.0 * l)
}

fn plus_nf2(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    64.0 / 81.0
        * (3.0 * z * l1 * l1 + (6.0 - 25.0 * z) * l1 - 19.0
            + z * (317.0 / 6.0 - 12.0 * ZETA2 - 6.0 * l * l1 + 6.0 * point.li2_z + 9.0 * l * l)
            - (6.0 - 50.0 * z) * l)
}

fn pure_singlet_nf(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * y * (l1 * (5124.0 + l1 * (-3968.0 / 9.0 + 1568.0 / 27.0 * l1)) - 795.6 - 1036.0 * z)
        + l * l1 * (2184.0 * l + 6059.0 * y)
        + l * (-143.6 * y + l * (2848.0 / 9.0 - 1600.0 / 27.0 * l))
        - (885.53 * y + 182.00 * l) * y / z
}

fn pure_singlet_nf2(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * y * (l1 * (29.52 - 32.0 / 9.0 * l1) - 14.16 + 69.84 * z + 40.239 / z) + l * l1 * (35.18 * l + 73.06 * y)
        - 35.24 * z * l * l
        - l * (69.41 * y + 128.0 / 9.0 * l)
}

fn gluon_nf(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * (l1 * (53160.0 + l1 * (6319.0 + l1 * (-47024.0 / 27.0 + 144.0 * l1))) + 3709.0 - z * (33514.0 + 9533.0 * z))
        + l * l1 * (72549.0 + 88238.0 * l)
        + 66773.0 * z * l * l
        + l * (-1117.0 + l * (45.37 - 5360.0 / 27.0 * l))
        - (2044.70 * y + 409.506 * l) / z
}

fn gluon_nf2(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * (l1 * (1511.0 * z - 592.3 + l1 * (-1216.0 / 9.0 + 32.0 / 3.0 * l1)) + 577.3 - 729.0 * z + 88.5037 / z)
        + l * l1 * (311.3 + 14.24 * l)
        + 30.78 * z * l * l * l
        + l * (366.0 + l * (1000.0 / 9.0 + 160.0 / 9.0 * l))
}
