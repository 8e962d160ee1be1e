//! Which stretches and crossings lead from the start scale to each asked scale.
//!
//! A route is a tree of legs. A leg has one nf and runs from where it is entered to the farthest scale needed, in one
//! direction; legs of the start leave the start scale, others the threshold at which nf changed.

use crate::error::{Error, Result};
use crate::theory::{SAME_SCALE, Theory};

/// A stretch of scales at one nf.
#[derive(Debug, Clone, PartialEq)]
pub struct Leg {
    /// Number of flavours.
    pub nf: usize,
    /// Scale at which the leg is entered, GeV^2.
    pub from_q2: f64,
    /// Scale at which it ends, GeV^2; may equal `from_q2`.
    pub to_q2: f64,
    /// How it is entered.
    pub entry: Entry,
}

/// How a leg is entered.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Entry {
    /// From the input.
    Start,
    /// From a leg that holds the same scale, by a change of nf by one.
    Crossing {
        /// Index of that leg.
        from_leg: usize,
    },
}

/// All legs, each after the one it is entered from.
#[derive(Debug, Clone, PartialEq)]
pub struct Route {
    /// The legs.
    pub legs: Vec<Leg>,
    /// Lowest nf visited: its flavours act alike along the whole route.
    pub light: usize,
    /// Highest nf visited.
    pub most: usize,
}

impl Route {
    /// The legs from the start to every asked scale `(q2, nf)`.
    pub fn plan(theory: &Theory, start_q2: f64, start_nf: usize, asked: &[(f64, usize)]) -> Self {
        let light = asked.iter().map(|(_, nf)| *nf).fold(start_nf, usize::min);
        let most = asked.iter().map(|(_, nf)| *nf).fold(start_nf, usize::max);
        let mut route = Self { legs: vec![], light, most };
        let at = |nf: usize| asked.iter().filter(move |scale| scale.1 == nf).map(|scale| scale.0);
        let up = (start_nf < most).then(|| theory.threshold_q2(start_nf + 1));
        let down = (start_nf > light).then(|| theory.threshold_q2(start_nf));
        let targets: Vec<f64> = at(start_nf).chain(up).chain(down).collect();
        route.enter(start_nf, start_q2, &targets, |_, _| Entry::Start);
        for nf in start_nf + 1..=most {
            let onwards = (nf < most).then(|| theory.threshold_q2(nf + 1));
            let targets: Vec<f64> = at(nf).chain(onwards).collect();
            route.enter(nf, theory.threshold_q2(nf), &targets, |route, q2| route.crossing(nf - 1, q2));
        }
        for nf in (light..start_nf).rev() {
            let onwards = (nf > light).then(|| theory.threshold_q2(nf));
            let targets: Vec<f64> = at(nf).chain(onwards).collect();
            route.enter(nf, theory.threshold_q2(nf + 1), &targets, |route, q2| route.crossing(nf + 1, q2));
        }
        route
    }

    /// Adds one leg upwards and one downwards, as far as they are needed; at least one.
    fn enter(&mut self, nf: usize, from_q2: f64, targets: &[f64], entry: impl Fn(&Self, f64) -> Entry) {
        let highest = targets.iter().copied().fold(from_q2, f64::max);
        let lowest = targets.iter().copied().fold(from_q2, f64::min);
        let entry = entry(self, from_q2);
        let mut leg = |to_q2| self.legs.push(Leg { nf, from_q2, to_q2, entry });
        if lowest < from_q2 * (1.0 - SAME_SCALE) {
            leg(lowest);
        }
        if highest > from_q2 * (1.0 + SAME_SCALE) {
            leg(highest);
        } else if lowest >= from_q2 * (1.0 - SAME_SCALE) {
            leg(from_q2);
        }
    }

    fn crossing(&self, from_nf: usize, q2: f64) -> Entry {
        // The threshold is among the targets of the legs at `from_nf`, which were entered before: one always serves it.
        let from_leg = self.serving(q2, from_nf).unwrap_or_default();
        Entry::Crossing { from_leg }
    }

    /// The first leg that holds a scale, if any does.
    fn serving(&self, q2: f64, nf: usize) -> Option<usize> {
        self.legs.iter().position(|leg| leg.nf == nf && leg.holds(q2))
    }

    /// The leg that holds a scale.
    ///
    /// # Errors
    /// [`Error::OutOfRange`] where none does.
    pub fn leg_of(&self, q2: f64, nf: usize) -> Result<usize> {
        self.serving(q2, nf).ok_or_else(|| Error::OutOfRange {
            name: "q2",
            value: format!("{q2:?} with nf = {nf}"),
            allowed: format!("computed were {}", self.describe_ranges()),
        })
    }

    /// `(nf, lowest q2, highest q2)` of what is served, by growing nf.
    pub fn ranges(&self) -> Vec<(usize, f64, f64)> {
        (self.light..=self.most)
            .filter_map(|nf| {
                let legs = || self.legs.iter().filter(|leg| leg.nf == nf);
                legs().next()?;
                let low = legs().map(|leg| leg.from_q2.min(leg.to_q2)).fold(f64::INFINITY, f64::min);
                let high = legs().map(|leg| leg.from_q2.max(leg.to_q2)).fold(0.0, f64::max);
                Some((nf, low, high))
            })
            .collect()
    }

    fn describe_ranges(&self) -> String {
        let ranges: Vec<String> =
            self.ranges().iter().map(|(nf, low, high)| format!("[{low:?}, {high:?}] with nf = {nf}")).collect();
        ranges.join(", ")
    }
}

impl Leg {
    fn holds(&self, q2: f64) -> bool {
        let (low, high) = (self.from_q2.min(self.to_q2), self.from_q2.max(self.to_q2));
        q2 >= low * (1.0 - SAME_SCALE) && q2 <= high * (1.0 + SAME_SCALE)
    }
}
