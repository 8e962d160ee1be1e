//! LO splitting functions, exact.
//!
//! G. Altarelli, G. Parisi, Nucl. Phys. B 126 (1977) 298; normalised to `a = alpha_s/(4 pi)` as in
//! S. Moch, J. Vermaseren, A. Vogt, hep-ph/0403192 eq. (4.4) and hep-ph/0404111 eq. (4.6).

use super::Channel;
use crate::colour::{CA, CF, TR};
use crate::kernels::kernel::{Kernel, Term};
use crate::numerics::endpoint::Point;

pub(super) fn kernel(channel: Channel) -> Kernel {
    match channel {
        Channel::NsPlus | Channel::NsMinus => vec![Term::full(quark_quark, &[4.0 * CF], 3.0 * CF)].into(),
        Channel::NsSea | Channel::PureSinglet => Kernel::default(),
        Channel::QuarkGluon => vec![Term::zero(), Term::smooth(quark_gluon)].into(),
        Channel::GluonQuark => vec![Term::smooth(gluon_quark)].into(),
        Channel::GluonGluon => {
            vec![Term::full(gluon_gluon, &[4.0 * CA], 11.0 / 3.0 * CA), Term::delta(-4.0 / 3.0 * TR)].into()
        }
    }
}

fn quark_quark(point: &Point) -> f64 {
    -2.0 * CF * (1.0 + point.z)
}

fn quark_gluon(point: &Point) -> f64 {
    let (z, y) = (point.z, point.one_minus_z);
    4.0 * TR * (z * z + y * y)
}

fn gluon_quark(point: &Point) -> f64 {
    let y = point.one_minus_z;
    2.0 * CF * (1.0 + y * y) / point.z
}

fn gluon_gluon(point: &Point) -> f64 {
    let (z, y) = (point.z, point.one_minus_z);
    4.0 * CA * (1.0 / z - 2.0 + z * y)
}
