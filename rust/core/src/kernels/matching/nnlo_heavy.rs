//! The heavy quark from the light densities at order a^2.
//!
//! M. Buza et al., hep-ph/9612398, eqs. (B.1) from the light singlet, (B.3) from the gluon; exact, pole mass. Their
//! logarithm is `ln(m^2/mu^2) = -L`. Compact form of the constant part from the gluon: A. Vogt, hep-ph/0408244.

use super::nlo::heavy_gluon_log;
use super::{HeavyGluonForm, MassKind, by_logarithm};
use crate::colour::{CA_TR, CF_TR, TR};
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;
use crate::numerics::polylog::{ZETA2, ZETA3};

/// `m_pole = m(m) (1 + 16/3 a)` turns L into `L - 32/3 a`; K. Chetyrkin et al., hep-ph/9706430.
const MSBAR_SHIFT: f64 = 32.0 / 3.0;

/// Tunes the momentum sum of the compact form; part of that parametrisation.
const COMPACT_LOCAL: f64 = -0.006;

pub(super) fn from_quark() -> [Kernel; 3] {
    by_logarithm([Term::smooth(quark), Term::smooth(quark_log), Term::smooth(quark_log2)])
}

pub(super) fn from_gluon(mass: MassKind, form: HeavyGluonForm) -> [Kernel; 3] {
    let constant = match (form, mass) {
        (HeavyGluonForm::Exact, MassKind::Pole) => gluon_exact,
        (HeavyGluonForm::Exact, MassKind::Msbar) => gluon_exact_msbar,
        (HeavyGluonForm::Compact, MassKind::Pole) => gluon_compact,
        (HeavyGluonForm::Compact, MassKind::Msbar) => gluon_compact_msbar,
    };
    let local = match form {
        HeavyGluonForm::Exact => 0.0,
        HeavyGluonForm::Compact => COMPACT_LOCAL,
    };
    by_logarithm([Term::full(constant, &[], local), Term::smooth(gluon_log), Term::smooth(gluon_log2)])
}

fn quark(point: &Point) -> f64 {
    let (z, l) = (point.z, point.ln_z);
    let dilogarithm = point.li2_1mz - ZETA2;
    CF_TR
        * ((1.0 + z) * (32.0 * point.s12_1mz + l * (16.0 * dilogarithm - 4.0 / 3.0 * l * l))
            + (32.0 / (3.0 * z) + 8.0 - z * (8.0 + 32.0 / 3.0 * z)) * dilogarithm
            + l * ((2.0 + z * (10.0 + 16.0 / 3.0 * z)) * l - 56.0 / 3.0 - z * (88.0 / 3.0 + 448.0 / 9.0 * z))
            - 448.0 / (27.0 * z)
            - 4.0 / 3.0
            + z * (-124.0 / 3.0 + 1600.0 / 27.0 * z))
}

fn quark_log(point: &Point) -> f64 {
    let (z, l) = (point.z, point.ln_z);
    -CF_TR
        * (l * (8.0 * (1.0 + z) * l - 8.0 - z * (40.0 + 64.0 / 3.0 * z)) - 160.0 / (9.0 * z)
            + 16.0
            + z * (-48.0 + 448.0 / 9.0 * z))
}

fn quark_log2(point: &Point) -> f64 {
    let (z, l) = (point.z, point.ln_z);
    CF_TR * (-8.0 * (1.0 + z) * l - 16.0 / (3.0 * z) - 4.0 + z * (4.0 + 16.0 / 3.0 * z))
}

fn gluon_exact(point: &Point) -> f64 {
    CF_TR * gluon_abelian(point) + CA_TR * gluon_nonabelian(point)
}

fn gluon_abelian(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    let (li2, li3, s12) = (point.li2_1mz, point.li3_1mz, point.s12_1mz);
    (1.0 - 2.0 * z + 2.0 * z * z)
        * (8.0 * ZETA3 + 4.0 / 3.0 * l1 * l1 * l1 - 8.0 * l1 * li2 + 8.0 * ZETA2 * l - 4.0 * l * l1 * l1
            + 2.0 / 3.0 * l * l * l
            - 8.0 * l * li2
            + 8.0 * li3
            - 24.0 * s12)
        + z * z * (l * (16.0 * (li2 - ZETA2) + 4.0 / 3.0 * l * l) + 32.0 * s12)
        - (4.0 + z * (96.0 - 64.0 * z)) * li2
        - (4.0 + z * (-48.0 + 40.0 * z)) * ZETA2
        - (8.0 + z * (48.0 - 24.0 * z)) * l * l1
        + (4.0 + z * (8.0 - 12.0 * z)) * l1 * l1
        - (1.0 + z * (12.0 - 20.0 * z)) * l * l
        - z * (52.0 - 48.0 * z) * l1
        - (16.0 + z * (18.0 + 48.0 * z)) * l
        + 26.0
        + z * (-82.0 + 80.0 * z)
}

fn gluon_nonabelian(point: &Point) -> f64 {
    let (z, l, l1, lp) = (point.z, point.ln_z, point.ln_1mz, point.ln_1pz);
    let (li2, li3, s12) = (point.li2_1mz, point.li3_1mz, point.s12_1mz);
    let (li2_mz, li3_mz, s12_mz) = (point.li2_mz, point.li3_mz, point.s12_mz);
    (1.0 - 2.0 * z + 2.0 * z * z) * (l1 * (8.0 * li2 - 4.0 / 3.0 * l1 * l1) - 8.0 * li3)
        + (1.0 + 2.0 * z + 2.0 * z * z)
            * (lp * (-8.0 * ZETA2 - 16.0 * li2_mz - 8.0 * l * lp + 4.0 * l * l) + 8.0 * l * li2_mz
                - 8.0 * li3_mz
                - 16.0 * s12_mz)
        + (16.0 + 64.0 * z) * (2.0 * s12 + l * (li2 - ZETA2))
        - (4.0 / 3.0 + 8.0 / 3.0 * z) * l * l * l
        + (8.0 - 32.0 * z + 16.0 * z * z) * ZETA3
        + 16.0 * z * (1.0 + z) * (li2_mz + l * lp)
        + (32.0 / (3.0 * z) + 12.0 + z * (64.0 - 272.0 / 3.0 * z)) * li2
        - (32.0 / (3.0 * z) + 12.0 + z * (48.0 - 260.0 / 3.0 * z)) * ZETA2
        - 4.0 * z * z * l * l1
        - (2.0 + z * (8.0 - 10.0 * z)) * l1 * l1
        + (2.0 + z * (8.0 + 46.0 / 3.0 * z)) * l * l
        + (4.0 + z * (16.0 - 16.0 * z)) * l1
        - (56.0 / 3.0 + z * (172.0 / 3.0 + 1600.0 / 9.0 * z)) * l
        - 448.0 / (27.0 * z)
        - 4.0 / 3.0
        + z * (-628.0 / 3.0 + 6352.0 / 27.0 * z)
}

fn gluon_compact(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    -24.89 / z - 187.8 + 249.6 * z
        - 146.8 * l * l * l1
        - l * (93.68 + l * (3.292 + 1.556 * l))
        - l1 * (2.770 + l1 * (0.400 + 1.111 * l1))
}

fn gluon_exact_msbar(point: &Point) -> f64 {
    gluon_exact(point) - MSBAR_SHIFT * heavy_gluon_log(point)
}

fn gluon_compact_msbar(point: &Point) -> f64 {
    gluon_compact(point) - MSBAR_SHIFT * heavy_gluon_log(point)
}

fn gluon_log(point: &Point) -> f64 {
    let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
    let pqg = 8.0 - 16.0 * z + 16.0 * z * z;
    let abelian = pqg * (l1 * (2.0 * l - l1) + 2.0 * ZETA2)
        - (4.0 - 8.0 * z + 16.0 * z * z) * l * l
        - 32.0 * z * point.one_minus_z * l1
        - (12.0 - 16.0 * z + 32.0 * z * z) * l
        - 56.0
        + z * (116.0 - 80.0 * z);
    let rest = 16.0 * (1.0 + 2.0 * z + 2.0 * z * z) * (point.li2_mz + l * point.ln_1pz)
        + pqg * l1 * l1
        + (8.0 + 16.0 * z) * l * l
        + 32.0 * z * (ZETA2 + point.one_minus_z * l1)
        - (8.0 + z * (64.0 + 352.0 / 3.0 * z)) * l
        - 160.0 / (9.0 * z)
        + 16.0
        + z * (-200.0 + 1744.0 / 9.0 * z);
    -CF_TR * abelian - CA_TR * rest
}

fn gluon_log2(point: &Point) -> f64 {
    let (z, y, l, l1) = (point.z, point.one_minus_z, point.ln_z, point.ln_1mz);
    let pqg = z * z + y * y;
    let abelian = 8.0 * pqg * l1 - (4.0 - 8.0 * z + 16.0 * z * z) * l - 2.0 + 8.0 * z;
    let rest = -8.0 * pqg * l1 - (8.0 + 32.0 * z) * l - 16.0 / (3.0 * z) - 4.0 + z * (-32.0 + 124.0 / 3.0 * z);
    CF_TR * abelian + CA_TR * rest - TR * TR * 16.0 / 3.0 * pqg
}
