//! NNLO singlet splitting functions, parametrised to about one part in a thousand or better.
//!
//! A. Vogt, S. Moch, J. Vermaseren, hep-ph/0404111, eqs. (4.32)-(4.35); the `nf^2` part of gq is exact. In gg the
//! authors shift the coefficients of `delta(1-z)` a little from their exact values so that the momentum sum comes
//! out right; the shifts belong to the parametrisation and are written as separate numbers.

use super::Channel;
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;

pub(super) fn kernel(channel: Channel) -> Kernel {
    match channel {
        Channel::PureSinglet => vec![Term::zero(), Term::smooth(pure_singlet_nf), Term::smooth(pure_singlet_nf2)],
        Channel::QuarkGluon => vec![Term::zero(), Term::smooth(quark_gluon_nf), Term::smooth(quark_gluon_nf2)],
        Channel::GluonQuark => {
            vec![Term::smooth(gluon_quark), Term::smooth(gluon_quark_nf), Term::smooth(gluon_quark_nf2)]
        }
        Channel::GluonGluon => vec![
            Term::full(gluon_gluon, &[2643.521], 4425.448 + 0.446),
            Term::full(gluon_gluon_nf, &[-412.172], -528.720 - 0.003),
            Term::full(gluon_gluon_nf2, &[-16.0 / 9.0], 6.4630),
        ],
        _ => vec![],
    }
    .into()
}

fn pure_singlet_nf(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * (-l1 * (72.11 + l1 * (9.751 + 5.926 * l1)) + 177.4 + z * (392.9 - 101.4 * z) - 57.04 * l * l1
        + l * (-661.6 + l * (131.4 + l * (-400.0 / 9.0 + 160.0 / 27.0 * l)))
        - (506.0 + 3584.0 / 27.0 * l) / z)
}

fn pure_singlet_nf2(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    y * (l1 * (5.944 + 1.778 * l1) + 100.1 + z * (-125.2 + z * (49.26 - 12.59 * z)) - 1.889 * l * l1
        + l * (61.75 + l * (17.89 + 32.0 / 27.0 * l))
        + 256.0 / (81.0 * z))
}

fn quark_gluon_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (104.42 + l1 * (-120.5 + l1 * (-70.0 / 9.0 + 100.0 / 27.0 * l1)))
        + 2522.0
        + z * (-3316.0 + 2126.0 * z)
        + l * l1 * (1823.0 - 25.22 * l)
        - 252.5 * z * l * l * l
        + l * (424.9 + l * (881.5 + l * (-44.0 / 3.0 + 536.0 / 27.0 * l)))
        - (1268.3 + 896.0 / 3.0 * l) / z
}

fn quark_gluon_nf2(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (-5.496 + l1 * (200.0 / 27.0 + 20.0 / 27.0 * l1)) - 252.0 + z * (158.0 + z * (145.4 - 139.28 * z))
        - l * l1 * (53.09 + 80.616 * l)
        + z * l * l * (-98.07 + 11.70 * l)
        - l * (254.0 + l * (90.80 + l * (376.0 / 27.0 + 16.0 / 9.0 * l)))
        + 1112.0 / (243.0 * z)
}

fn gluon_quark(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    l1 * (2193.0 + l1 * (606.3 + l1 * (2200.0 / 27.0 + 400.0 / 81.0 * l1))) - 4307.0
        + z * (489.3 + z * (1452.0 + 146.0 * z))
        - 447.3 * l * l * l1
        - 972.9 * z * l * l
        + l * (4033.0 + l * (-1794.0 + l * (1568.0 / 9.0 - 4288.0 / 81.0 * l)))
        + (6163.1 + 1189.3 * l) / z
}

fn gluon_quark_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    -l1 * (296.7 + l1 * (68.069 + 400.0 / 81.0 * l1)) - 183.8 + z * (33.35 - 277.9 * z) + 108.6 * z * l * l
        - 49.68 * l * l1
        + l * (174.8 + l * (20.39 + l * (704.0 / 81.0 + 128.0 / 27.0 * l)))
        + (-46.41 + 71.082 * l) / z
}

fn gluon_quark_nf2(point: &Point) -> f64 {
    let (z, l1) = (point.z, point.ln_1mz);
    (64.0 * (2.0 * z + 1.0 - 1.0 / z)
        + l1 * (320.0 * (1.0 / z - 1.0 + 0.8 * z) + 96.0 * (1.0 / z - 1.0 + 0.5 * z) * l1))
        / 27.0
}

fn gluon_gluon(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    3589.0 * l1 - 20852.0
        + z * (3968.0 + z * (-3363.0 + 4848.0 * z))
        + l * l1 * (7305.0 + 8757.0 * l)
        + l * (274.4 + l * (-7471.0 + l * (72.0 - 144.0 * l)))
        + (14214.0 + 2675.8 * l) / z
}

fn gluon_gluon_nf(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    -320.0 * l1 - 350.2
        + z * (755.7 + z * (-713.8 + 559.3 * z))
        + l * l1 * (26.15 - 808.7 * l)
        + l * (1541.0 + l * (491.3 + l * (832.0 / 9.0 + 512.0 / 27.0 * l)))
        + (182.96 + 157.27 * l) / z
}

fn gluon_gluon_nf2(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    -13.878 + z * (153.4 + z * (-187.7 + 52.75 * z)) - l * l1 * (115.6 - 85.25 * z + 63.23 * l)
        + l * (-3.422 + l * (9.680 - 32.0 / 27.0 * l))
        - 680.0 / (243.0 * z)
}
