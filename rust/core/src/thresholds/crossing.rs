//! Matching of densities at a threshold, nf -> nf + 1, and its exact inverse.
//!
//! Upwards (M. Buza et al., hep-ph/9612398, eqs 2.37-2.41), with `a = a^(nf+1)(mu_thr^2)`:
//! every light quark `q+- -> (1 + A_qq) q+-`; `g -> (1 + A_gg) g + A_gq Sigma + A_gh h+`;
//! `h+ -> (1 + A_hh) h+ + A_hg g + A_hq Sigma`; `h- -> (1 + A_hh) h-`; Sigma sums the nf light flavours.
//! Downwards solves these equations: exactly where no intrinsic heavy density is present. What is present of it, `h+`
//! less what the light densities make, is taken back to the order kept in a, by `1 - A_hh` and `- A_gh`: momentum and
//! number are kept. The exact inverse of `1 + A_hh` would be of no use: `1 + A_hh` has a zero in Mellin space (near
//! N = 11 with `alpha_s` = 0.35, 22 with 0.22), so its inverse grows like `x^-N` and makes 1e-2 of rounding.

use super::columns::{Columns, Family};
use crate::convolution::{Convolved, KernelSet};
use crate::error::Result;
use crate::kernels::matching::{Element, HeavyGluonForm};
use crate::numerics::blocks::{Factors, Matrix, multiply_add};
use crate::theory::Theory;
use std::sync::OnceLock;

/// The matching at one threshold.
pub struct Crossing {
    /// Flavours below.
    pub(super) nf: usize,
    /// `A` of each element, without unity, and its last row: what goes below `x_min`.
    pub(super) quark: Both,
    pub(super) gluon_gluon: Invertible,
    pub(super) gluon_quark: Matrix,
    pub(super) gluon_heavy: Matrix,
    pub(super) heavy_gluon: Matrix,
    pub(super) heavy_quark: Matrix,
    pub(super) heavy_heavy: Both,
}

/// An element that acts on sums (momentum is counted below `x_min`) and on differences (number is).
pub(super) struct Both {
    pub(super) momentum: Invertible,
    pub(super) number: Invertible,
}

/// An element `A`; `1 + A` is factored when its inverse is first asked for.
pub(super) struct Invertible {
    pub(super) matrix: Matrix,
    factors: OnceLock<Factors>,
}

impl Crossing {
    /// The matching between nf and nf + 1 flavours.
    ///
    /// # Errors
    /// Those of the running coupling.
    pub fn new(theory: &Theory, kernels: &KernelSet, nf: usize, nodes: usize) -> Result<Self> {
        let q2 = theory.threshold_q2(nf + 1);
        let a = theory.a(q2, nf + 1)?;
        let log = (q2 / theory.mass2(nf + 1)).ln();
        let form = heavy_gluon_form(theory);
        Ok(Self::of(nf, |element| {
            let mut sum = Convolved::zeros(nodes);
            for order in 1..=theory.order() {
                let part = kernels.matching(order, element, theory.mass_kind(), form, log, nf as f64);
                sum.add_scaled(a.powi(order as i32), &part);
            }
            sum
        }))
    }

    /// From each element, without unity.
    pub(super) fn of(nf: usize, element: impl Fn(Element) -> Convolved) -> Self {
        let momentum = |kernel: &Convolved| kernel.matrix.with_last_row(&kernel.momentum_below);
        let number = |kernel: &Convolved| kernel.matrix.with_last_row(&kernel.number_below);
        let one = |name: Element| momentum(&element(name));
        let both = |name: Element| {
            let kernel = element(name);
            Both { momentum: Invertible::new(momentum(&kernel)), number: Invertible::new(number(&kernel)) }
        };
        Self {
            nf,
            quark: both(Element::LightQuark),
            gluon_gluon: Invertible::new(one(Element::GluonGluon)),
            gluon_quark: one(Element::GluonQuark),
            gluon_heavy: one(Element::GluonHeavy),
            heavy_gluon: one(Element::HeavyGluon),
            heavy_quark: one(Element::HeavyQuark),
            heavy_heavy: both(Element::HeavyHeavy),
        }
    }

    /// From nf to nf + 1.
    pub fn up(&self, columns: &mut Columns) {
        let heavy = self.nf + 1;
        match columns.family {
            Family::Plus => {
                let singlet = columns.singlet(self.nf);
                let (gluon, intrinsic) = (columns.gluon().clone(), columns.heavy(heavy).cloned());
                let mut target = gluon.clone();
                add(&mut target, 1.0, &self.gluon_gluon.matrix, &gluon);
                add(&mut target, 1.0, &self.gluon_quark, &singlet);
                let mut made = Matrix::zeros(gluon.rows(), gluon.cols());
                add(&mut made, 1.0, &self.heavy_gluon, &gluon);
                add(&mut made, 1.0, &self.heavy_quark, &singlet);
                if let Some(intrinsic) = &intrinsic {
                    add(&mut target, 1.0, &self.gluon_heavy, intrinsic);
                    add(&mut made, 1.0, &self.heavy_heavy.momentum.matrix, intrinsic);
                    made.add_scaled(1.0, intrinsic);
                }
                *columns.gluon_mut() = target;
                columns.set_heavy(heavy, made);
                self.quarks(columns, |matrix| grow(matrix, &self.quark.momentum.matrix));
                columns.gather_momentum();
            }
            Family::Minus => {
                let mut made = columns.heavy(heavy).cloned().unwrap_or_else(|| columns.empty());
                grow(&mut made, &self.heavy_heavy.number.matrix);
                columns.set_heavy(heavy, made);
                self.quarks(columns, |matrix| grow(matrix, &self.quark.number.matrix));
            }
            Family::NsPlus | Family::NsMinus => grow(columns.light_mut(), &self.quark.number.matrix),
        }
    }

    /// From nf + 1 to nf; what is left in the heavy density stays there, constant in scale.
    pub fn down(&self, columns: &mut Columns) {
        let heavy = self.nf + 1;
        match columns.family {
            Family::Plus => {
                self.quarks(columns, |matrix| self.quark.momentum.shrink(matrix));
                let singlet = columns.singlet(self.nf);
                let mut gluon = columns.gluon().clone();
                add(&mut gluon, -1.0, &self.gluon_quark, &singlet);
                self.gluon_gluon.shrink(&mut gluon);
                let mut left = columns.heavy(heavy).cloned().unwrap_or_else(|| columns.empty());
                add(&mut left, -1.0, &self.heavy_quark, &singlet);
                add(&mut left, -1.0, &self.heavy_gluon, &gluon);
                add(&mut gluon, -1.0, &self.gluon_heavy, &left);
                without_own_matching(&mut left, &self.heavy_heavy.momentum.matrix);
                *columns.gluon_mut() = gluon;
                columns.set_heavy(heavy, left);
                columns.gather_momentum();
            }
            Family::Minus => {
                let mut left = columns.heavy(heavy).cloned().unwrap_or_else(|| columns.empty());
                without_own_matching(&mut left, &self.heavy_heavy.number.matrix);
                columns.set_heavy(heavy, left);
                self.quarks(columns, |matrix| self.quark.number.shrink(matrix));
            }
            Family::NsPlus | Family::NsMinus => self.quark.number.shrink(columns.light_mut()),
        }
    }

    /// Acts on the light sum and on the heavy flavours that are active below.
    fn quarks(&self, columns: &mut Columns, act: impl Fn(&mut Matrix)) {
        act(columns.light_mut());
        for active in columns.lightest_heavy()..=self.nf {
            if let Some(matrix) = columns.heavy_mut(active) {
                act(matrix);
            }
        }
    }
}

/// The form of `A_Hg^(2)` that a theory asks for.
pub(super) fn heavy_gluon_form(theory: &Theory) -> HeavyGluonForm {
    if theory.compact_heavy_gluon() { HeavyGluonForm::Compact } else { HeavyGluonForm::Exact }
}

/// `target += factor element source`.
pub(super) fn add(target: &mut Matrix, factor: f64, element: &Matrix, source: &Matrix) {
    let (rows, cols) = (target.rows(), target.cols());
    multiply_add(
        target.part_mut(0..rows, 0..cols),
        factor,
        element.part(0..rows, 0..rows),
        source.part(0..rows, 0..cols),
    );
}

/// `target <- (1 + element) target`.
fn grow(target: &mut Matrix, element: &Matrix) {
    let before = target.clone();
    add(target, 1.0, element, &before);
}

/// `left <- (1 - element) left`: what an intrinsic density was before its own matching, to the order kept.
fn without_own_matching(left: &mut Matrix, element: &Matrix) {
    let before = left.clone();
    add(left, -1.0, element, &before);
}

impl Invertible {
    fn new(matrix: Matrix) -> Self {
        Self { matrix, factors: OnceLock::new() }
    }

    /// `target <- (1 + A)^-1 target`.
    pub(super) fn shrink(&self, target: &mut Matrix) {
        let factors = self.factors.get_or_init(|| {
            let mut sum = Matrix::identity(self.matrix.rows());
            sum.add_scaled(1.0, &self.matrix);
            Factors::of(&sum)
        });
        let (rows, cols) = (target.rows(), target.cols());
        factors.solve(target.part_mut(0..rows, 0..cols));
    }
}
