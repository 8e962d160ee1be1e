//! Rows for single values of x: kernels that depend on the scale of a data point.
//!
//! A kernel K that starts at `chi = rescaling * x` gives `int_chi^1 dw K(w) G(chi/w)`. Its end point lies anywhere in a
//! panel, not at a node; the quadrature is graded towards it, so that a threshold like `(1-w)^(1/2)` and
//! logarithms do not limit the accuracy.

use super::points::{graded_points, threshold_points};
use crate::error::{Error, Result};
use crate::grid::Grid;
use crate::kernels::coefficients::{Massive, MassiveKernel, Onset};
use crate::numerics::endpoint::Logarithms;
use crate::watch::Watch;
use rayon::prelude::*;

/// Rows `(point, node)`, one after the other, of a massive coefficient function of order a at `mu_f = Q`: `rows @ F` is
/// the contribution to the structure function at each `x` and `q2` (GeV^2, one a point) from the nodal values of the
/// gluon or light quark, as [`Massive`] says. Zero where `x` is above threshold.
///
/// # Errors
/// [`Error::OutOfRange`] where the lowest momentum fraction needed lies below `x_min`, [`Error::Argument`] where
/// an argument is not positive and finite, [`Error::Shape`] where there are not as many `q2` as `x`,
/// [`Error::Interrupted`].
pub fn massive_rows(
    grid: &Grid,
    what: Massive,
    x: &[f64],
    q2: &[f64],
    mass: f64,
    watch: &dyn Watch,
) -> Result<Vec<f64>> {
    positive("mass", mass)?;
    if x.len() != q2.len() {
        return Err(Error::Shape { name: "q2", given: vec![q2.len()], expected: vec![x.len()] });
    }
    let nodes = grid.nodes();
    let mut rows = vec![0.0; x.len() * nodes];
    rows.par_chunks_mut(nodes).zip(x).zip(q2).try_for_each(|((row, &x), &q2)| {
        watch.check()?;
        positive("q2", q2)?;
        positive("x", x)?;
        let kernel = what.at(q2, mass);
        fill(grid, &kernel, start(grid, &kernel, x)?, row);
        Ok(())
    })?;
    Ok(rows)
}

fn positive(name: &'static str, value: f64) -> Result<()> {
    if value > 0.0 && value.is_finite() {
        return Ok(());
    }
    Err(Error::Argument { name, value: format!("{value:?}"), allowed: format!("{name} must be positive and finite") })
}

/// `ln(1/chi)`; not positive where nothing can be made.
fn start(grid: &Grid, kernel: &MassiveKernel, x: f64) -> Result<f64> {
    /// The rounding of `exp` and `ln` where `x_min` itself is asked.
    const ROUNDING: f64 = 1e-13;
    let u = -x.ln() - kernel.rescaling.ln();
    if u > grid.u_max() + ROUNDING {
        return Err(Error::OutOfRange {
            name: "x",
            value: format!("{x:?}"),
            allowed: format!("the momentum fraction {:?} needed lies below x_min = {:?}", (-u).exp(), grid.x_min()),
        });
    }
    Ok(u.min(grid.u_max()))
}

fn fill(grid: &Grid, kernel: &MassiveKernel, u: f64, row: &mut [f64]) {
    if u <= 0.0 {
        return;
    }
    let own = grid.edges()[1..].partition_point(|&edge| edge < u).min(grid.panels() - 1);
    for panel in (0..=own).rev() {
        let from = if panel == own { 0.0 } else { u - grid.edges()[panel + 1] };
        let to = u - grid.edges()[panel];
        let mut local = vec![0.0; grid.degrees()[panel] + 1];
        if panel == own {
            add_own(grid, kernel, u, to, panel, &mut local);
        } else {
            add_other(grid, kernel, u, (from, to), panel, &mut local);
        }
        grid.scatter(panel, &local, |j, value| row[j] += value);
    }
}

/// The panel that holds chi: the plus distributions act on `L_j(u - t) - L_j(u)`, and what they and the local part
/// leave is a multiple of `G(chi)`.
fn add_own(grid: &Grid, kernel: &MassiveKernel, u: f64, to: f64, panel: usize, local: &mut [f64]) {
    let mut here = vec![0.0; local.len()];
    grid.panel(panel).cardinals(u, &mut here);
    let mut of_here = kernel.local;
    for (k, coefficient) in kernel.plus.iter().enumerate() {
        of_here += coefficient * super::matrices::left_to_subtract(to, k);
    }
    let mut cardinals = vec![0.0; local.len()];
    for (t, weight) in points(grid, kernel, panel, 0.0, to) {
        let w = Logarithms::at(t);
        let (regular, plus) = (weight * w.z * kernel.regular(&w), weight * w.z * plus_part(kernel, &w));
        grid.panel(panel).cardinals(u - t, &mut cardinals);
        for ((sum, cardinal), here) in local.iter_mut().zip(&cardinals).zip(&here) {
            *sum += regular * cardinal + plus * (cardinal - here);
        }
    }
    local.iter_mut().zip(&here).for_each(|(sum, here)| *sum += of_here * here);
}

fn add_other(grid: &Grid, kernel: &MassiveKernel, u: f64, range: (f64, f64), panel: usize, local: &mut [f64]) {
    let mut cardinals = vec![0.0; local.len()];
    for (t, weight) in points(grid, kernel, panel, range.0, range.1) {
        let w = Logarithms::at(t);
        let value = weight * w.z * (kernel.regular(&w) + plus_part(kernel, &w));
        grid.panel(panel).cardinals(u - t, &mut cardinals);
        local.iter_mut().zip(&cardinals).for_each(|(sum, cardinal)| *sum += value * cardinal);
    }
}

/// `sum_k plus_k ln^k(1-w)/(1-w)`.
fn plus_part(kernel: &MassiveKernel, w: &Logarithms) -> f64 {
    kernel.plus.iter().rev().fold(0.0, |sum, coefficient| sum * w.ln_1mz() + coefficient) / w.one_minus_z
}

/// Quadrature of a panel in t, as the kernel begins.
fn points(grid: &Grid, kernel: &MassiveKernel, panel: usize, from: f64, to: f64) -> Vec<(f64, f64)> {
    let (length, degree) = (grid.edges()[panel + 1] - grid.edges()[panel], grid.degrees()[panel]);
    match kernel.onset {
        Onset::Root(distance) => threshold_points(from, to, (length, degree), distance),
        Onset::Logarithms(distance) => graded_points(from, to, degree, distance),
    }
}
