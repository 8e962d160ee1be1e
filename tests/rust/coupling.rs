//! The coupling against closed forms, published values and laws.

mod settings;

use std::f64::consts::{LN_2, PI};

use proptest::prelude::*;
use scalewright_core::coupling::beta::beta;
use scalewright_core::coupling::decoupling::Decoupling;
use scalewright_core::coupling::masses::MassKind;
use scalewright_core::coupling::running::{ALPHA_S_LIMIT, Running};
use scalewright_core::coupling::sensitivity::Parameter;
use scalewright_core::numerics::gauss_legendre::gauss_legendre;
use scalewright_core::theory::{Assumptions, Theory};
use settings::{KINDS, at_the_z, benchmark, close};

const ZETA3: f64 = 1.2020569031595942;
/// LO and NLO: printed digits of hep-ph/0204316 and hep-ph/0511119, recalled from memory and confirmed by an
/// independent solution; NNLO computed independently. Tolerance: half a unit of the sixth digit.
#[test]
fn alpha_s_agrees_with_the_published_benchmark() {
    let fixed = [0.117574, 0.110902, 0.110141];
    let variable = [0.122306, 0.116032, 0.115605];
    for order in 0..3 {
        let a = Theory::new(benchmark(order, 4, 4, 4)).unwrap().alpha_s(1e4, 4).unwrap();
        let b = Theory::new(benchmark(order, 3, 5, 3)).unwrap().alpha_s(1e4, 5).unwrap();
        assert!((a - fixed[order]).abs() < 5e-7, "order {order}: {a}");
        assert!((b - variable[order]).abs() < 5e-7, "order {order}: {b}");
    }
}

/// At one loop `1/a` runs linearly and nothing jumps: `d alpha_s(mu)/d alpha_s(given) = (alpha_s(mu)/alpha_s(given))^2`
/// through any thresholds, and masses do not enter. Tolerance: rounding of some ten factors.
#[test]
fn at_one_loop_the_derivative_is_the_squared_ratio() {
    let theory = Theory::new(at_the_z(1, MassKind::Pole)).unwrap();
    for (mu2, nf) in [(1.5, 3), (10.0, 4), (8315.0, 5), (1e6, 6)] {
        let ratio = theory.alpha_s(mu2, nf).unwrap() / 0.118;
        close(theory.alpha_s_derivative(Parameter::AlphaS, mu2, nf).unwrap(), ratio * ratio, 1e-13);
        for heavy in 4..=6 {
            let slope = theory.alpha_s_derivative(Parameter::Mass(heavy), mu2, nf).unwrap();
            assert!(slope.abs() < 1e-18, "{slope}");
        }
    }
}

/// The beta function of nf + 1 flavours at the upward relation is the total derivative of that relation, to the order
/// that running with `loops` loops keeps: what is left falls like `a^(loops+1)`.
#[test]
fn slopes_of_the_step_agree_with_running_on_both_sides() {
    for loops in 2..=5 {
        let left = |a: f64| {
            let step = Decoupling::new(4, loops, MassKind::Pole, 0.7);
            let (below, above) = (Running::new(4, loops), Running::new(5, loops));
            let total = step.by_logarithm(a) + step.by_coupling(a) * below.slope(a);
            (total - above.slope(step.up(a).unwrap())).abs()
        };
        // Halved coupling, at least as many powers of a half; the next power is not yet negligible.
        let falls = (left(4e-3) / left(2e-3)).log2();
        assert!((falls - (loops + 1) as f64).abs() < 0.5, "{loops} loops: a^{falls}");
    }
}

/// Coefficients by power of nf of `beta_3/4^4` and `beta_4/4^5`, those of `alpha_s/pi`: printed digits of
/// K. Chetyrkin, hep-ph/9703278, eq. 14 (from hep-ph/9701390), and 1606.08659, eq. 4, recalled from memory (the equation
/// numbers too); got back from the values at nf = 0 to 4. Tolerance: half a unit of the last digit, far above rounding.
#[test]
fn beta_function_has_the_published_digits() {
    let four = [(114.23, 5e-3), (-27.1339, 5e-5), (1.58238, 5e-6), (0.0058567, 5e-8), (0.0, 1e-10)];
    let five = [(524.56, 5e-3), (-181.8, 0.05), (17.16, 5e-3), (-0.22586, 5e-6), (-0.0017993, 5e-8)];
    for (k, scale, published) in [(3, 256.0, four), (4, 1024.0, five)] {
        let values: Vec<f64> = (0..5).map(|nf| beta(nf, 5)[k] / scale).collect();
        for (given, (expected, digit)) in coefficients(&values).iter().zip(published) {
            assert!((given - expected).abs() <= digit, "beta_{k}: {given} instead of {expected}");
        }
    }
}

/// Coefficients of the polynomial through `values` at 0, 1, 2, ... by Newton's divided differences.
fn coefficients(values: &[f64]) -> Vec<f64> {
    let mut differences = values.to_vec();
    for k in 1..values.len() {
        for i in (k..values.len()).rev() {
            differences[i] = (differences[i] - differences[i - 1]) / k as f64;
        }
    }
    let mut sum = vec![0.0; values.len()];
    for (k, difference) in differences.iter().enumerate().rev() {
        // sum = sum * (n - k) + difference
        for i in (1..sum.len()).rev() {
            sum[i] = sum[i - 1] - k as f64 * sum[i];
        }
        sum[0] = difference - k as f64 * sum[0];
    }
    sum
}

/// One loop: `1/a` is linear in `ln mu^2`. Two loops: `1/a + b ln(b a/(1 + b a)) = beta_0 ln(mu^2/Lambda^2)`, whose
/// solution is a Lambert function. Tolerance 1e-14 relative in the coupling, the accuracy asked for.
#[test]
fn one_and_two_loops_are_the_closed_forms() {
    for nf in 3..=6 {
        for (alpha_s, q2) in [(0.118, 2.0), (0.118, 1e-1), (0.118, 1e12), (0.35, 1e5), (1.5, 4e4)] {
            let (a0, log) = (alpha_s / (4.0 * PI), f64::ln(q2 / 4e3));
            if let Ok(a) = Running::new(nf, 1).run(a0, 4e3, q2) {
                close(a, a0 / (1.0 + a0 * beta(nf, 1)[0] * log), 1e-14);
            }
            let Ok(a) = Running::new(nf, 2).run(a0, 4e3, q2) else {
                continue;
            };
            let (b0, b) = (beta(nf, 2)[0], beta(nf, 2)[1] / beta(nf, 2)[0]);
            let implicit = |a: f64| 1.0 / a + b * (b * a / (1.0 + b * a)).ln();
            let residual = implicit(a) - implicit(a0) - b0 * log;
            // d implicit / d ln a = -1/(a (1 + b a)); the terms subtracted are themselves rounded.
            let rounding = 4.0 * f64::EPSILON * (1.0 / a + 1.0 / a0) * a * (1.0 + b * a);
            assert!((residual * a * (1.0 + b * a)).abs() < 1e-14 + rounding, "nf = {nf}, {q2} GeV^2: {residual}");
        }
    }
}

/// `ln mu^2` between two couplings, up to the limit, against the defining integral in `1/a` with no part taken
/// out, on 200 panels of 20 nodes. Tolerance: 1e-13 absolute, rounding of the sum for logarithms up to 20.
#[test]
fn all_loops_solve_the_defining_integral() {
    let rule = gauss_legendre(20);
    for (nf, loops) in (3..=6).flat_map(|nf| (1..=5).map(move |loops| (nf, loops))) {
        let (running, b) = (Running::new(nf, loops), beta(nf, loops));
        for (from, to) in [(0.118, 0.35), (0.118, ALPHA_S_LIMIT), (2.0, 0.05), (0.3, 0.299)] {
            let (y0, y1) = (4.0 * PI / from, 4.0 * PI / to);
            let slope = |y: f64| 1.0 / b.iter().rev().fold(0.0, |sum, c| sum / y + c);
            let edges: Vec<f64> = (0..=200).map(|k| y0 * (y1 / y0).powf(f64::from(k) / 200.0)).collect();
            let exact: f64 = edges.windows(2).map(|e| rule.integrate(e[0], e[1], slope)).sum();
            let given = running.log_scale(1.0 / y0, 1.0 / y1);
            assert!((given - exact).abs() < 1e-13, "nf = {nf}, {loops} loops: {given} for {exact}");
            let back = running.run(1.0 / y0, 1.0, given.exp()).map(|a| a * y1);
            // At the limit itself the last digit decides whether the pole is met.
            if to < ALPHA_S_LIMIT {
                close(back.unwrap(), 1.0, 1e-13);
            }
        }
    }
}

/// Coefficients of the power-series inverse of the upward relation in `alpha_s/pi`, to third order: what the papers print.
fn downward(step: &Decoupling) -> [f64; 3] {
    let e: Vec<f64> = step.series().iter().enumerate().map(|(n, p)| p * 0.25f64.powf(n as f64)).collect();
    [-e[1], 2.0 * e[1] * e[1] - e[2], -5.0 * e[1].powi(3) + 5.0 * e[1] * e[2] - e[3]]
}

/// K. Chetyrkin, B. Kniehl, M. Steinhauser, hep-ph/9706430: the downward relation with all its logarithms for m(m)
/// and M, recalled from memory. The program takes the constants alone and derives the logarithms: tolerance 1e-12
/// for rounding.
#[test]
fn logarithms_are_those_of_the_literature() {
    for (nl, l) in [(3usize, 0.7f64), (4, -1.3), (5, 2.1)] {
        let (n, zeta2) = (nl as f64, PI * PI / 6.0);
        let common = -131.0 / 576.0 * l * l - l.powi(3) / 216.0;
        let msbar = 564731.0 / 124416.0 - 82043.0 / 27648.0 * ZETA3 - 6793.0 / 1728.0 * l
            + n * (-2633.0 / 31104.0 + 281.0 / 1728.0 * l);
        let pole = -58933.0 / 124416.0
            - 2.0 / 3.0 * zeta2 * (1.0 + LN_2 / 3.0)
            - 80507.0 / 27648.0 * ZETA3
            - 8521.0 / 1728.0 * l
            + n * (2479.0 / 31104.0 + zeta2 / 9.0 + 409.0 / 1728.0 * l);
        for (kind, c2, c3) in [(MassKind::Msbar, 11.0 / 72.0, msbar), (MassKind::Pole, -7.0 / 24.0, pole)] {
            let [d1, d2, d3] = downward(&Decoupling::new(nl, 4, kind, l));
            close(d1, -l / 6.0, 1e-12);
            close(d2, c2 - 19.0 / 24.0 * l + l * l / 36.0, 1e-12);
            close(d3, c3 + common, 1e-12);
        }
    }
}

/// Constant of the third order for a pole mass as printed: 340.729 - 16.7981 nl (hep-ph/9706430), half a unit of
/// the last digits; second order 14/3 and -22/9.
#[test]
fn constants_have_the_published_digits() {
    for nl in 3..=5 {
        let pole = Decoupling::new(nl, 5, MassKind::Pole, 0.0);
        let msbar = Decoupling::new(nl, 5, MassKind::Msbar, 0.0);
        close(pole.series()[2], 14.0 / 3.0, 1e-14);
        close(msbar.series()[2], -22.0 / 9.0, 1e-14);
        let printed = 340.729 - 16.7981 * nl as f64;
        assert!((pole.series()[3] - printed).abs() < 5e-4 + 5e-5 * nl as f64);
    }
}

/// Limit of values at h, h/2, h/4, ... that are a power series in h (L. Richardson).
fn limit(mut values: Vec<f64>) -> f64 {
    let count = values.len();
    for k in 1..count {
        let factor = 2f64.powf(k as f64);
        values = values.windows(2).map(|v| (factor * v[1] - v[0]) / (factor - 1.0)).collect();
    }
    values[0]
}

/// A pole mass and the MS-bar mass it belongs to must give the same coupling: at n loops the relative difference falls
/// like `a^n`.
///
/// `M = m(m) [1 + 4/3 x + (13.44340 - 1.04137 nl) x^2 + (190.595 - 26.655 nl + 0.6527 nl^2) x^3]`,
/// `x = alpha_s^(nl+1)(m)/pi`: second order in closed form (N. Gray et al., Z. Phys. C 48, 673), third order in printed
/// digits (K. Chetyrkin, M. Steinhauser, hep-ph/9911434; K. Melnikov, T. van Ritbergen, hep-ph/9912391), recalled from
/// memory. This ties the constants of both kinds together, of the fourth order too.
#[test]
fn pole_and_msbar_masses_agree_one_order_higher() {
    for (nl, loops) in (3..=5).flat_map(|nl| (3..=5).map(move |loops| (nl, loops))) {
        let difference = |alpha_s: f64| {
            let (below, above) = (Running::new(nl, loops), Running::new(nl + 1, loops));
            let a = alpha_s / (4.0 * PI);
            let msbar = Decoupling::new(nl, loops, MassKind::Msbar, 0.0).down(a).unwrap();
            let (x, n, zeta2) = (alpha_s / PI, nl as f64, PI * PI / 6.0);
            let relation = [
                4.0 / 3.0,
                307.0 / 32.0 + zeta2 * (2.0 + 2.0 / 3.0 * LN_2 - n / 3.0) - ZETA3 / 6.0 - 71.0 / 144.0 * n,
                190.595 - 26.655 * n + 0.6527 * n * n,
            ];
            let ratio = relation[..loops - 2].iter().rev().fold(0.0, |sum, c| (sum + c) * x) + 1.0;
            let at_pole = above.run(a, 1.0, ratio * ratio).unwrap();
            let low = Decoupling::new(nl, loops, MassKind::Pole, 0.0).down(at_pole).unwrap();
            below.run(low, ratio * ratio, 1.0).unwrap() / msbar - 1.0
        };
        // Two couplings a factor 2 apart, small enough for the next order to lead.
        let (large, small) = (difference(0.02), difference(0.01));
        let power = (large / small).log2();
        // Relative difference: a^loops; 0.1 for the orders beyond the first left out.
        assert!((power - loops as f64).abs() < 0.1, "nf = {nl}, {loops} loops: power {power}");
        // What is left of the last order kept, in units of x^(loops-1), as the coupling goes to zero.
        let left = |k: i32| {
            let alpha_s = 0.08 * 0.5f64.powi(k);
            difference(alpha_s) / (alpha_s / PI).powf(loops as f64 - 1.0)
        };
        let left = limit((0..5).map(left).collect());
        // Closed forms: rounding and extrapolation. Fourth order: half a unit of the printed digits, added up.
        let digits = if loops == 5 { 3e-3 } else { 1e-6 };
        assert!(left.abs() < digits, "nl = {nl}, {loops} loops: {left}");
    }
}

/// Moving a threshold by a factor changes the coupling far above it only by the order left out, `a^(loops+1)`
/// absolute, that is `a^loops` relative.
#[test]
fn threshold_scale_matters_one_order_higher() {
    for (kind, loops) in KINDS.into_iter().flat_map(|kind| (1..=5).map(move |loops| (kind, loops))) {
        let change = |alpha_s: f64| {
            let value = |shift: f64| {
                let mut given = at_the_z(loops, kind);
                given.alpha_s = alpha_s;
                given.alpha_s_nf = 4;
                given.alpha_s_q2 = 16.0;
                given.thresholds_q2[1] *= shift;
                Theory::new(given).unwrap().a(400.0, 5).unwrap()
            };
            (value(4.0) / value(0.5) - 1.0).abs()
        };
        let (large, small) = (change(0.02), change(0.01));
        let power = (large / small).log2();
        // 0.1 for the orders beyond the first left out.
        assert!((power - loops as f64).abs() < 0.1, "{kind:?}, {loops} loops: power {power}");
    }
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::default() })]

    /// Up and down over one threshold is the identity, 1e-14 for rounding, at any logarithm that a threshold
    /// ratio and a scale ratio of 1/4 to 4 each allow.
    #[test]
    fn down_inverts_up(
        nl in 3usize..=5, loops in 1usize..=5, pole in any::<bool>(), log in -2.8..2.8, alpha_s in 0.01..0.4,
    ) {
        let kind = if pole { MassKind::Pole } else { MassKind::Msbar };
        let step = Decoupling::new(nl, loops, kind, log);
        let a = alpha_s / (4.0 * PI);
        if let Ok(above) = step.up(a) {
            prop_assert!((step.down(above).unwrap() / a - 1.0).abs() < 1e-14);
        }
    }
}

/// From the tau lepton to the Z with four loops, recalled from memory: 0.332 to 0.1202 (P. Baikov, K. Chetyrkin,
/// J. Kuehn, 0801.1821), 0.325 to 0.1192 and 0.312 to 0.1178 (PDG reviews of QCD, 2018 and 2020). Tolerance: half a
/// unit of the last digit (5e-5) and of the input's (7e-5 at the Z), and 1e-4 for masses and threshold scales, which
/// shift the result by that much and are not recalled.
#[test]
fn alpha_s_of_the_tau_is_that_of_the_z() {
    for (tau, z) in [(0.332, 0.1202), (0.325, 0.1192), (0.312, 0.1178)] {
        let given =
            Assumptions { alpha_s: tau, alpha_s_q2: 1.77686 * 1.77686, alpha_s_nf: 3, ..at_the_z(4, MassKind::Msbar) };
        let value = Theory::new(given).unwrap().alpha_s(91.1876 * 91.1876, 5).unwrap();
        assert!((value - z).abs() < 2.2e-4, "{tau}: {value} instead of {z}");
    }
}
