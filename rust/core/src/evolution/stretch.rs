//! A stretch of scales at fixed nf: its equations, factored step by step, and what they make of any start.

use super::fixed_flavour::{FixedFlavour, Sector};
use crate::error::Result;
use crate::numerics::blocks::Matrix;
use crate::numerics::matrix_ode::{Dense, Span, Step};
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
/// Largest degree: there are more steps before it is passed. The basis of planes loses a digit every other degree; at 24
/// nothing is left of it.
const HIGHEST: usize = 18;
/// Most steps of a stretch.
const MOST_STEPS: usize = 64;
/// By how much the degree is raised where the accuracy was missed.
const RAISE: usize = 2;

/// Sweeps of a step, for each digit wanted, and how many fewer in all. Of the published input at NNLO from 2 to
/// 1e5 GeV^2 the first leaves 3e-2 to open, four 2e-10, five 1e-13; charm at x = 0.9, a small difference of large
/// numbers, needs one more on the fine grid. What is left is estimated with the steps.
const SWEEPS_PER_DIGIT: f64 = 0.6;
const FEWER: f64 = 0.8;

/// The steps of one stretch, ready for every sector.
pub struct Stretch {
    division: Division,
    steps: HashMap<Sector, Vec<Step>>,
    representative: HashMap<Sector, Sector>,
}

/// Steps of equal length in `s = ln a`.
#[derive(Debug, Clone, Copy)]
pub struct Division {
    /// Start in s.
    pub from: f64,
    to: f64,
    /// Number of steps, none for a length of zero.
    pub count: usize,
}

impl Division {
    /// The step that holds `s`.
    pub fn step_of(&self, s: f64) -> usize {
        let share = (s - self.from) / (self.to - self.from) * self.count as f64;
        (share.max(0.0) as usize).min(self.count.saturating_sub(1))
    }
}

/// What a stretch makes of one start: dense in `s = ln a`.
pub struct StretchSolution {
    start: Matrix,
    steps: Vec<Dense>,
}

impl Stretch {
    /// Prepares the equations of every sector from `from` to `to` in `s = ln a`.
    ///
    /// # Errors
    /// [`crate::error::Error::Interrupted`] where the watch says stop.
    pub fn new(equations: &FixedFlavour, from: f64, to: f64, plan: &Plan, watch: &dyn Watch) -> Result<Self> {
        let sectors = [Sector::Singlet, Sector::NsPlus, Sector::NsMinus, Sector::Valence];
        let representative: HashMap<_, _> =
            sectors.iter().map(|&sector| (sector, equations.representative(sector))).collect();
        let distinct = sectors.into_iter().filter(|sector| representative[sector] == *sector);
        let count = plan.steps(to - from);
        let tasks: Vec<(Sector, usize)> = distinct.flat_map(|sector| (0..count).map(move |i| (sector, i))).collect();
        let ready: Vec<Step> = tasks
            .par_iter()
            .with_max_len(1)
            .map(|&(sector, i)| {
                watch.check()?;
                let at = |i: usize| {
                    if i == count { to } else { from + (to - from) * i as f64 / count as f64 }
                };
                let panels = equations.panels(sector);
                let degree = plan.degree((to - from) / count as f64);
                let span = Span { from: at(i), to: at(i + 1), degree, sweeps: plan.sweeps() };
                Ok(Step::new(&span, &panels, |s| equations.generator(sector, s)))
            })
            .collect::<Result<_>>()?;
        let mut steps: HashMap<Sector, Vec<Step>> = HashMap::new();
        for ((sector, _), step) in tasks.into_iter().zip(ready) {
            steps.entry(sector).or_default().push(step);
        }
        Ok(Self { division: Division { from, to, count }, steps, representative })
    }

    /// Carries `start` along the stretch. Rows of panels before `first` are zero and stay so.
    pub fn solve(&self, sector: Sector, start: Matrix, first: usize) -> StretchSolution {
        self.solve_judged(sector, start, first, 0)
    }

    /// The same, with an estimate of the error of the last `judged` columns.
    pub fn solve_judged(&self, sector: Sector, start: Matrix, first: usize, judged: usize) -> StretchSolution {
        let mut dense: Vec<Dense> = Vec::new();
        if let Some(steps) = self.steps.get(&self.representative[&sector]) {
            for step in steps {
                let solution = match dense.last() {
                    Some(before) => step.solve(&before.end(), first, judged),
                    None => step.solve(&start, first, judged),
                };
                dense.push(solution);
            }
        }
        StretchSolution { start, steps: dense }
    }

    /// Whether two sectors share their equations.
    pub fn same(&self, one: Sector, other: Sector) -> bool {
        self.representative[&one] == self.representative[&other]
    }

    /// Where its steps lie.
    pub fn division(&self) -> Division {
        self.division
    }
}

impl StretchSolution {
    /// The steps; none on a stretch of length zero.
    pub fn steps(&self) -> &[Dense] {
        &self.steps
    }

    /// What was carried.
    pub fn start(&self) -> &Matrix {
        &self.start
    }

    /// Estimated error of the judged columns in some rows, relative to the largest value of each entry over a step.
    pub fn error(&self, rows: &[usize]) -> f64 {
        self.steps.iter().map(|step| step.error(rows)).fold(0.0, f64::max)
    }
}

/// How accurate the steps of a stretch are to be: their number follows from its length but for the most accurate, their
/// degree from both.
#[derive(Debug, Clone, Copy)]
pub struct Plan {
    /// Relative accuracy wanted.
    pub tolerance: f64,
    /// How many times the degree has been raised because the accuracy was missed.
    pub refinement: u32,
}

impl Plan {
    /// Number of steps for a stretch of this length in `ln a`; none for a length of zero.
    fn steps(&self, length: f64) -> usize {
        if length == 0.0 {
            return 0;
        }
        let least = (length.abs() / LONGEST).ceil() as usize;
        let few_enough = |count: &usize| self.degree(length / *count as f64) <= HIGHEST;
        (least..=MOST_STEPS.max(least)).find(few_enough).unwrap_or(MOST_STEPS.max(least))
    }

    /// Number of sweeps of a step.
    fn sweeps(&self) -> usize {
        let digits = -self.tolerance.log10();
        (SWEEPS_PER_DIGIT * digits - FEWER).ceil().max(2.0) as usize + RAISE * self.refinement as usize
    }

    /// Degree of a step of this length.
    fn degree(&self, length: f64) -> usize {
        let digits = -self.tolerance.log10();
        let share = length.abs() / UNIT;
        let degree = LOWEST + SLOPE * share.powf(0.55) + (digits - 8.0) * share.powf(0.2);
        degree.ceil().max(3.0) as usize + RAISE * self.refinement as usize
    }
}
