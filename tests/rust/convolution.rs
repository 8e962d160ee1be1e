//! Convolution matrices: conservation laws, and quadrature by another rule.

#[path = "convolution/coefficients.rs"]
mod coefficients;

use scalewright_core::convolution::{KernelSet, kernels_on};
use scalewright_core::grid::{Grid, Resolution};
use scalewright_core::kernels::splitting::Channel;
use scalewright_core::watch::Unwatched;

fn grid(resolution: Resolution) -> Grid {
    Grid::preset(1e-7, resolution).unwrap()
}

fn density(grid: &Grid) -> Vec<f64> {
    grid.u().iter().map(|u| (-0.3 * u).exp() * (-(-u).exp_m1()).powi(4)).collect()
}

fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(a, b)| a * b).sum()
}

/// Momentum, above and below `x_min`, that a kernel gives to a density.
fn momentum(grid: &Grid, set: &KernelSet, order: usize, channel: Channel, f: &[f64]) -> f64 {
    let kernel = set.splitting(order, channel, 4.0);
    let above: Vec<f64> = (0..grid.nodes()).map(|i| dot(kernel.matrix.row(i), f)).collect();
    dot(&grid.moment_weights(1.0), &above) + dot(&kernel.momentum_below, f)
}

#[test]
fn momentum_is_conserved_at_lo_and_nlo() {
    // The density is interpolated to 1e-8 (standard) and 1e-10 (fine), and so is its convolution.
    for (resolution, tolerance) in [(Resolution::Standard, 1e-7), (Resolution::Fine, 1e-9)] {
        let grid = grid(resolution);
        let set = kernels_on(&grid, &Unwatched).unwrap();
        let f = density(&grid);
        for order in [0, 1] {
            for sources in [
                [Channel::NsPlus, Channel::PureSinglet, Channel::GluonQuark].as_slice(),
                &[Channel::QuarkGluon, Channel::GluonGluon],
            ] {
                let parts: Vec<f64> = sources.iter().map(|&c| momentum(&grid, &set, order, c, &f)).collect();
                let (sum, scale) = (parts.iter().sum::<f64>(), parts.iter().fold(0.0_f64, |m, p| m.max(p.abs())));
                println!("{resolution:?} order {order} {sources:?}: {:.1e}", sum / scale);
                assert!(sum.abs() < tolerance * scale, "{resolution:?} {order} {sources:?}: {sum} of {scale}");
            }
        }
    }
}
