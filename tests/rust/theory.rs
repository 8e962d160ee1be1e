//! What a theory answers and what it refuses.

mod settings;

use std::f64::consts::{LN_2, PI};

use proptest::prelude::*;
use scalewright_core::coupling::beta::beta;
use scalewright_core::coupling::decoupling::Decoupling;
use scalewright_core::coupling::masses::MassKind;
use scalewright_core::coupling::running::{ALPHA_S_LIMIT, Running};
use scalewright_core::error::{Error, Result};
use scalewright_core::theory::{Assumptions, Theory};
use settings::{KINDS, at_the_z, benchmark, close};

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::default() })]

    /// A coupling given at any scale and number of flavours, read at any other, and given there: the theory made
    /// from it has the first value back. Tolerance 1e-12: rounding, magnified by the growth of the coupling downwards.
    #[test]
    fn any_reference_on_the_curve_gives_the_same_curve(
        loops in 1usize..=5, pole in any::<bool>(), ratio in 0.25..4.0, nf in 3usize..=6, log in 3.0f64..18.0,
    ) {
        let kind = if pole { MassKind::Pole } else { MassKind::Msbar };
        let first = Assumptions { evolution_mu2_ratio: ratio, ..at_the_z(loops, kind) };
        let alpha_s = Theory::new(first.clone()).unwrap().alpha_s(log.exp(), nf);
        prop_assume!(alpha_s.as_ref().is_ok_and(|value| *value < 1.0));
        let (alpha_s_q2, alpha_s_nf) = (log.exp(), nf);
        let second = Assumptions { alpha_s: alpha_s.unwrap(), alpha_s_q2, alpha_s_nf, ..first.clone() };
        let back = Theory::new(second).unwrap().alpha_s(first.alpha_s_q2, 5).unwrap();
        prop_assert!((back / 0.118 - 1.0).abs() < 1e-12, "{back}");
    }
}

/// The path spelt out by hand: five flavours at the Z, down to three, as fixed nf = 3 asks for; with a scale ratio
/// the steps lie at `mu_r^2 = ratio mu_thr^2` with that logarithm. Same operations: rounding.
#[test]
fn fixed_three_flavours_are_reached_through_the_thresholds() {
    let given = Assumptions { fewest: 3, most: 3, evolution_mu2_ratio: 2.0, ..at_the_z(3, MassKind::Pole) };
    let mut a = given.alpha_s / (4.0 * PI);
    let mut q2 = given.alpha_s_q2;
    for nf in [5, 4] {
        let next = 2.0 * given.thresholds_q2[nf - 4];
        let above = Running::new(nf, 3).run(a, q2, next).unwrap();
        a = Decoupling::new(nf - 1, 3, MassKind::Pole, LN_2).down(above).unwrap();
        q2 = next;
    }
    let expected = Running::new(3, 3).run(a, q2, 1e4).unwrap();
    let theory = Theory::new(given).unwrap();
    close(theory.a(1e4, 3).unwrap(), expected, 1e-15);
    close(theory.a_at_factorisation(5e3, 3).unwrap(), expected, 1e-15);
    close(theory.factorisation_scale(expected, 3).unwrap(), 5e3, 1e-13);
}

/// A scale equal to a threshold counts as above; the number is capped to the flavours of the densities.
#[test]
fn scale_on_a_threshold_counts_as_above() {
    let theory = Theory::new(benchmark(2, 3, 5, 3)).unwrap();
    let counted: Vec<usize> = [1.9, 2.0, 20.249, 20.25, 1e6].map(|q2| theory.nf_at(q2)).to_vec();
    assert_eq!(counted, [3, 4, 4, 5, 5]);
    assert_eq!(Theory::new(benchmark(2, 4, 4, 4)).unwrap().nf_at(1.0), 4);
    assert_eq!(Theory::new(benchmark(2, 5, 6, 4)).unwrap().nf_at(175.0 * 175.0), 6);
    assert_eq!((theory.threshold_q2(5), theory.mass2(6)), (20.25, 175.0 * 175.0));
}

/// The first scale below which the coupling would exceed the limit is refused, the ones above are answered.
#[test]
fn landau_pole_is_an_error() {
    for (kind, loops) in KINDS.into_iter().flat_map(|kind| (1..=5).map(move |loops| (kind, loops))) {
        let theory = Theory::new(at_the_z(loops, kind)).unwrap();
        let at_limit = theory.factorisation_scale(ALPHA_S_LIMIT / (4.0 * PI), 3).unwrap();
        let near = theory.alpha_s(at_limit * (1.0 + 1e-9), 3).unwrap();
        // d ln a/d ln mu^2 = - sum beta_k a^(k+1), up to 2000 here: 1e-9 covers its square times (1e-9)^2 and
        // the rounding of the logarithm times itself.
        let a = ALPHA_S_LIMIT / (4.0 * PI);
        let slope = beta(3, loops).iter().rev().fold(0.0, |sum, b| (sum + b) * a);
        close(near, ALPHA_S_LIMIT * (1.0 - 1e-9 * slope), 1e-9);
        for q2 in [at_limit * (1.0 - 1e-9), 1e-3 * at_limit, 1e-300] {
            let refused = theory.alpha_s(q2, 3);
            assert!(matches!(refused, Err(Error::LandauPole { nf: 3, limit: 5.0, .. })), "{refused:?}");
        }
        assert!(theory.alpha_s(1e300, 6).unwrap() > 0.0);
    }
}

/// A coupling beyond the pole before the threshold leaves what lies above the threshold usable.
#[test]
fn unreachable_flavours_are_an_error_only_when_asked_for() {
    let given = Assumptions { alpha_s: 0.3, ..at_the_z(3, MassKind::Pole) };
    let theory = Theory::new(given).unwrap();
    assert!(theory.alpha_s(1e4, 5).is_ok());
    assert!(matches!(theory.alpha_s(1e4, 3), Err(Error::LandauPole { nf: 5, .. })));
    let strong = Decoupling::new(3, 5, MassKind::Pole, 0.0).up(0.3);
    assert!(matches!(strong, Err(Error::Argument { name: "alpha_s", .. })), "{strong:?}");
}

fn message<T: std::fmt::Debug>(result: Result<T>) -> String {
    result.unwrap_err().to_string()
}

/// What was given and what is allowed, for each thing that a theory refuses.
#[test]
fn refusals_say_what_is_allowed() {
    type Change = fn(&mut Assumptions);
    let cases: [(Change, &str); 13] = [
        (|t| t.order = 3, "order = 3: it must be 0 (LO), 1 (NLO) or 2 (NNLO)"),
        (|t| t.running_loops = 0, "running_loops = 0: it must be 1 to 5"),
        (|t| t.running_loops = 6, "running_loops = 6: it must be 1 to 5"),
        (|t| t.fewest = 2, "fewest flavours = 2: it must be 3, 4, 5 or 6"),
        (|t| t.most = 7, "most flavours = 7: it must be 3, 4, 5 or 6"),
        (|t| t.fewest = 6, "flavours = (6, 5): the fewest must not exceed the most"),
        (|t| t.alpha_s_nf = 2, "nf of the coupling = 2: it must be 3, 4, 5 or 6"),
        (|t| t.alpha_s = 0.0, "alpha_s = 0: it must be above 0 and at most 5"),
        (|t| t.alpha_s = f64::NAN, "alpha_s = NaN: it must be above 0 and at most 5"),
        (|t| t.evolution_mu2_ratio = 4.5, "evolution_mu2_ratio = 4.5: mu_r^2/mu_f^2 must lie in [0.25, 4]"),
        (|t| t.alpha_s_q2 = -1.0, "q2 of the coupling = -1: it must be finite and above 0 GeV^2"),
        (|t| t.masses.charm = f64::INFINITY, "charm mass = inf: it must be finite and above 0 GeV"),
        (|t| t.thresholds_q2[2] = 0.0, "top threshold = 0: it must be finite and above 0 GeV^2"),
    ];
    for (change, expected) in cases {
        let mut given = benchmark(2, 3, 5, 3);
        change(&mut given);
        assert_eq!(message(Theory::new(given)), expected);
    }
    let mut given = benchmark(2, 3, 5, 3);
    given.masses.charm = 5.0;
    let order = "charm, bottom and top must increase in this order";
    assert_eq!(message(Theory::new(given)), format!("masses = [5.0, 4.5, 175.0]: {order}"));
    let mut given = benchmark(2, 3, 5, 3);
    given.thresholds_q2 = [3.0, 3.0, 4.0];
    assert_eq!(message(Theory::new(given.clone())), format!("thresholds_q2 = [3.0, 3.0, 4.0]: {order}"));
    // Thresholds that the densities do not cross may lie anywhere.
    given.most = 4;
    let theory = Theory::new(given).unwrap();
    assert_eq!(message(theory.a(0.0, 3)), "q2 = 0: it must be finite and above 0 GeV^2");
    assert_eq!(message(theory.a(4.0, 7)), "nf = 7: it must be 3, 4, 5 or 6");
    assert_eq!(message(theory.factorisation_scale(0.5, 4)), "a = 0.5: it must be above 0 and at most 0.3978");
}
