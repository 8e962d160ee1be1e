//! Single charm quark made by a W on a light quark or a gluon, at order a.
//!
//! T. Gottschalk, Phys. Rev. D 23 (1981) 56; corrected by M. Glueck, S. Kretzer, E. Reya, hep-ph/9603304, eqs. (3)-(8)
//! and tables 1 and 2. With `lambda = Q^2/(Q^2 + m^2)`, `xi = x/lambda`, for a mixing element of one:
//! `F1`, `F2/(2 xi)` and `F3/2` are `q(xi) + a (C_i * (q or g))(xi)`; so `FL/2 = F2/2 - x F1` has
//! `C_2 - lambda C_1` and `x F3/2` has `lambda C_3`. The paper's coefficients of `alpha_s/(2 pi)` are doubled.
//!
//! The paper multiplies plus distributions by functions; here the functions stand at z = 1 and what is left is
//! regular, written so that nothing cancels at either end or for small `m^2/Q^2`. Below `D = 1 - lambda z` and
//! `k = lambda/(1 - lambda) = Q^2/m^2`, so that `D = (1 - lambda)(1 + k (1-z))`.

use super::massive::{MassiveKernel, Onset};
use crate::colour::{CF, TR};
use crate::numerics::endpoint::Logarithms;
use crate::numerics::polylog::{ZETA2, li2_with_complement};

/// One `Q^2/m^2`.
#[derive(Clone, Copy)]
pub(super) struct Single {
    lambda: f64,
    /// `1 - lambda`
    rest: f64,
    k: f64,
    ln_lambda: f64,
    /// `ln(1 - lambda)`
    ln_rest: f64,
}

impl Single {
    pub fn of(q2: f64, m2: f64) -> Self {
        let sum = q2 + m2;
        let (lambda, rest) = (q2 / sum, m2 / sum);
        Self { lambda, rest, k: q2 / m2, ln_lambda: -(m2 / q2).ln_1p(), ln_rest: -(q2 / m2).ln_1p() }
    }

    /// A gluon kernel.
    pub fn smooth(self, function: fn(&Self, &Logarithms) -> f64) -> MassiveKernel {
        self.kernel(move |z| function(&self, z))
    }

    fn kernel(self, regular: impl Fn(&Logarithms) -> f64 + Send + Sync + 'static) -> MassiveKernel {
        // D vanishes where z = 1/lambda.
        MassiveKernel::smooth(1.0 / self.lambda, Onset::Logarithms(-self.ln_lambda), regular)
    }

    fn denominator(&self, z: &Logarithms) -> f64 {
        self.rest + self.lambda * z.one_minus_z
    }

    /// `ln(1 + k (1-z)) - ln z = ln(D/((1-lambda) z))`, the paper's `L_lambda`.
    fn mass_logarithm(&self, z: &Logarithms) -> f64 {
        (self.k * z.one_minus_z).ln_1p() - z.ln_z
    }
}

/// The gluon: table 2 of the paper.
impl Single {
    pub fn f2_gluon(&self, z: &Logarithms) -> f64 {
        let (lambda, rest) = (self.lambda, self.rest);
        let smooth = (8.0 - 18.0 * rest + 12.0 * rest * rest) * z.z * z.one_minus_z;
        // (1-lambda)/D - 1 = -lambda (1-z)/D
        let pole = -lambda * z.one_minus_z / self.denominator(z);
        let logarithm = rest * z.z * self.mass_logarithm(z) * (6.0 * lambda - 12.0 * lambda * lambda * z.z);
        2.0 * (self.collinear(z) + smooth + pole + logarithm)
    }

    /// `C_2 - lambda C_1`; the poles in D cancel.
    pub fn fl_gluon(&self, z: &Logarithms) -> f64 {
        let (lambda, rest) = (self.lambda, self.rest);
        let smooth = (8.0 - 18.0 * rest + 12.0 * rest * rest - 4.0 * lambda * lambda) * z.z * z.one_minus_z;
        let logarithm = lambda * z.z * self.mass_logarithm(z) * (4.0 - 8.0 * lambda * z.z);
        2.0 * (rest * (self.collinear(z) + logarithm) + smooth)
    }

    /// `lambda C_3`
    pub fn f3_gluon(&self, z: &Logarithms) -> f64 {
        let (lambda, rest) = (self.lambda, self.rest);
        let logarithms = 2.0 * z.ln_1mz() - self.ln_lambda - self.ln_rest - 2.0 * (self.k * z.one_minus_z).ln_1p();
        let smooth = 2.0 * rest * z.z * z.one_minus_z;
        let logarithm = rest * z.z * self.mass_logarithm(z) * (2.0 * lambda * z.z - 2.0 * z.one_minus_z);
        2.0 * lambda * (splitting(z) * logarithms + smooth + logarithm)
    }

    /// `P_qg` times its logarithms in F1 and F2; those of D cancel.
    fn collinear(&self, z: &Logarithms) -> f64 {
        splitting(z) * (2.0 * (z.ln_1mz() - z.ln_z) - self.ln_rest - self.ln_lambda)
    }
}

/// `P_qg` of the paper.
fn splitting(z: &Logarithms) -> f64 {
    TR * (z.z * z.z + z.one_minus_z * z.one_minus_z)
}

/// The quark: table 1 of the paper.
impl Single {
    pub fn f2_quark(self) -> MassiveKernel {
        let plus = self.plus(1.0);
        self.quark(move |z| self.common(z) + self.f2_own(z)).with(plus, 2.0 * CF * (self.local() + self.k_a()))
    }

    pub fn fl_quark(self) -> MassiveKernel {
        let (lambda, rest) = (self.lambda, self.rest);
        self.quark(move |z| rest * self.common(z) + self.f2_own(z) - lambda * self.f1_own(z))
            .with(self.plus(rest), 2.0 * CF * (rest * self.local() + self.k_a()))
    }

    pub fn f3_quark(self) -> MassiveKernel {
        let lambda = self.lambda;
        // B_1 = -1 - z^2 leaves 1 + z beside -2/(1-z); B_2 = 1 - z.
        self.quark(move |z| lambda * (self.common(z) + 1.0 + z.z + z.one_minus_z / self.denominator(z)))
            .with(self.plus(lambda), 2.0 * CF * lambda * self.local())
    }

    fn quark(self, regular: impl Fn(&Logarithms) -> f64 + Send + Sync + 'static) -> MassiveKernel {
        self.kernel(move |z| 2.0 * CF * regular(z))
    }

    /// Plus distributions of `factor` times what F1, F2 and F3 share, `B_1 = -2` at z = 1 included.
    fn plus(self, factor: f64) -> Vec<f64> {
        let single = -2.0 * self.ln_lambda - 2.0 * self.ln_rest - 2.0;
        vec![2.0 * CF * factor * single, 2.0 * CF * factor * 4.0]
    }

    /// The regular part that F1, F2 and F3 share.
    fn common(self, z: &Logarithms) -> f64 {
        let (y, d) = (z.one_minus_z, self.denominator(z));
        let square = 1.0 + z.z * z.z;
        (1.0 + z.z) * (self.ln_lambda + self.ln_rest - 2.0 * z.ln_1mz()) - square * (z.ln_z + (self.k * y).ln_1p()) / y
            + 0.5 * y / (d * d)
    }

    /// `B_1` and `B_2` of F2, beyond -2/(1-z): their poles at z = 0 cancel.
    fn f2_own(self, z: &Logarithms) -> f64 {
        2.0 + 2.0 * z.z + (self.lambda - self.rest - z.z) / self.denominator(z)
    }

    /// `B_1 = 1 - 4z + z^2` beyond -2/(1-z) and `B_2 = z (1-z)`.
    fn f1_own(self, z: &Logarithms) -> f64 {
        3.0 - z.z + z.z * z.one_minus_z / self.denominator(z)
    }

    /// Coefficient of `delta(1-z)` that F1, F2 and F3 share: that of the paper, less what its plus distributions in D
    /// take away over [0, 1]. Of `-1/(2 lambda) - (1 + 3 lambda)/(2 lambda) K_A - 1/2 int dz (1-z)/D^2`, where much
    /// cancels for small lambda, only the logarithm is left.
    fn local(self) -> f64 {
        let logarithm = (3.0 * self.lambda - 2.0) / (2.0 * self.lambda) * self.ln_rest;
        -1.5 * self.ln_lambda - 4.0 - 2.0 * ZETA2 + logarithm + 2.0 * self.integral_of_logarithm()
    }

    /// The paper's `K_A`.
    fn k_a(self) -> f64 {
        self.rest * self.ln_rest / self.lambda
    }

    /// `int_0^1 dy ln(1 + k y)/y = -Li2(-k)`, by the inversion formula where k > 1.
    fn integral_of_logarithm(self) -> f64 {
        let dilogarithm = |x: f64| li2_with_complement(-x, 1.0 + x);
        if self.k > 1.0 { ZETA2 + 0.5 * self.k.ln().powi(2) + dilogarithm(1.0 / self.k) } else { -dilogarithm(self.k) }
    }
}
