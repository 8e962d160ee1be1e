//! Pair of heavy quarks made by a photon on a gluon, at order a.
//!
//! E. Witten, Nucl. Phys. B 104 (1976) 445; M. Glueck, E. Reya, Phys. Lett. B 83 (1979) 98; E. Laenen, S. Riemersma,
//! J. Smith, W. van Neerven, Nucl. Phys. B 392 (1993) 162. With charge e of the quark, `r = m^2/Q^2`,
//! `F(x) = x e^2 a int_x^zmax dz/z C(z) g(x/z)`, `zmax = 1/(1 + 4 r)`:
//!
//! - `C_2 = 2 { [z^2 + (1-z)^2 + 4 r z (1 - 3z) - 8 r^2 z^2] L + beta [8 z (1-z) - 1 - 4 r z (1-z)] }`,
//! - `C_L = 8 z (1-z) beta - 16 r z^2 L`,
//!
//! `beta^2 = 1 - 4 r z/(1-z)`, `L = ln((1+beta)/(1-beta))`. In `w = z/zmax` it is `K(w) = zmax C(zmax w)`, and near
//! threshold everything is written in `1 - w`, so that no digit is lost there.

use super::massive::{MassiveKernel, Onset};
use crate::numerics::endpoint::Logarithms;

/// One `Q^2/m^2`.
#[derive(Clone, Copy)]
pub(super) struct Pair {
    r: f64,
    z_max: f64,
}

/// What both structure functions need at one w.
struct AtPoint {
    z: f64,
    one_minus_z: f64,
    beta: f64,
    /// `1 - beta^2`
    rest: f64,
    /// `L - 2 beta`
    excess: f64,
}

impl Pair {
    pub fn of(q2: f64, m2: f64) -> Self {
        let r = m2 / q2;
        Self { r, z_max: 1.0 / (1.0 + 4.0 * r) }
    }

    pub fn kernel(self, function: fn(&Self, &Logarithms) -> f64) -> MassiveKernel {
        // beta is infinite where w = 1 + 4 r.
        let onset = Onset::Root((4.0 * self.r).ln_1p().sqrt());
        MassiveKernel::smooth(1.0 / self.z_max, onset, move |w| self.z_max * function(&self, w))
    }

    pub fn f2(&self, w: &Logarithms) -> f64 {
        let AtPoint { z, one_minus_z: y, beta, excess, .. } = self.at(w);
        let rz = self.r * z;
        let of_log = z * z + y * y + 4.0 * rz * (1.0 - 3.0 * z) - 8.0 * rz * rz;
        2.0 * (of_log * (2.0 * beta + excess) + beta * (8.0 * z * y - 1.0 - 4.0 * rz * y))
    }

    /// With `4 r z = (1-z)(1-beta^2)`, and the leading `beta` taken out: `FL` begins with `beta^3`.
    pub fn fl(&self, w: &Logarithms) -> f64 {
        let AtPoint { z, one_minus_z: y, beta, rest, excess } = self.at(w);
        4.0 * z * y * (2.0 * beta.powi(3) - rest * excess)
    }

    fn at(&self, w: &Logarithms) -> AtPoint {
        let four_r = 4.0 * self.r;
        let gap = four_r + w.one_minus_z;
        // beta may round to a little above one where w vanishes.
        let beta = (w.one_minus_z / (self.z_max * gap)).sqrt().min(1.0);
        let rest = four_r * w.z / gap;
        AtPoint {
            z: self.z_max * w.z,
            one_minus_z: self.z_max * gap,
            beta,
            rest,
            excess: if beta < 0.3 { series(beta) } else { 2.0 * beta.ln_1p() - rest.ln() - 2.0 * beta },
        }
    }
}

/// `ln((1+beta)/(1-beta)) - 2 beta = 2 sum_k beta^(2k+1)/(2k+1)`, for beta below 0.3: to rounding with 15 terms.
fn series(beta: f64) -> f64 {
    let square = beta * beta;
    let sum = (1..=15).rev().fold(0.0, |sum, k| (sum + 1.0 / f64::from(2 * k + 1)) * square);
    2.0 * beta * sum
}
