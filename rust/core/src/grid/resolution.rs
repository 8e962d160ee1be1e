//! How well a density is resolved: the tails of its Chebyshev coefficients.

use super::Grid;
use crate::numerics::chebyshev::coefficients;

impl Grid {
    /// Estimated absolute interpolation error of a nodal function in each panel.
    ///
    /// The larger of the last two Chebyshev coefficients of the panel. Coefficients of a smooth function fall
    /// geometrically, so what is left out is of the size of the last ones kept; two, since one may vanish by chance.
    pub fn tails(&self, values: &[f64]) -> Vec<f64> {
        (0..self.panels())
            .map(|panel| {
                let owned = self.owned(panel);
                let left = if owned.start == 0 { 0.0 } else { values[owned.start - 1] };
                let mut local = vec![left];
                local.extend_from_slice(&values[owned]);
                coefficients(&local).iter().rev().take(2).fold(0.0_f64, |most, c| most.max(c.abs()))
            })
            .collect()
    }
}
