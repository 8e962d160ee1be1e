//! How the coupling moves with what it is given: exact derivatives, scales of the steps held fixed.
//!
//! At a fixed number of flavours a solution of `da/d ln mu^2 = beta(a)` depends on `ln mu^2` less a constant; a parameter
//! can move nothing but that constant. So `da/dp = beta(a) shift` at every scale, with one `shift` for each number of
//! flavours and parameter p, and a step relates the shifts of its two sides.

use std::f64::consts::PI;

use super::{FEWEST, MOST, Reference, RunningCoupling};
use crate::error::Result;

/// What a coupling is given, and may move with.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Parameter {
    /// `alpha_s` at the scale and for the number of flavours where it is given.
    AlphaS,
    /// The mass in `GeV` of the quark that makes the nf-th flavour, 4 to 6, pole or m(m) as given.
    Mass(usize),
}

impl RunningCoupling {
    /// `d ln mu^2/dp` at fixed coupling with the sign that makes `da/dp = beta(a) shift`, for nf flavours; `nf` outside of
    /// 3 to 6 is taken as the nearest of them.
    ///
    /// # Errors
    /// As [`RunningCoupling::a`].
    pub fn shift(&self, parameter: Parameter, nf: usize) -> Result<f64> {
        let wanted = nf.clamp(FEWEST, MOST) - FEWEST;
        let mut shift = match parameter {
            Parameter::AlphaS => 1.0 / (4.0 * PI * self.slope(self.home, self.known(self.home)?.a)),
            Parameter::Mass(_) => 0.0,
        };
        for lower in self.home..wanted {
            shift = self.step_up(lower, parameter, shift)?;
        }
        for lower in (wanted..self.home).rev() {
            shift = self.step_down(lower, parameter, shift)?;
        }
        Ok(shift)
    }

    /// `da^(nf)(mu_r^2)/dp`; `nf` outside of 3 to 6 is taken as the nearest of them.
    ///
    /// # Errors
    /// As [`RunningCoupling::a`].
    pub fn derivative(&self, parameter: Parameter, mu_r2: f64, nf: usize) -> Result<f64> {
        Ok(self.running_slope(mu_r2, nf)? * self.shift(parameter, nf)?)
    }

    /// `da^(nf)/d ln mu_r^2`; `nf` outside of 3 to 6 is taken as the nearest of them.
    ///
    /// # Errors
    /// As [`RunningCoupling::a`].
    pub fn running_slope(&self, mu_r2: f64, nf: usize) -> Result<f64> {
        Ok(self.stretch(nf).0.slope(self.a(mu_r2, nf)?))
    }

    /// From the shift of stretch `lower` to that of the next.
    fn step_up(&self, lower: usize, parameter: Parameter, shift: f64) -> Result<f64> {
        let (below, above) = self.sides(lower)?;
        let decoupling = &self.steps[lower].1;
        let moved = decoupling.by_coupling(below) * self.slope(lower, below) * shift
            + decoupling.by_logarithm(below) * self.logarithm_slope(lower, parameter);
        Ok(moved / self.slope(lower + 1, above))
    }

    /// From the shift of the stretch after `lower` to that of `lower`.
    fn step_down(&self, lower: usize, parameter: Parameter, shift: f64) -> Result<f64> {
        let (below, above) = self.sides(lower)?;
        let decoupling = &self.steps[lower].1;
        let moved = self.slope(lower + 1, above) * shift
            - decoupling.by_logarithm(below) * self.logarithm_slope(lower, parameter);
        Ok(moved / decoupling.by_coupling(below) / self.slope(lower, below))
    }

    /// The coupling on both sides of the step that follows stretch `lower`.
    fn sides(&self, lower: usize) -> Result<(f64, f64)> {
        let q2 = self.steps[lower].0.q2;
        Ok((self.a(q2, FEWEST + lower)?, self.a(q2, FEWEST + lower + 1)?))
    }

    /// Derivative of `ln(mu^2/m^2)` at that step.
    fn logarithm_slope(&self, lower: usize, parameter: Parameter) -> f64 {
        if parameter == Parameter::Mass(FEWEST + lower + 1) { -2.0 / self.steps[lower].0.mass2.sqrt() } else { 0.0 }
    }

    fn slope(&self, stretch: usize, a: f64) -> f64 {
        self.stretches[stretch].0.slope(a)
    }

    fn known(&self, stretch: usize) -> Result<Reference> {
        self.stretches[stretch].1.clone()
    }
}
