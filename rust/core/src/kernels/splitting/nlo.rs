//! NLO splitting functions, exact.
//!
//! G. Curci, W. Furmanski, R. Petronzio, Nucl. Phys. B 175 (1980) 27 and W. Furmanski, R. Petronzio,
//! Phys. Lett. B 97 (1980) 437, in the form of R. K. Ellis, W. J. Stirling, B. R. Webber, "QCD and Collider
//! Physics" (1996), section 4.3. They expand in `alpha_s/(2 pi)`, hence the factor 4 below.

use super::Channel;
use crate::colour::{CA, CF, TR};
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;
use crate::numerics::polylog::{ZETA2, ZETA3};

/// `(alpha_s/(2 pi))^2 = NORM a^2`.
const NORM: f64 = 4.0;

/// Coefficient of `2/(1-z)_+` in the quark kernel over CF, without and with nf (the two-loop cusp).
const CUSP: f64 = CA * (67.0 / 18.0 - ZETA2);
const CUSP_NF: f64 = -TR * 10.0 / 9.0;

const QUARK_LOCAL: f64 =
    CF * CF * (3.0 / 8.0 - 3.0 * ZETA2 + 6.0 * ZETA3) + CF * CA * (17.0 / 24.0 + 11.0 / 3.0 * ZETA2 - 3.0 * ZETA3);
const QUARK_LOCAL_NF: f64 = -CF * TR * (1.0 / 6.0 + 4.0 / 3.0 * ZETA2);
const GLUON_LOCAL: f64 = CA * CA * (8.0 / 3.0 + 3.0 * ZETA3);
const GLUON_LOCAL_NF: f64 = -CF * TR - 4.0 / 3.0 * CA * TR;

pub(super) fn kernel(channel: Channel) -> Kernel {
    match channel {
        Channel::NsPlus => nonsinglet(plus),
        Channel::NsMinus => nonsinglet(minus),
        Channel::NsSea => Kernel::default(),
        Channel::PureSinglet => vec![Term::zero(), Term::smooth(pure_singlet)].into(),
        Channel::QuarkGluon => vec![Term::zero(), Term::smooth(quark_gluon)].into(),
        Channel::GluonQuark => vec![Term::smooth(gluon_quark), Term::smooth(gluon_quark_nf)].into(),
        Channel::GluonGluon => vec![
            Term::full(gluon_gluon, &[NORM * 2.0 * CA * CUSP], NORM * GLUON_LOCAL),
            Term::full(gluon_gluon_nf, &[NORM * 2.0 * CA * CUSP_NF], NORM * GLUON_LOCAL_NF),
        ]
        .into(),
    }
}

fn nonsinglet(regular: fn(&Point) -> f64) -> Kernel {
    vec![
        Term::full(regular, &[NORM * 2.0 * CF * CUSP], NORM * QUARK_LOCAL),
        Term::full(quark_quark_nf, &[NORM * 2.0 * CF * CUSP_NF], NORM * QUARK_LOCAL_NF),
    ]
    .into()
}

/// `S2(z)`, the integral of `ln((1-y)/y)/y` between `z/(1+z)` and `1/(1+z)`.
fn s2(point: &Point) -> f64 {
    let l = point.ln_z;
    -2.0 * point.li2_mz + l * (0.5 * l - 2.0 * point.ln_1pz) - ZETA2
}

fn plus(point: &Point) -> f64 {
    NORM * (quark_quark(point) + quark_antiquark(point))
}

fn minus(point: &Point) -> f64 {
    NORM * (quark_quark(point) - quark_antiquark(point))
}

/// `V_qq` without nf, its `1/(1-z)_+` and `delta(1-z)` taken out.
fn quark_quark(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    let pqq = 2.0 / y - 1.0 - z;
    CF * CF * (-l * (2.0 * l1 + 1.5) * pqq - (1.5 + 3.5 * z) * l - 0.5 * (1.0 + z) * l * l - 5.0 * y)
        + CF * CA * (l * (0.5 * l + 11.0 / 6.0) * pqq + (1.0 + z) * l + 20.0 / 3.0 * y)
        - CF * CUSP * (1.0 + z)
}

fn quark_quark_nf(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    let pqq = 2.0 / y - 1.0 - z;
    NORM * CF * (-TR * (2.0 / 3.0 * l * pqq + 4.0 / 3.0 * y) - CUSP_NF * (1.0 + z))
}

/// `V_qqbar`.
fn quark_antiquark(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    let pqq_crossed = 2.0 / (1.0 + z) - y;
    CF * (CF - 0.5 * CA) * (2.0 * pqq_crossed * s2(point) + 2.0 * (1.0 + z) * l + 4.0 * y)
}

fn pure_singlet(point: &Point) -> f64 {
    let (z, l) = (point.z, point.ln_z);
    NORM * 2.0
        * CF
        * TR
        * (20.0 / (9.0 * z) - 2.0 + z * (6.0 - 56.0 / 9.0 * z) + l * (1.0 + z * (5.0 + 8.0 / 3.0 * z) - (1.0 + z) * l))
}

fn quark_gluon(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    let pqg = z * z + y * y;
    let pqg_crossed = z * z + (1.0 + z) * (1.0 + z);
    let odds = l1 - l;
    let abelian = 4.0 - 9.0 * z - l * (1.0 - 4.0 * z + (1.0 - 2.0 * z) * l)
        + 4.0 * l1
        + (odds * (2.0 * odds - 4.0) - 4.0 * ZETA2 + 10.0) * pqg;
    let rest =
        182.0 / 9.0 + 14.0 / 9.0 * z + 40.0 / (9.0 * z) + l * (136.0 / 3.0 * z - 38.0 / 3.0 - (2.0 + 8.0 * z) * l)
            - 4.0 * l1
            + (l * (44.0 / 3.0 - l) + l1 * (4.0 - 2.0 * l1) + 2.0 * ZETA2 - 218.0 / 9.0) * pqg
            + 2.0 * pqg_crossed * s2(point);
    NORM * TR * (CF * abelian + CA * rest)
}

fn gluon_quark(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    let pgq = (1.0 + y * y) / z;
    let pgq_crossed = -(1.0 + (1.0 + z) * (1.0 + z)) / z;
    let abelian = -2.5 - 3.5 * z + l * (2.0 + 3.5 * z - (1.0 - 0.5 * z) * l) - 2.0 * z * l1 - l1 * (3.0 + l1) * pgq;
    let rest = 28.0 / 9.0
        + z * (65.0 / 18.0 + 44.0 / 9.0 * z)
        + l * ((4.0 + z) * l - 12.0 - z * (5.0 + 8.0 / 3.0 * z))
        + 2.0 * z * l1
        + s2(point) * pgq_crossed
        + (0.5 + l * (0.5 * l - 2.0 * l1) + l1 * (11.0 / 3.0 + l1) - ZETA2) * pgq;
    NORM * CF * (CF * abelian + CA * rest)
}

fn gluon_quark_nf(point: &Point) -> f64 {
    let (z, y, l1) = (point.z, point.one_minus_z, point.ln_1mz);
    let pgq = (1.0 + y * y) / z;
    -NORM * CF * TR * (4.0 / 3.0 * z + (20.0 / 9.0 + 4.0 / 3.0 * l1) * pgq)
}

fn gluon_gluon(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    let rest = 1.0 / z - 2.0 + z * y;
    let crossed = 1.0 / (1.0 + z) - 1.0 / z - 2.0 - z * (1.0 + z);
    NORM * CA
        * (CA
            * (13.5 * y
                + 67.0 / 9.0 * (z * z - 1.0 / z)
                + l * (4.0 * (1.0 + z) * l - 25.0 / 3.0 + z * (11.0 / 3.0 - 44.0 / 3.0 * z))
                + l * (l - 4.0 * l1) * (1.0 / y + rest)
                + 2.0 * crossed * s2(point))
            + 2.0 * CUSP * rest)
}

fn gluon_gluon_nf(point: &Point) -> f64 {
    let (z, y, l) = (point.z, point.one_minus_z, point.ln_z);
    let rest = 1.0 / z - 2.0 + z * y;
    let abelian = -16.0 + z * (8.0 + 20.0 / 3.0 * z) + 4.0 / (3.0 * z) - l * (6.0 + 10.0 * z + 2.0 * (1.0 + z) * l);
    let other = 2.0 * y + 26.0 / 9.0 * (z * z - 1.0 / z) - 4.0 / 3.0 * (1.0 + z) * l;
    NORM * (CF * TR * abelian + CA * TR * other + 2.0 * CA * CUSP_NF * rest)
}
