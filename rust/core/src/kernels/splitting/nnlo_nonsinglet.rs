//! NNLO non-singlet splitting functions, parametrised to about one part in a thousand or better.
//!
//! S. Moch, J. Vermaseren, A. Vogt, hep-ph/0403192, eqs. (4.22)-(4.24); the `nf^2` part is exact. The authors
//! shift the coefficients of `delta(1-z)` a little from their exact values so that the moments come out right;
//! the shifts belong to the parametrisation and are written as separate numbers.

use super::Channel;
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;
use crate::numerics::polylog::{ZETA2, ZETA3};

const CUSP: f64 = 1174.898;
const CUSP_NF: f64 = -183.187;
const CUSP_NF2: f64 = -64.0 / 81.0;

const LOCAL: f64 = 1295.624;
const LOCAL_NF: f64 = -173.938;
const LOCAL_NF2: f64 = -64.0 / 81.0 * (51.0 / 16.0 + 3.0 * ZETA3 - 5.0 * ZETA2);

pub(super) fn kernel(channel: Channel) -> Kernel {
    let common = Term::full(both_nf2, &[CUSP_NF2], LOCAL_NF2);
    match channel {
        Channel::NsPlus => {
            vec![Term::full(plus, &[CUSP], LOCAL - 0.24), Term::full(plus_nf, &[CUSP_NF], LOCAL_NF + 0.011), common]
                .into()
        }
        Channel::NsMinus => {
            vec![Term::full(minus, &[CUSP], LOCAL - 0.154), Term::full(minus_nf, &[CUSP_NF], LOCAL_NF + 0.005), common]
                .into()
        }
        Channel::NsSea => vec![Term::zero(), Term::smooth(sea_nf)].into(),
        _ => Kernel::default(),
    }
}

fn plus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    714.1 * l1
        + 1641.1
        + z * (-3135.0 + z * (243.6 - 522.1 * z))
        + l * l1 * (563.9 + 256.8 * l)
        + l * (1258.0 + l * (294.9 + l * (800.0 / 27.0 + 128.0 / 81.0 * l)))
}

fn plus_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    -5120.0 / 81.0 * l1 - 197.0 + z * (381.1 + z * (72.94 + 44.79 * z))
        - 1.497 * z * l * l * l
        - 56.66 * l * l1
        - l * (152.6 + l * (2608.0 / 81.0 + 64.0 / 27.0 * l))
}

fn minus(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    714.1 * l1
        + 1860.2
        + z * (-3505.0 + z * (297.0 - 433.2 * z))
        + l * l1 * (684.0 + 251.2 * l)
        + l * (1465.2 + l * (399.2 + l * (320.0 / 9.0 + 116.0 / 81.0 * l)))
}

fn minus_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    -5120.0 / 81.0 * l1 - 216.62 + z * (406.5 + z * (77.89 + 34.76 * z))
        - 1.136 * z * l * l * l
        - 65.43 * l * l1
        - l * (172.69 + l * (3216.0 / 81.0 + 256.0 / 81.0 * l))
}

fn both_nf2(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    64.0 / 81.0 * (z * l / y * (1.5 * l + 5.0) + 1.0 + y * (6.0 + l * (5.5 + 0.75 * l)))
}

fn sea_nf(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * (l1 * (-163.9 / z - 7.208 * z) + 151.49 + z * (44.51 + z * (-43.12 + 4.82 * z)))
        + l * l1 * (-173.1 + 46.18 * l)
        + l * (178.04 + l * (6.892 + 40.0 / 27.0 * l * (l - 2.0)))
}
