//! A stretch of scales at fixed nf: its equations, factored step by step, and what they make of any start.

use super::fixed_flavour::{FixedFlavour, Sector};
use crate::error::Result;
use crate::numerics::blocks::Matrix;
use crate::numerics::left_product::{Rows, multiply_left};
use crate::numerics::matrix_ode::{Dense, Step};
use crate::watch::Watch;
use rayon::prelude::*;
use std::collections::HashMap;

/// Longest step in `ln a`: longer ones of higher degree were not cheaper.
const LONGEST: f64 = 1.3;
/// Degree of a step: `LOWEST + SLOPE (length/UNIT)^0.55` for an accuracy of 1e-8, and nearly one more a decimal digit.
/// Found by trial at NNLO with nf = 4 from 2 to 1e4 GeV^2 on both presets, published input, against steps of 0.3 with
/// degree 16: errors 2e-6, 2e-8 with degrees 10, 12 at length 1.2; 2e-5, 2e-7 with 6, 8 at 0.6; 1e-6, 1e-7 with 5, 6
/// at 0.3.
const LOWEST: f64 = 2.4;
const SLOPE: f64 = 10.0;
const UNIT: f64 = 1.2;
/// Largest degree tried first.
const HIGHEST: f64 = 24.0;
/// By how much the degree is raised where the accuracy was missed.
const RAISE: usize = 2;

/// The steps of one stretch, factored for every sector.
pub struct Stretch {
    from: f64,
    to: f64,
    steps: HashMap<Sector, Vec<Step>>,
    representative: HashMap<Sector, Sector>,
}

/// What a stretch makes of one start: dense in `s = ln a`.
pub struct StretchSolution {
    from: f64,
    to: f64,
    start: Matrix,
    steps: Vec<Dense>,
}

impl Stretch {
    /// Factors the equations of every sector from `from` to `to` in `s = ln a`.
    ///
    /// # Errors
    /// [`crate::error::Error::Interrupted`] where the watch says stop.
    pub fn new(equations: &FixedFlavour, from: f64, to: f64, plan: &Plan, watch: &dyn Watch) -> Result<Self> {
        let sectors = [Sector::Singlet, Sector::NsPlus, Sector::NsMinus, Sector::Valence];
        let representative: HashMap<_, _> =
            sectors.iter().map(|&sector| (sector, equations.representative(sector))).collect();
        let distinct = sectors.into_iter().filter(|sector| representative[sector] == *sector);
        let count = Plan::steps(to - from);
        let tasks: Vec<(Sector, usize)> = distinct.flat_map(|sector| (0..count).map(move |i| (sector, i))).collect();
        let factored: Vec<Step> = tasks
            .par_iter()
            .map(|&(sector, i)| {
                watch.check()?;
                let at = |i: usize| {
                    if i == count { to } else { from + (to - from) * i as f64 / count as f64 }
                };
                let panels = equations.panels(sector);
                let degree = plan.degree((to - from) / count as f64);
                Ok(Step::new(at(i), at(i + 1), degree, &panels, |s| equations.generator(sector, s)))
            })
            .collect::<Result<_>>()?;
        let mut steps: HashMap<Sector, Vec<Step>> = HashMap::new();
        for ((sector, _), step) in tasks.into_iter().zip(factored) {
            steps.entry(sector).or_default().push(step);
        }
        Ok(Self { from, to, steps, representative })
    }

    /// Carries `start` along the stretch. Rows of panels before `first` are zero and stay so.
    pub fn solve(&self, sector: Sector, start: Matrix, first: usize) -> StretchSolution {
        let mut dense: Vec<Dense> = Vec::new();
        if let Some(steps) = self.steps.get(&self.representative[&sector]) {
            for step in steps {
                let solution = match dense.last() {
                    Some(before) => step.solve(&before.end(), first),
                    None => step.solve(&start, first),
                };
                dense.push(solution);
            }
        }
        StretchSolution { from: self.from, to: self.to, start, steps: dense }
    }

    /// Whether two sectors share their equations.
    pub fn same(&self, one: Sector, other: Sector) -> bool {
        self.representative[&one] == self.representative[&other]
    }

    /// Number of steps.
    pub fn steps(&self) -> usize {
        self.steps.values().map(Vec::len).max().unwrap_or(0)
    }
}

impl StretchSolution {
    /// The solution at several `s = ln a` within the stretch.
    pub fn at_many(&self, s: &[f64]) -> Vec<Matrix> {
        if self.steps.is_empty() {
            return vec![self.start.clone(); s.len()];
        }
        let mut solutions = vec![Matrix::default(); s.len()];
        for (index, step) in self.steps.iter().enumerate() {
            let here: Vec<usize> = (0..s.len()).filter(|&i| self.step_of(s[i]) == index).collect();
            let at: Vec<f64> = here.iter().map(|&i| s[i]).collect();
            for (solution, i) in step.at_many(&at).into_iter().zip(here) {
                solutions[i] = solution;
            }
        }
        solutions
    }

    /// The start of the stretch in s, and what stands there.
    pub fn start(&self) -> (f64, &Matrix) {
        (self.from, &self.start)
    }

    /// Another function of s, made of this one at the nodes of every step: as accurate as the map is smooth in s.
    #[must_use]
    pub fn mapped(&self, map: impl Fn(f64, &Matrix) -> Matrix) -> Self {
        let steps = self.steps.iter().map(|step| step.mapped(&map)).collect();
        Self { from: self.from, to: self.to, start: map(self.from, &self.start), steps }
    }

    /// Adds a function on the same steps.
    pub fn add(&mut self, other: &Self) {
        self.start.add_scaled(1.0, &other.start);
        self.steps.iter_mut().zip(&other.steps).for_each(|(own, other)| own.add(other));
    }

    /// The step that holds `s`; all sectors of a stretch have the same steps.
    pub fn step_of(&self, s: f64) -> usize {
        let share = (s - self.from) / (self.to - self.from) * self.steps.len() as f64;
        // Not a number where the stretch has no length.
        (share.max(0.0) as usize).min(self.steps.len().saturating_sub(1))
    }

    /// `target += row * solution(s)` for rows that all act within one step. Rows of the solution before `first` are
    /// zero.
    pub fn multiply_left(&self, step: usize, rows: &Rows, first: usize, target: &mut Matrix) {
        match self.steps.get(step) {
            Some(dense) => dense.multiply_left(rows, first, target),
            None => multiply_left(&self.start, rows, first, target),
        }
    }

    /// Estimated error of some rows, relative to the largest value of each entry over a step.
    pub fn error(&self, rows: &[usize]) -> f64 {
        self.steps.iter().map(|step| step.error(rows)).fold(0.0, f64::max)
    }
}

/// How accurate the steps of a stretch are to be: their number follows from its length alone, their degree from both.
#[derive(Debug, Clone, Copy)]
pub struct Plan {
    /// Relative accuracy wanted.
    pub tolerance: f64,
    /// How many times the degree has been raised because the accuracy was missed.
    pub refinement: u32,
}

impl Plan {
    /// Number of steps for a stretch of this length in `ln a`; none for a length of zero.
    fn steps(length: f64) -> usize {
        if length == 0.0 {
            return 0;
        }
        (length.abs() / LONGEST).ceil() as usize
    }

    /// Degree of a step of this length.
    fn degree(&self, length: f64) -> usize {
        let digits = -self.tolerance.log10();
        let share = length.abs() / UNIT;
        let degree = LOWEST + SLOPE * share.powf(0.55) + (digits - 8.0) * share.powf(0.2);
        degree.ceil().clamp(3.0, HIGHEST) as usize + RAISE * self.refinement as usize
    }
}
