//! The strong coupling over all scales and numbers of flavours.
//!
//! - [`beta`](mod@beta): coefficients of the beta function;
//! - [`running`]: the coupling between two scales at a fixed number of flavours;
//! - [`decoupling`]: its step at a heavy-quark threshold;
//! - [`masses`]: pole and MS-bar masses;
//! - [`sensitivity`]: how the coupling moves with what it is given.

pub mod beta;
pub mod decoupling;
pub mod masses;
pub mod running;
pub mod sensitivity;

use crate::coupling::decoupling::Decoupling;
use crate::coupling::masses::MassKind;
use crate::coupling::running::Running;
use crate::error::Result;

/// Fewest flavours that the coupling is followed to.
pub const FEWEST: usize = 3;
/// Most flavours that the coupling is followed to.
pub const MOST: usize = 6;

/// The coupling known at one renormalisation scale for one number of flavours.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Reference {
    /// `alpha_s/(4 pi)`.
    pub a: f64,
    /// Scale `mu_r^2`, GeV^2.
    pub q2: f64,
    /// Number of flavours, 3 to 6.
    pub nf: usize,
}

/// Where and how the coupling steps from nf - 1 to nf flavours.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Step {
    /// Renormalisation scale of the step, GeV^2.
    pub q2: f64,
    /// Squared mass of the quark that becomes active, GeV^2.
    pub mass2: f64,
    /// Which mass that is.
    pub kind: MassKind,
}

/// The coupling for 3 to 6 flavours, each reached from one reference through the steps between.
#[derive(Debug, Clone, PartialEq)]
pub struct RunningCoupling {
    /// One a number of flavours, from [`FEWEST`]: the equation, and one scale where its solution is known, or
    /// why there is none.
    stretches: Vec<(Running, Result<Reference>)>,
    /// Place of the stretch of the reference.
    home: usize,
    /// To 4, 5 and 6 flavours.
    steps: [(Step, Decoupling); MOST - FEWEST],
}

impl RunningCoupling {
    /// Follows `reference` through `steps` (to 4, 5 and 6 flavours) with `loops` loops.
    ///
    /// A number of flavours that cannot be reached (Landau pole) is an error only when it is asked for.
    /// `reference.nf` outside of 3 to 6 is taken as the nearest of them.
    pub fn new(reference: Reference, steps: [Step; 3], loops: usize) -> Self {
        let home = reference.nf.clamp(FEWEST, MOST) - FEWEST;
        let running: Vec<Running> = (FEWEST..=MOST).map(|nf| Running::new(nf, loops)).collect();
        let steps = std::array::from_fn(|lower| {
            let step: Step = steps[lower];
            let log = (step.q2 / step.mass2).ln();
            (step, Decoupling::new(FEWEST + lower, loops, step.kind, log))
        });
        let mut known = vec![Ok(reference); running.len()];
        for i in home..MOST - FEWEST {
            let (at, step) = &steps[i];
            known[i + 1] = carry(&known[i], &running[i], at.q2, i + 1, |a| step.up(a));
        }
        for i in (0..home).rev() {
            let (at, step) = &steps[i];
            known[i] = carry(&known[i + 1], &running[i + 1], at.q2, i, |a| step.down(a));
        }
        Self { stretches: running.into_iter().zip(known).collect(), home, steps }
    }

    /// `a^(nf)(mu_r^2)`; `nf` outside of 3 to 6 is taken as the nearest of them.
    ///
    /// # Errors
    /// [`Error::LandauPole`](crate::error::Error::LandauPole) on the way from the reference, or
    /// [`Error::Argument`](crate::error::Error::Argument) where the coupling is too large for a step.
    pub fn a(&self, mu_r2: f64, nf: usize) -> Result<f64> {
        let (running, known) = self.stretch(nf);
        let known = known.clone()?;
        running.run(known.a, known.q2, mu_r2)
    }

    /// `mu_r^2` in GeV^2 where `a^(nf)` is `a` (positive): the inverse of [`RunningCoupling::a`].
    ///
    /// # Errors
    /// As [`RunningCoupling::a`].
    pub fn scale(&self, a: f64, nf: usize) -> Result<f64> {
        let (running, known) = self.stretch(nf);
        let known = known.clone()?;
        Ok(known.q2 * running.log_scale(known.a, a).exp())
    }

    fn stretch(&self, nf: usize) -> &(Running, Result<Reference>) {
        &self.stretches[nf.clamp(FEWEST, MOST) - FEWEST]
    }
}

/// Runs to the threshold at `q2` and steps over it to the flavours of stretch `next`.
fn carry(
    known: &Result<Reference>,
    running: &Running,
    q2: f64,
    next: usize,
    step: impl Fn(f64) -> Result<f64>,
) -> Result<Reference> {
    let known = known.clone()?;
    let a = step(running.run(known.a, known.q2, q2)?)?;
    Ok(Reference { a, q2, nf: FEWEST + next })
}
