//! A kernel as a regular function, plus distributions and a local part, each a polynomial in nf.
//!
//! Plus distributions refer to the whole of [0, 1]; whoever integrates over [x, 1] adds the missing logarithm.

use crate::numerics::endpoint::Point;

/// Coefficient of one power of nf.
#[derive(Debug, Clone, Default)]
pub struct Term {
    /// The part that is an ordinary function of z; `None` is zero.
    pub regular: Option<fn(&Point) -> f64>,
    /// Coefficient k multiplies `[ln^k(1-z)/(1-z)]_+`.
    pub plus: &'static [f64],
    /// Coefficient of `delta(1-z)`.
    pub local: f64,
}

impl Term {
    /// A term that is nothing but an ordinary function.
    pub const fn smooth(function: fn(&Point) -> f64) -> Self {
        Self { regular: Some(function), plus: &[], local: 0.0 }
    }

    /// A term with all three parts.
    pub const fn full(function: fn(&Point) -> f64, plus: &'static [f64], local: f64) -> Self {
        Self { regular: Some(function), plus, local }
    }

    /// A multiple of `delta(1-z)`.
    pub const fn delta(local: f64) -> Self {
        Self { regular: None, plus: &[], local }
    }

    /// The zero, to keep the place of a power of nf.
    pub const fn zero() -> Self {
        Self::delta(0.0)
    }
}

/// Polynomial in nf: `terms[p]` multiplies `nf^p`; no terms means zero.
#[derive(Debug, Clone, Default)]
pub struct Kernel {
    /// Coefficients by rising power of nf.
    pub terms: Vec<Term>,
}

impl Kernel {
    /// Whether the kernel vanishes for every nf.
    pub fn is_zero(&self) -> bool {
        self.terms.iter().all(|term| {
            term.regular.is_none() && term.local == 0.0 && term.plus.iter().all(|&coefficient| coefficient == 0.0)
        })
    }

    /// Value of the regular part at `point`.
    pub fn regular(&self, point: &Point, nf: f64) -> f64 {
        self.terms.iter().rev().fold(0.0, |sum, term| sum * nf + term.regular.map_or(0.0, |function| function(point)))
    }

    /// Coefficients of `[ln^k(1-z)/(1-z)]_+` by rising k.
    pub fn plus(&self, nf: f64) -> Vec<f64> {
        let length = self.terms.iter().map(|term| term.plus.len()).max();
        let mut sums = vec![0.0; length.unwrap_or(0)];
        for term in self.terms.iter().rev() {
            for (k, sum) in sums.iter_mut().enumerate() {
                *sum = *sum * nf + term.plus.get(k).copied().unwrap_or(0.0);
            }
        }
        sums
    }

    /// Coefficient of `delta(1-z)`.
    pub fn local(&self, nf: f64) -> f64 {
        self.terms.iter().rev().fold(0.0, |sum, term| sum * nf + term.local)
    }
}

impl From<Vec<Term>> for Kernel {
    fn from(terms: Vec<Term>) -> Self {
        Self { terms }
    }
}
