//! The step of the coupling at a heavy-quark threshold, `nl` light flavours below and `nl + 1` above.
//!
//! Upwards `a^(nl+1) = a [1 + sum_n p_n(L) a^n]`, `a = a^(nl)(mu^2)`, with `L = ln(mu^2/M^2)` for a pole mass and
//! `L = ln(mu^2/m(m)^2)` for an MS-bar mass. Running with n loops goes with the relation through `a^(n-1)`.
//! Downwards the upward relation is inverted exactly, not re-expanded. Only the constants `p_n(0)` are taken from
//! papers; since both masses do not depend on the scale, every logarithm follows from the two beta functions.
//! The lighter quarks are massless.

use std::f64::consts::{LN_2, PI};

use crate::coupling::beta::{ZETA3, beta};
use crate::coupling::masses::MassKind;
use crate::error::{Error, Result};

/// Highest power of a in the relation, that of five-loop running.
const HIGHEST: usize = 4;

/// The relation between the couplings on the two sides of one threshold, at one scale.
#[derive(Debug, Clone, PartialEq)]
pub struct Decoupling {
    /// `p_0 = 1, p_1, ...` at the logarithm in use.
    series: Vec<f64>,
    /// Their derivatives with respect to the logarithm.
    slopes: Vec<f64>,
}

impl Decoupling {
    /// The relation from `nl` to `nl + 1` flavours for running with `loops` loops, `log = ln(mu^2/m^2)`.
    pub fn new(nl: usize, loops: usize, kind: MassKind, log: f64) -> Self {
        let polynomials = polynomials(nl, loops.saturating_sub(1).min(HIGHEST), kind);
        let value = |p: &Vec<f64>| p.iter().rev().fold(0.0, |sum, c| sum * log + c);
        let slope = |p: &Vec<f64>| (1..p.len()).rev().fold(0.0, |sum, j| sum * log + j as f64 * p[j]);
        Self { series: polynomials.iter().map(value).collect(), slopes: polynomials.iter().map(slope).collect() }
    }

    /// `p_0 = 1, p_1, ...` at the logarithm in use, as many as the number of loops.
    pub fn series(&self) -> &[f64] {
        &self.series
    }

    /// `a^(nl+1)` from `a = a^(nl)`.
    ///
    /// # Errors
    /// [`Error::Argument`] if the coupling is so large that the relation is not monotonic there or changes it by
    /// more than a factor of two.
    pub fn up(&self, a: f64) -> Result<f64> {
        let (above, slope) = self.value_and_slope(a);
        Self::usable(a, above, slope)?;
        Ok(above)
    }

    /// `a^(nl)` from `above = a^(nl+1)`: the exact inverse of [`Decoupling::up`], to rounding.
    ///
    /// # Errors
    /// As [`Decoupling::up`].
    pub fn down(&self, above: f64) -> Result<f64> {
        let mut a = above;
        for _ in 0..50 {
            let (value, slope) = self.value_and_slope(a);
            let step = (value - above) / slope;
            a -= step;
            // Newton's method converges quadratically: after a step of 1e-9 the error is rounding.
            if step.abs() <= 1e-9 * a.abs() {
                let (value, slope) = self.value_and_slope(a);
                Self::usable(a, value, slope)?;
                return Ok(a);
            }
        }
        Err(too_large(above))
    }

    /// Derivative of `a^(nl+1)` with respect to `a = a^(nl)`.
    pub fn by_coupling(&self, a: f64) -> f64 {
        self.value_and_slope(a).1
    }

    /// Derivative of `a^(nl+1)` with respect to `ln(mu^2/m^2)` at fixed `a = a^(nl)`.
    pub fn by_logarithm(&self, a: f64) -> f64 {
        a * self.slopes.iter().rev().fold(0.0, |sum, p| sum * a + p)
    }

    /// The upward relation and its derivative.
    fn value_and_slope(&self, a: f64) -> (f64, f64) {
        let (mut value, mut slope) = (0.0, 0.0);
        for (n, p) in self.series.iter().enumerate().rev() {
            value = value * a + p;
            slope = slope * a + (n + 1) as f64 * p;
        }
        (value * a, slope)
    }

    fn usable(a: f64, above: f64, slope: f64) -> Result<()> {
        // Written so that a NaN is refused too.
        let fine = a > 0.0 && slope > 0.0 && above > 0.5 * a && above < 2.0 * a;
        if fine { Ok(()) } else { Err(too_large(a)) }
    }
}

fn too_large(a: f64) -> Error {
    Error::Argument {
        name: "alpha_s",
        value: format!("{:.4} at a heavy-quark threshold", 4.0 * PI * a),
        allowed: "the step at the threshold must change it by less than a factor of two: choose a smaller \
                  alpha_s or a higher threshold"
            .to_owned(),
    }
}

/// `p_0(L) .. p_highest(L)`, each by rising power of L.
///
/// With `F(a, L) = a sum_n p_n(L) a^n`, the total derivative of F along the running of a must be the beta function
/// of nl + 1 flavours at F: `dF/dL = - sum_k beta'_k F^(k+2) + (dF/da) sum_k beta_k a^(k+2)`. The coefficient of
/// `a^(n+1)` gives `dp_n/dL` from the lower `p`.
fn polynomials(nl: usize, highest: usize, kind: MassKind) -> Vec<Vec<f64>> {
    let (below, above) = (beta(nl, HIGHEST), beta(nl + 1, HIGHEST));
    let constants = constants(nl, kind);
    let mut p: Vec<Vec<f64>> = vec![vec![1.0]];
    for (n, constant) in constants.iter().enumerate().take(highest + 1).skip(1) {
        let mut slope = vec![0.0; n];
        for k in 0..n {
            let m = n - 1 - k;
            // F^(k+2) has a^(k+2) in front: its coefficient of a^(n+1) is that of a^m in (sum p a^j)^(k+2).
            add(&mut slope, -above[k], &power_coefficient(&p, k + 2, m));
            add(&mut slope, below[k] * (m + 1) as f64, &p[m]);
        }
        let mut integral = vec![*constant];
        integral.extend(slope.iter().enumerate().map(|(j, c)| c / (j + 1) as f64));
        p.push(integral);
    }
    p
}

/// Coefficient of `a^m`, a polynomial in L, in `(sum_j p_j a^j)^power`.
fn power_coefficient(p: &[Vec<f64>], power: usize, m: usize) -> Vec<f64> {
    if power == 0 {
        return vec![if m == 0 { 1.0 } else { 0.0 }];
    }
    let mut sum = Vec::new();
    for j in 0..=m {
        let rest = power_coefficient(p, power - 1, m - j);
        for (i, c) in p[j].iter().enumerate() {
            let shifted: Vec<f64> = std::iter::repeat_n(0.0, i).chain(rest.iter().copied()).collect();
            add(&mut sum, *c, &shifted);
        }
    }
    sum
}

/// `sum += factor * terms`, for polynomials.
fn add(sum: &mut Vec<f64>, factor: f64, terms: &[f64]) {
    sum.resize(sum.len().max(terms.len()), 0.0);
    for (s, t) in sum.iter_mut().zip(terms) {
        *s += factor * t;
    }
}

/// `p_0(0) .. p_4(0)`: the relation at `mu = m`.
///
/// The papers give the downward relation with `x = alpha_s^(nl+1)/pi`:
/// `alpha_s^(nl) = alpha_s^(nl+1) (1 + c2 x^2 + c3 x^3 + c4 x^4)`. Inverted, with `y = alpha_s^(nl)/pi = 4 a`:
/// `1 - c2 y^2 - c3 y^3 + (3 c2^2 - c4) y^4`.
fn constants(nl: usize, kind: MassKind) -> [f64; HIGHEST + 1] {
    let n = nl as f64;
    let (c2, c3, c4) = match kind {
        MassKind::Msbar => msbar_constants(n),
        MassKind::Pole => pole_constants(n),
    };
    [1.0, 0.0, -16.0 * c2, -64.0 * c3, 256.0 * (3.0 * c2 * c2 - c4)]
}

/// MS-bar mass at its own scale: `c2, c3, c4`. Second and third order: K. Chetyrkin, B. Kniehl, M. Steinhauser, hep-ph/9706430,
/// eq. (22); fourth: Y. Schroeder, M. Steinhauser, hep-ph/0512058, and K. Chetyrkin, J. Kuehn, C. Sturm,
/// hep-ph/0512060, in their printed digits.
fn msbar_constants(n: f64) -> (f64, f64, f64) {
    (
        11.0 / 72.0,
        564731.0 / 124416.0 - 82043.0 / 27648.0 * ZETA3 - 2633.0 / 31104.0 * n,
        5.170347 - 1.009932 * n - 0.021978 * n * n,
    )
}

/// Pole mass: `c2, c3, c4`. Second and third order: K. Chetyrkin, B. Kniehl, M. Steinhauser, hep-ph/9706430, eq. (25); fourth: the
/// papers of [`msbar_constants`], in their printed digits. For nl = 3 to 5, `c4` agrees to 5e-4 absolute with what the
/// MS-bar constants and the three-loop relation between the two masses give (`tests/rust/coupling.rs`).
fn pole_constants(n: f64) -> (f64, f64, f64) {
    let zeta2 = PI * PI / 6.0;
    (
        -7.0 / 24.0,
        -58933.0 / 124416.0 - 2.0 / 3.0 * zeta2 * (1.0 + LN_2 / 3.0) - 80507.0 / 27648.0 * ZETA3
            + (2479.0 / 31104.0 + zeta2 / 9.0) * n,
        -85.875 + 9.6923 * n - 0.23954 * n * n,
    )
}
