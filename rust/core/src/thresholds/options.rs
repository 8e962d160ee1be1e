//! What is to be built, and what of it is allowed.

use crate::coupling::{FEWEST, MOST};
use crate::error::{Error, Result, require};
use crate::evolution::{CHARM, FurtherKernel};
use crate::grid::Grid;

/// Highest order of a kernel of the user; each order up to it takes matrices of its own.
const HIGHEST_ORDER: usize = 8;

/// What is to be built.
#[derive(Debug, Clone)]
pub struct BuildOptions {
    /// Scale of the input, GeV^2.
    pub start_q2: f64,
    /// Number of flavours of the input, 3 to 6.
    pub start_nf: usize,
    /// Scales in GeV^2, with the number of flavours at each, 3 to 6.
    pub asked: Vec<(f64, usize)>,
    /// Heavy flavours (4 to 6) above `start_nf` that the input may hold.
    pub intrinsic: Vec<usize>,
    /// Relative accuracy of the steps, above 0.
    pub tolerance: f64,
    /// Kernels of the user, made on the same grid.
    pub further: Vec<FurtherKernel>,
}

impl BuildOptions {
    /// Refuses what no route can be made of.
    pub(super) fn check(&self, grid: &Grid) -> Result<()> {
        for &(q2, nf) in std::iter::once(&(self.start_q2, self.start_nf)).chain(&self.asked) {
            require("nf", &nf, (FEWEST..=MOST).contains(&nf), "it must be 3, 4, 5 or 6")?;
            require("q2", &format_args!("{q2:?}"), q2.is_finite() && q2 > 0.0, "it must be finite and above 0 GeV^2")?;
        }
        for flavour in &self.intrinsic {
            require("intrinsic", flavour, (CHARM..=MOST).contains(flavour), "it must be 4, 5 or 6")?;
        }
        let tolerance = self.tolerance;
        let shown = format!("{tolerance:?}");
        require("tolerance", &shown, tolerance.is_finite() && tolerance > 0.0, "it must be finite and above 0")?;
        for own in &self.further {
            require("order", &own.order, own.order <= HIGHEST_ORDER, "kernels of your own go to a^9 at most")?;
        }
        let expected = [grid.nodes(); 2];
        let shapes = self.further.iter().map(|own| [own.kernel.matrix.rows(), own.kernel.matrix.cols()]);
        match shapes.into_iter().find(|shape| *shape != expected) {
            Some(given) => Err(Error::Shape { name: "kernel", given: given.into(), expected: expected.into() }),
            None => Ok(()),
        }
    }
}
