//! Order a^2 for quarks, parametrised; the nf part of `FL` is exact.
//!
//! The exact results are E. Zijlstra, W. van Neerven, Phys. Lett. B 272 (1991) 127 and B 297 (1992) 377.
//! Which form when: of `ns+` in `F2` the newer one, J. Vermaseren, A. Vogt, S. Moch, hep-ph/0504242 eq. (4.8), and
//! in `FL` S. Moch, J. Vermaseren, A. Vogt, hep-ph/0411112 eq. (10); of the rest W. van Neerven, A. Vogt,
//! hep-ph/9907472, the only one there. The authors shift the coefficients of `delta(1-z)` so that the moments come
//! out right (in `FL` the exact one is zero); the shifts belong to the parametrisation and are written as separate
//! numbers.

use super::{Coefficient, StructureFunction};
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;

/// The same in `F2` and `F3`: what soft gluons do.
const PLUS: &[f64] = &[188.641, -31.1052, -184.0 / 3.0, 128.0 / 9.0];
const PLUS_NF: &[f64] = &[6.34888, -232.0 / 27.0, 16.0 / 9.0];
const LOCAL: f64 = -338.531;
const LOCAL_NF: f64 = 46.844;

pub(super) fn kernel(function: StructureFunction, coefficient: Coefficient) -> Kernel {
    use StructureFunction::{F2, F3, FL};
    let soft = |regular, shift, regular_nf, shift_nf| {
        vec![Term::full(regular, PLUS, LOCAL + shift), Term::full(regular_nf, PLUS_NF, LOCAL_NF + shift_nf)]
    };
    match (function, coefficient) {
        (F2, Coefficient::NsPlus) => soft(f2_plus, 0.018, f2_plus_nf, 0.0091),
        (F2, Coefficient::NsMinus) => soft(f2_minus, 0.537, f2_minus_nf, -0.0035),
        (F3, Coefficient::NsPlus) => soft(f3_plus, -0.152, f3_nf, 0.013),
        (F3, Coefficient::NsMinus) => soft(f3_minus, -0.104, f3_nf, 0.013),
        (FL, Coefficient::NsPlus) => vec![Term::full(fl_plus, &[], -0.012), Term::smooth(fl_nf)],
        (FL, Coefficient::NsMinus) => vec![Term::full(fl_minus, &[], -0.150), Term::smooth(fl_nf)],
        _ => vec![],
    }
    .into()
}

fn f2_plus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (-628.8 + l1 * (72.24 - 17.74 * l1)) - 181.0 - 806.7 * z
        + 0.719 * z * l * l * l * l
        + l * l1 * (37.75 * l - 147.1 * l1)
        - l * (28.384 + l * (20.70 + 80.0 / 27.0 * l))
}

fn f2_plus_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (24.87 - 1.500 * l1) - 7.8109 - z * (17.82 + 12.97 * z) - 0.185 * z * l * l * l
        + 8.113 * l * l1
        + l * (16.0 / 3.0 + 20.0 / 9.0 * l)
}

fn f2_minus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (-663.0 + l1 * (71.08 - 17.19 * l1)) - 84.18 - 1010.0 * z
        + l * l1 * (80.41 * l - 192.4 * l1)
        - l * (1.235 + l * (19.56 + 3.748 * l))
}

fn f2_minus_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (22.95 - 1.707 * l1) - 5.691 - 37.91 * z
        + l * l1 * (17.97 + 3.036 * l)
        + l * (5.770 + 2.244 * l)
}

fn f3_plus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (-396.1 + l1 * (94.61 - 15.20 * l1)) - 242.9 - 467.2 * z
        - 92.43 * l * l1 * l1
        - l * (79.14 + l * (30.14 + 3.049 * l))
}

fn f3_minus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (-409.6 + l1 * (94.61 - 15.20 * l1)) - 206.1 - 576.8 * z
        - 147.9 * l * l1 * l1
        - l * (67.60 + l * (33.31 + 3.922 * l))
}

fn f3_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (25.00 + l1 * (-0.808 + 0.042 * l1)) - 6.337 - 14.97 * z + 9.684 * l * l1 + l * (8.683 + 2.207 * l)
}

fn fl_plus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    z * l1 * (128.0 / 9.0 * l1 - 46.50) - 84.094 * l * l1 - 37.338 + z * (89.53 + 33.82 * z)
        + z * l * (32.90 + 18.41 * l)
        - 128.0 / 9.0 * l
}

fn fl_minus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (13.30 * l1 - 59.12) - 141.7 * l * l1 - 52.27 + 100.8 * z + l * ((23.29 * z - 0.043) * l - 22.21)
}

fn fl_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    16.0 / 27.0 * (z * (6.0 * l1 - 12.0 * l - 25.0) + 6.0)
}
