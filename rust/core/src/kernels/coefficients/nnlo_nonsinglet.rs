//! Order a^2 for quarks: without nf parametrised, the nf part exact.
//!
//! The exact results are E. Zijlstra, W. van Neerven, Phys. Lett. B 272 (1991) 127 and B 297 (1992) 377. The forms:
//!
//! - `F2`, `ns+`: J. Vermaseren, A. Vogt, S. Moch, hep-ph/0504242 eq. (4.8);
//! - `FL`, `ns+`: S. Moch, J. Vermaseren, A. Vogt, hep-ph/0411112 eq. (10);
//! - `F3`, `ns-`: S. Moch, J. Vermaseren, A. Vogt, arXiv:0812.4168, appendix;
//! - `ns+` less `ns-`: S. Moch, M. Rogal, A. Vogt, arXiv:0708.3731, section 3.
//!
//! They are newer, and closer to the exact moments, than those of W. van Neerven, A. Vogt, hep-ph/9907472, whose
//! two `FL` and `F2` differ at large z by far more than the exact ones do. The authors shift the coefficients of
//! `delta(1-z)` so that the moments come out right (in `FL` the exact one is zero); the shifts belong to the
//! parametrisation and are written as separate numbers.

use super::{Coefficient, StructureFunction};
use crate::colour::CF;
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;
use crate::numerics::polylog::{ZETA2, ZETA3};

/// The same in `F2` and `F3`: what soft gluons do.
const PLUS: &[f64] = &[188.641, -31.1052, -184.0 / 3.0, 128.0 / 9.0];
const PLUS_NF: &[f64] = &[CF * (247.0 / 27.0 - 8.0 / 3.0 * ZETA2), -CF * 58.0 / 9.0, CF * 4.0 / 3.0];
const LOCAL: f64 = -338.531;
const LOCAL_NF: f64 = CF * (457.0 / 36.0 + 38.0 / 3.0 * ZETA2 + 4.0 / 3.0 * ZETA3);

pub(super) fn kernel(function: StructureFunction, coefficient: Coefficient) -> Kernel {
    use Coefficient::{NsMinus, NsPlus};
    use StructureFunction::{F2, F3, FL};
    let soft = |regular, shift, regular_nf| {
        vec![Term::full(regular, PLUS, LOCAL + shift), Term::full(regular_nf, PLUS_NF, LOCAL_NF)]
    };
    let longitudinal = |regular| vec![Term::full(regular, &[], -0.012), Term::smooth(fl_nf)];
    match (function, coefficient) {
        (F2, NsPlus) => soft(f2_plus, 0.018, f2_nf),
        (F2, NsMinus) => soft(|point| f2_plus(point) - f2_difference(point), 0.018, f2_nf),
        (F3, NsPlus) => soft(|point| f3_minus(point) + f3_difference(point), -0.041, f3_nf),
        (F3, NsMinus) => soft(f3_minus, -0.041, f3_nf),
        (FL, NsPlus) => longitudinal(fl_plus),
        (FL, NsMinus) => longitudinal(|point| fl_plus(point) - fl_difference(point)),
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

/// Exact; `PLUS_NF` taken out.
fn f2_nf(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    let soft = l1 * (2.0 / 3.0 * l1 - 29.0 / 9.0) + 247.0 / 54.0 - 4.0 / 3.0 * ZETA2;
    let hard = l * (5.0 / 3.0 * l - 8.0 / 3.0 * l1 + 19.0 / 3.0) - 4.0 / 3.0 * point.li2_1mz;
    CF * ((1.0 + z * z) / y * hard - (1.0 + z) * soft + (1.0 + 13.0 * z) / 3.0 * l1
        - (7.0 + 19.0 * z) / 3.0 * l
        - 23.0 / 18.0
        - 13.5 * z)
}

fn f3_minus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (-470.6 + l1 * (78.46 - 16.40 * l1)) - 149.75 - 693.2 * z
        + 0.218 * z * l * l * l * l
        + l * l1 * (33.62 * l - 117.8 * l1)
        - l * (49.30 + l * (94.0 / 3.0 + 104.0 / 27.0 * l))
}

/// Exact. The difference to `F2` is the one-loop `2 CF (1+z)` dressed with a quark loop: its logarithms as in
/// [`fl_nf`], its two rational numbers from the published moments N = 1 and N = 3 (hep-ph/0007294); N = 5 agrees.
fn f3_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    f2_nf(point) - CF * (4.0 / 3.0 * (1.0 + z) * (l1 - 2.0 * l) - (14.0 + 62.0 * z) / 9.0)
}

fn fl_plus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    z * l1 * (128.0 / 9.0 * l1 - 46.50) - 84.094 * l * l1 - 37.338
        + z * (89.53 + 33.82 * z)
        + z * l * (32.90 + 18.41 * l)
        - 128.0 / 9.0 * l
}

/// Exact.
fn fl_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    16.0 / 27.0 * (z * (6.0 * l1 - 12.0 * l - 25.0) + 6.0)
}

fn f2_difference(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    y * (-9.1587 + z * (-57.70 + z * (72.29 - 5.689 * z)) - z * l * (68.804 + l * (24.40 + 2.958 * l))
        + l * (0.249 + 8.0 / 9.0 * l * (2.0 + l)))
}

fn fl_difference(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    y * y
        * (10.663
            + z * (-5.248 + z * (-7.500 + 0.823 * z))
            + z * l * (11.10 + l * (2.225 - 0.128 * l))
            + 64.0 / 9.0 * l)
}

fn f3_difference(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    y * (-29.65
        + z * (116.05 + z * (-71.74 - 16.18 * z))
        + z * l * (14.60 + 69.90 * z - 0.378 * l * l)
        + l * (-8.560 + 8.0 / 9.0 * l * (4.0 + l)))
}
