//! Matching at order a, exact.
//!
//! M. Buza et al., hep-ph/9612398, eqs. (B.2) and (B.6). For an intrinsic heavy density B. Mele, P. Nason, Nucl. Phys.
//! B 361 (1991) 626 and R. Ball et al., arXiv:1510.00009: the LO splitting functions times the logarithm of
//! `mu^2` over `m^2` times the squared momentum fraction that the gluon takes, and a constant.

use super::{Element, by_logarithm};
use crate::colour::{CF, TR};
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;

pub(super) fn kernel(element: Element) -> [Kernel; 3] {
    match element {
        Element::HeavyGluon => by_logarithm([Term::zero(), Term::smooth(heavy_gluon_log), Term::zero()]),
        Element::GluonGluon => by_logarithm([Term::zero(), Term::delta(-4.0 / 3.0 * TR), Term::zero()]),
        Element::HeavyHeavy => by_logarithm([
            // 2 CF [(1+z^2)/(1-z) (-2 ln(1-z) - 1)]_+ taken apart.
            Term::full(heavy_heavy, &[-4.0 * CF, -8.0 * CF], 4.0 * CF),
            Term::full(heavy_heavy_log, &[4.0 * CF], 3.0 * CF),
            Term::zero(),
        ]),
        Element::GluonHeavy => by_logarithm([Term::smooth(gluon_heavy), Term::smooth(gluon_heavy_log), Term::zero()]),
        Element::HeavyQuark | Element::GluonQuark | Element::LightQuark => std::array::from_fn(|_| Kernel::default()),
    }
}

/// The LO splitting function of the gluon into `h + hbar` of one flavour.
pub(super) fn heavy_gluon_log(point: &Point) -> f64 {
    let (z, y) = (point.z, point.one_minus_z);
    4.0 * TR * (z * z + y * y)
}

fn heavy_heavy(point: &Point) -> f64 {
    2.0 * CF * (1.0 + point.z) * (1.0 + 2.0 * point.ln_1mz)
}

fn heavy_heavy_log(point: &Point) -> f64 {
    -2.0 * CF * (1.0 + point.z)
}

fn gluon_heavy(point: &Point) -> f64 {
    -gluon_heavy_log(point) * (1.0 + 2.0 * point.ln_z)
}

fn gluon_heavy_log(point: &Point) -> f64 {
    let y = point.one_minus_z;
    2.0 * CF * (1.0 + y * y) / point.z
}
