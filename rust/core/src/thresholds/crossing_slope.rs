//! How the matching at a threshold moves with a parameter: derivatives of what [`Crossing`] does, by the product rule.

use super::columns::{Columns, Family};
use super::crossing::{Crossing, Invertible, add, heavy_gluon_form};
use crate::convolution::{Convolved, KernelSet};
use crate::coupling::sensitivity::Parameter;
use crate::error::Result;
use crate::numerics::blocks::Matrix;
use crate::theory::Theory;

/// A matching and its derivative.
pub struct CrossingSlope<'a> {
    at: &'a Crossing,
    /// The derivative of each element.
    slope: Crossing,
}

impl<'a> CrossingSlope<'a> {
    /// The derivative of `at`, between nf and nf + 1 flavours, threshold scales held fixed.
    ///
    /// The coupling enters by powers, the mass by it and by `ln(mu_thr^2/m^2)`.
    ///
    /// # Errors
    /// Those of the running coupling.
    pub fn new(
        at: &'a Crossing,
        theory: &Theory,
        kernels: &KernelSet,
        parameter: Parameter,
        nodes: usize,
    ) -> Result<Self> {
        let nf = at.nf;
        let (q2, mass2) = (theory.threshold_q2(nf + 1), theory.mass2(nf + 1));
        let (a, log) = (theory.a(q2, nf + 1)?, (q2 / mass2).ln());
        let of_a = theory.alpha_s_derivative(parameter, q2, nf + 1)? / (4.0 * std::f64::consts::PI);
        let of_log = if parameter == Parameter::Mass(nf + 1) { -2.0 / mass2.sqrt() } else { 0.0 };
        let (kind, form) = (theory.mass_kind(), heavy_gluon_form(theory));
        let slope = Crossing::of(nf, |element| {
            let mut sum = Convolved::zeros(nodes);
            for order in 1..=theory.order() {
                let (power, nl) = (order as i32, nf as f64);
                let part = kernels.matching(order, element, kind, form, log, nl);
                sum.add_scaled(f64::from(power) * a.powi(power - 1) * of_a, &part);
                if of_log != 0.0 {
                    let part = kernels.matching_slope(order, element, kind, form, log, nl);
                    sum.add_scaled(a.powi(power) * of_log, &part);
                }
            }
            sum
        });
        Ok(Self { at, slope })
    }

    /// From nf to nf + 1: the derivative of the columns there, `before` and `moved` being columns and derivative below.
    pub fn up(&self, before: &Columns, mut moved: Columns) -> Columns {
        self.at.up(&mut moved);
        // Unity in it is not part of the derivative.
        let mut own = before.clone();
        self.slope.up(&mut own);
        moved.add_scaled(1.0, &own);
        moved.add_scaled(-1.0, before);
        moved
    }

    /// From nf + 1 to nf: the derivative of the columns there, `before` and `moved` being columns and derivative above.
    pub fn down(&self, mut before: Columns, mut moved: Columns) -> Columns {
        let heavy = self.at.nf + 1;
        let absent = before.empty();
        let of = |columns: &Columns| columns.heavy(heavy).cloned().unwrap_or_else(|| absent.clone());
        let (mut left, mut left_moved) = (of(&before), of(&moved));
        match before.family {
            Family::Plus => {
                self.quarks_down(&mut before, &mut moved, |one| &one.quark.momentum);
                let (singlet, singlet_moved) = (before.singlet(self.at.nf), moved.singlet(self.at.nf));
                let (mut gluon, mut gluon_moved) = (before.gluon().clone(), moved.gluon().clone());
                let quarks = (&singlet, &singlet_moved);
                self.subtract(|one| &one.gluon_quark, quarks, (&mut gluon, &mut gluon_moved));
                self.divide(|one| &one.gluon_gluon, (&mut gluon, &mut gluon_moved));
                self.subtract(|one| &one.heavy_quark, quarks, (&mut left, &mut left_moved));
                self.subtract(|one| &one.heavy_gluon, (&gluon, &gluon_moved), (&mut left, &mut left_moved));
                self.subtract(|one| &one.gluon_heavy, (&left, &left_moved), (&mut gluon, &mut gluon_moved));
                let intrinsic = (left.clone(), left_moved.clone());
                let own = (&intrinsic.0, &intrinsic.1);
                self.subtract(|one| &one.heavy_heavy.momentum.matrix, own, (&mut left, &mut left_moved));
                *moved.gluon_mut() = gluon_moved;
                moved.set_heavy(heavy, left_moved);
                moved.gather_momentum();
            }
            Family::Minus => {
                let intrinsic = (left.clone(), left_moved.clone());
                let own = (&intrinsic.0, &intrinsic.1);
                self.subtract(|one| &one.heavy_heavy.number.matrix, own, (&mut left, &mut left_moved));
                moved.set_heavy(heavy, left_moved);
                self.quarks_down(&mut before, &mut moved, |one| &one.quark.number);
            }
            Family::NsPlus | Family::NsMinus => {
                self.divide(|one| &one.quark.number, (before.light_mut(), moved.light_mut()));
            }
        }
        moved
    }

    /// Divides the light sum and the heavy flavours that are active below by `1 + element`.
    fn quarks_down(&self, before: &mut Columns, moved: &mut Columns, element: fn(&Crossing) -> &Invertible) {
        self.divide(element, (before.light_mut(), moved.light_mut()));
        for active in before.lightest_heavy()..=self.at.nf {
            if let (Some(value), Some(slope)) = (before.heavy_mut(active), moved.heavy_mut(active)) {
                self.divide(element, (value, slope));
            }
        }
    }

    /// `target <- (1 + element)^-1 target`, and the same for its derivative.
    fn divide(&self, element: fn(&Crossing) -> &Invertible, target: (&mut Matrix, &mut Matrix)) {
        element(self.at).shrink(target.0);
        add(target.1, -1.0, &element(&self.slope).matrix, target.0);
        element(self.at).shrink(target.1);
    }

    /// `target -= element source`, and the same for its derivative; each a pair of values and derivative.
    fn subtract(
        &self,
        element: fn(&Crossing) -> &Matrix,
        source: (&Matrix, &Matrix),
        target: (&mut Matrix, &mut Matrix),
    ) {
        add(target.0, -1.0, element(self.at), source.0);
        add(target.1, -1.0, element(self.at), source.1);
        add(target.1, -1.0, element(&self.slope), source.0);
    }
}
