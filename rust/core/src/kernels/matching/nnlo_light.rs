//! Matching of the light quarks and the gluon at order a^2, exact.
//!
//! M. Buza et al., hep-ph/9612398, eqs. (B.4) light quark, (B.5) gluon from quark, (B.7) gluon from gluon; pole mass.
//! Their logarithm is `ln(m^2/mu^2) = -L`.

use super::{MassKind, by_logarithm};
use crate::colour::{CA_TR, CF_TR, TR};
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;
use crate::numerics::polylog::{ZETA2, ZETA3};

/// `m_pole = m(m) (1 + 16/3 a)` turns the logarithm `-2/3 L` of order a into `+64/9 a^2`; K. Chetyrkin et al.,
/// hep-ph/9706430.
const MSBAR_GLUON: f64 = 64.0 / 9.0;

pub(super) fn quark_from_quark() -> [Kernel; 3] {
    by_logarithm([
        Term::full(quark, &[CF_TR * 224.0 / 27.0], CF_TR * (-8.0 / 3.0 * ZETA3 + 40.0 / 9.0 * ZETA2 + 73.0 / 18.0)),
        Term::full(quark_log, &[CF_TR * -80.0 / 9.0], -CF_TR * (16.0 / 3.0 * ZETA2 + 2.0 / 3.0)),
        Term::full(quark_log2, &[CF_TR * 8.0 / 3.0], CF_TR * 2.0),
    ])
}

pub(super) fn gluon_from_quark() -> [Kernel; 3] {
    by_logarithm([Term::smooth(gluon_quark), Term::smooth(gluon_quark_log), Term::smooth(gluon_quark_log2)])
}

pub(super) fn gluon_from_gluon(mass: MassKind) -> [Kernel; 3] {
    let shift = match mass {
        MassKind::Pole => 0.0,
        MassKind::Msbar => MSBAR_GLUON,
    };
    by_logarithm([
        Term::full(gluon, &[CA_TR * 224.0 / 27.0], -15.0 * CF_TR + 10.0 / 9.0 * CA_TR + shift),
        Term::full(gluon_log, &[CA_TR * -80.0 / 9.0], -4.0 * CF_TR - 16.0 / 3.0 * CA_TR),
        Term::full(gluon_log2, &[CA_TR * 8.0 / 3.0], 16.0 / 9.0 * TR * TR),
    ])
}

fn quark(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    CF_TR * ((1.0 + z * z) / y * l * (2.0 / 3.0 * l + 20.0 / 9.0) + 8.0 / 3.0 * y * l + 44.0 / 27.0 - 268.0 / 27.0 * z)
}

fn quark_log(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    -CF_TR * (8.0 / 3.0 * (1.0 + z * z) / y * l + 8.0 / 9.0 - 88.0 / 9.0 * z)
}

fn quark_log2(point: &Point) -> f64 {
    -CF_TR * 4.0 / 3.0 * (1.0 + point.z)
}

fn gluon_quark(point: &Point) -> f64 {
    let (z, l1) = (point.z, point.ln_1mz);
    CF_TR
        * (4.0 / 3.0 * (2.0 / z - 2.0 + z) * l1 * l1
            + 8.0 / 9.0 * (10.0 / z - 10.0 + 8.0 * z) * l1
            + (448.0 / z - 448.0 + 344.0 * z) / 27.0)
}

fn gluon_quark_log(point: &Point) -> f64 {
    let (z, l1) = (point.z, point.ln_1mz);
    -CF_TR * ((160.0 / z - 160.0 + 128.0 * z) / 9.0 + 16.0 / 3.0 * (2.0 / z - 2.0 + z) * l1)
}

fn gluon_quark_log2(point: &Point) -> f64 {
    let z = point.z;
    CF_TR * 8.0 / 3.0 * (2.0 / z - 2.0 + z)
}

fn gluon(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    CF_TR
        * (l * (32.0 + 48.0 * z + l * (6.0 + 10.0 * z + 4.0 / 3.0 * (1.0 + z) * l)) - 8.0 / z + 80.0
            - z * (48.0 + 24.0 * z))
        + CA_TR
            * (l * ((52.0 + 88.0 * z) / 9.0 + 4.0 / 3.0 * (1.0 + z) * l) - 4.0 / 3.0 * z * l1
                + (556.0 / z - 628.0 + z * (548.0 - 700.0 * z)) / 27.0)
}

fn gluon_log(point: &Point) -> f64 {
    let (z, l) = (point.z, point.ln_z);
    -CF_TR * (l * (24.0 + 40.0 * z + 8.0 * (1.0 + z) * l) - 16.0 / (3.0 * z) + 64.0 - z * (32.0 + 80.0 / 3.0 * z))
        - CA_TR * (16.0 / 3.0 * (1.0 + z) * l + (184.0 / z - 232.0 + z * (152.0 - 184.0 * z)) / 9.0)
}

fn gluon_log2(point: &Point) -> f64 {
    let (z, l) = (point.z, point.ln_z);
    CF_TR * (8.0 * (1.0 + z) * l + 16.0 / (3.0 * z) + 4.0 - z * (4.0 + 16.0 / 3.0 * z))
        + CA_TR * 8.0 / 3.0 * (1.0 / z - 2.0 + z - z * z)
}
