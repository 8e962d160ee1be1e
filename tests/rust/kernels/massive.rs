//! Massive coefficient functions against massless ones, the behaviour at threshold and sum rules.
//!
//! The massless ones are of other origin (W. Bardeen et al. 1978) than the massive ones (E. Witten 1976;
//! T. Gottschalk 1981).

use crate::moments::{ROUNDING, assert_near, integrate, moment};
use scalewright_core::kernels::coefficients::{self, Coefficient, Massive, StructureFunction};
use scalewright_core::kernels::kernel::Kernel;
use scalewright_core::kernels::matching::{self, Element, HeavyGluonForm, MassKind};
use scalewright_core::numerics::endpoint::{Logarithms, Point};

use StructureFunction::{F2, F3, FL};

const PAIR: [(Massive, StructureFunction); 2] = [(Massive::F2Gluon, F2), (Massive::FLGluon, FL)];
const CHARGED_GLUON: [(Massive, StructureFunction, f64); 3] =
    [(Massive::ChargedF2Gluon, F2, 0.5), (Massive::ChargedFLGluon, FL, 0.0), (Massive::ChargedF3Gluon, F3, -0.5)];
const CHARGED_QUARK: [(Massive, StructureFunction); 3] =
    [(Massive::ChargedF2Quark, F2), (Massive::ChargedFLQuark, FL), (Massive::ChargedF3Quark, F3)];

/// `A_Hg^(1)` of one logarithm.
fn heavy_from_gluon() -> Kernel {
    let [_, logarithm, _] = matching::kernel(1, Element::HeavyGluon, MassKind::Pole, HeavyGluonForm::Exact);
    logarithm
}

/// What a massive gluon kernel at `Q^2 = 1` differs by from its massless limit, at z.
fn from_massless(what: Massive, function: StructureFunction, logarithms: f64, z: f64, ratio: f64) -> f64 {
    let kernel = what.at(1.0, ratio.sqrt());
    let massless = coefficients::kernel(1, function, Coefficient::Gluon).regular(&Point::from_z(z), 1.0);
    let collinear = heavy_from_gluon().regular(&Point::from_z(z), 0.0);
    let logarithm = if function == FL { 0.0 } else { logarithms * (1.0 / ratio).ln() };
    let (w, scale) = match what {
        Massive::F2Gluon | Massive::FLGluon => (z * kernel.rescaling, kernel.rescaling),
        _ => (z, 1.0),
    };
    kernel.regular(&Logarithms::at(-w.ln())) * scale - massless - logarithm * collinear
}

/// `C -> c_g + A_Hg^(1) ln(Q^2/m^2)`, M. Buza et al., hep-ph/9601302, at `r -> 0` up to `r (A + B ln r)`.
fn assert_power_law(difference: impl Fn(f64) -> f64) {
    let slope = |ratio: f64| difference(ratio) / ratio;
    let [first, second, third] = [1e-4, 1e-5, 1e-6].map(slope);
    let allowed = 1e-7 * first.abs().max(1.0);
    assert_near(difference(1e-9), 0.0, allowed);
    // Equal steps in ln r: the next order is 1e-4 of the first.
    assert_near(third - second, second - first, 1e-2 * first.abs().max(1.0));
}

#[test]
fn a_heavy_pair_becomes_massless_with_a_logarithm() {
    for (what, function) in PAIR {
        for z in [1e-3, 0.03, 0.2, 0.5, 0.8, 0.9] {
            assert_power_law(|ratio| from_massless(what, function, 1.0, z, ratio));
        }
    }
}

/// Only the charm quark, not its partner, is heavy: half of the logarithm, and in `F3` against the light one.
#[test]
fn charm_of_a_gluon_becomes_massless_with_half_a_logarithm() {
    for (what, function, logarithms) in CHARGED_GLUON {
        for z in [1e-3, 0.03, 0.2, 0.5, 0.8, 0.9] {
            assert_power_law(|ratio| from_massless(what, function, logarithms, z, ratio));
        }
    }
}

/// Moment of a massive kernel in w.
fn massive_moment(what: Massive, ratio: f64, n: f64) -> f64 {
    let kernel = what.at(1.0, ratio.sqrt());
    let integral = integrate(|t| {
        let w = Logarithms::at(t);
        let distributions = kernel.plus.iter().rev().fold(0.0, |sum, c| sum * w.ln_1mz() + c) / w.one_minus_z;
        let (weight, subtracted) = ((-(n - 1.0) * t).exp(), (-(n - 1.0) * t).exp_m1());
        w.z * (weight * kernel.regular(&w) + subtracted * distributions)
    });
    integral + kernel.local
}

#[test]
fn charm_of_a_quark_becomes_massless() {
    for (what, function) in CHARGED_QUARK {
        let massless = coefficients::kernel(1, function, Coefficient::NsMinus);
        for n in [1.0, 2.0, 5.0, 12.0] {
            let expected = moment(&massless, n, 0.0);
            for ratio in [1e-4, 1e-9] {
                // Moments reach large z, where 1 - z < m^2/Q^2 is massive at any Q^2: up to two logarithms. Measured
                // below 0.92 of it; in F2 the moment N = 1 is zero for both.
                let allowed = ratio * f64::ln(ratio).powi(2) * n;
                assert_near(massive_moment(what, ratio, n), expected, allowed);
            }
        }
    }
}

/// S. Adler (1966): the number of light quarks that turn to charm is not changed by gluons, whatever the mass.
#[test]
fn first_adler_moment_of_charm_vanishes() {
    for ratio in [1e-4, 1e-2, 0.1, 0.5, 1.0, 2.0, 10.0, 100.0] {
        let kernel = Massive::ChargedF2Quark.at(1.0, f64::sqrt(ratio));
        // In units of what cancels; 1e-14 is some fifty roundings.
        assert_near(massive_moment(Massive::ChargedF2Quark, ratio, 1.0) / kernel.local.abs().max(10.0), 0.0, 1e-14);
    }
}

/// Two quarks in an S wave: `F2 -> 2 beta` whatever the virtuality, and `FL` a power of `beta^2` later.
#[test]
fn a_pair_begins_at_threshold() {
    for ratio in [1e-4, 0.01, 1.0, 100.0] {
        for rest in [1e-9, 1e-13, 1e-16_f64] {
            // 1 - w in units of the distance over which the kernel changes
            let scale: f64 = 4.0 * ratio / (1.0 + 4.0 * ratio);
            let w = Logarithms::at(scale * rest);
            let beta = rest.sqrt();
            let [two, long] = PAIR.map(|(what, _)| {
                let kernel = what.at(1.0, f64::sqrt(ratio));
                kernel.regular(&w) * kernel.rescaling
            });
            let z = 1.0 / (1.0 + 4.0 * ratio);
            // The next terms are beta^2 times a number below 10, or times 1/ratio.
            assert_near(two / (2.0 * beta), 1.0, 10.0 * rest * (1.0 + 1.0 / ratio) + ROUNDING);
            let leading = 16.0 / 3.0 * z * (1.0 - z) * beta.powi(3);
            assert_near(long / leading, 1.0, 10.0 * rest * (1.0 + 1.0 / ratio) + ROUNDING);
        }
    }
}
