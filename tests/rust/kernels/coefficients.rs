//! Coefficient functions of light quarks against sum rules and exact moments.
//!
//! Published values are recalled from memory; the sum rules are confirmed by an independent calculation.

use crate::moments::{ROUNDING, assert_near, moment, power};
use scalewright_core::colour::{CA, CF, TR};
use scalewright_core::kernels::coefficients::{self, Coefficient, StructureFunction};
use scalewright_core::numerics::endpoint::Point;

use Coefficient::{Gluon, NsMinus, NsPlus, PureSinglet};
use StructureFunction::{F2, F3, FL};

/// Moment of the coefficient of `nf^p`.
fn part(order: usize, function: StructureFunction, coefficient: Coefficient, p: usize, n: f64) -> f64 {
    moment(&power(&coefficients::kernel(order, function, coefficient), p), n, 0.0)
}

/// `z C(z)` of the coefficient of `nf^p` at `z = e^-t`.
fn times_z(order: usize, function: StructureFunction, coefficient: Coefficient, p: usize, t: f64) -> f64 {
    let point = Point::at(t);
    point.z * power(&coefficients::kernel(order, function, coefficient), p).regular(&point, 0.0)
}

/// S. Adler, Phys. Rev. 143 (1966) 1144.
#[test]
fn adler_sum_rule_has_no_corrections() {
    assert_near(part(0, F2, NsMinus, 0, 1.0), 1.0, 0.0);
    assert_near(part(1, F2, NsMinus, 0, 1.0), 0.0, ROUNDING);
    // Of ns- the moment is what two parametrisations leave of -4.3783, known to 1.4e-4 of it; measured 6.2e-4.
    assert_near(part(2, F2, NsMinus, 0, 1.0), 0.0, 7e-4);
    assert_near(part(2, F2, NsMinus, 1, 1.0), 0.0, ROUNDING);
}

/// `1 - 4 a - 16 a^2 (55/12 - nf/3)`: S. Gorishnii, S. Larin, Phys. Lett. B 172 (1986) 109, for D. Gross,
/// C. Llewellyn Smith, Nucl. Phys. B 14 (1969) 337.
#[test]
fn gross_llewellyn_smith_sum_rule_is_as_published() {
    assert_near(part(0, F3, NsMinus, 0, 1.0), 1.0, 0.0);
    assert_near(part(1, F3, NsMinus, 0, 1.0), -4.0, ROUNDING);
    // The parametrisation: measured 1.7e-6 of it.
    assert_near(part(2, F3, NsMinus, 0, 1.0), -220.0 / 3.0, 1.5e-4);
    assert_near(part(2, F3, NsMinus, 1, 1.0), 16.0 / 3.0, ROUNDING);
}

/// The sum rule of J. Bjorken, Phys. Rev. 163 (1967) 1767 for `F1`, with Adler's: K. Chetyrkin, S. Gorishnii,
/// S. Larin, F. Tkachov, Phys. Lett. B 137 (1984) 230.
#[test]
fn unpolarised_bjorken_sum_rule_is_as_published() {
    assert_near(part(1, FL, NsMinus, 0, 1.0), 8.0 / 3.0, ROUNDING);
    // The parametrised difference to ns+, -2.14, is known to a part in a thousand: measured 1.4e-3.
    assert_near(part(2, FL, NsMinus, 0, 1.0), 16.0 * 23.0 / 6.0, 2e-3);
    assert_near(part(2, FL, NsMinus, 1, 1.0), -16.0 * 8.0 / 27.0, ROUNDING);
}

fn harmonic(power: i32, n: u32) -> f64 {
    (1..=n).map(|k| f64::from(k).powi(-power)).sum()
}

/// W. Bardeen, A. Buras, D. Duke, T. Muta, Phys. Rev. D 18 (1978) 3998: all moments in closed form.
#[test]
fn order_a_moments_are_exact() {
    for k in [1, 2, 3, 4, 7, 12] {
        let n = f64::from(k);
        let (s1, s2) = (harmonic(1, k), harmonic(2, k));
        let f2 = 2.0 * s1 * s1 - 2.0 * s2 + 3.0 * s1 - 2.0 * s1 / (n * (n + 1.0))
            + 3.0 / n
            + 4.0 / (n + 1.0)
            + 2.0 / (n * n)
            - 9.0;
        for quark in [NsPlus, NsMinus] {
            assert_near(part(1, F2, quark, 0, n), CF * f2, ROUNDING);
            assert_near(part(1, FL, quark, 0, n), 4.0 * CF / (n + 1.0), ROUNDING);
            assert_near(part(1, F3, quark, 0, n), CF * (f2 - 2.0 / n - 2.0 / (n + 1.0)), ROUNDING);
        }
        let split = (n * n + n + 2.0) / (n * (n + 1.0) * (n + 2.0));
        let gluon = 4.0 / (n + 1.0) - 4.0 / (n + 2.0) + 1.0 / (n * n) - split * (1.0 + s1);
        assert_near(part(1, F2, Gluon, 1, n), 4.0 * TR * gluon, ROUNDING);
        assert_near(part(1, FL, Gluon, 1, n), 16.0 * TR / ((n + 1.0) * (n + 2.0)), ROUNDING);
    }
}

/// S. Larin, T. van Ritbergen, J. Vermaseren, Nucl. Phys. B 427 (1994) 41, and with P. Nogueira, hep-ph/9605317:
/// even moments of `F2` and `FL` for quarks.
#[test]
fn even_moments_at_order_a2_are_as_published() {
    // The parametrisations miss them by 5e-6 to 3e-5.
    for (function, n, published) in [
        (F2, 2.0, 17.69376589),
        (F2, 4.0, 142.3434719),
        (F2, 10.0, 639.2106633),
        (FL, 2.0, 56.75530152),
        (FL, 4.0, 47.99398931),
    ] {
        assert_near(part(2, function, NsPlus, 0, n), published, 3e-5 * published);
    }
    // Exact, and ten digits are given.
    for (function, n, published) in
        [(F2, 2.0, -5.333333333), (F2, 4.0, -16.98791358), (FL, 2.0, -4.543209877), (FL, 4.0, -3.413333333)]
    {
        assert_near(part(2, function, NsPlus, 1, n), published, 6e-9);
    }
}

/// A. Retey, J. Vermaseren, hep-ph/0007294: odd moments of `F3`.
#[test]
fn odd_moments_at_order_a2_are_as_published() {
    for (n, published, published_nf) in [(3.0, 14.25404015, -6.742283951), (5.0, 173.0005199, -19.39801647)] {
        // The parametrisation misses them by 1.1e-3 and 7e-4; the nf part is exact, the last digit uncertain.
        assert_near(part(2, F3, NsMinus, 0, n), published, 1.2e-3);
        assert_near(part(2, F3, NsMinus, 1, n), published_nf, 1.1e-8);
    }
}

/// hep-ph/9605317, as above.
#[test]
fn even_moments_at_order_a3_are_as_published() {
    for (n, published) in [(2.0, [2544.598087, -421.6908885]), (4.0, [2523.73902, -383.0520013])] {
        for (p, value) in published.into_iter().enumerate() {
            // The parametrisation misses them by 2e-7 to 1.1e-5.
            assert_near(part(3, FL, NsPlus, p, n), value, 1.2e-5 * value.abs());
        }
    }
}

/// Even and odd moments differ by what one quark pair does, `CF (CF - CA/2)`, which falls fast with N.
#[test]
fn odd_and_even_coefficients_agree_at_large_n() {
    for function in StructureFunction::ALL {
        for p in 0..2 {
            let [plus, minus] = [NsPlus, NsMinus].map(|quark| part(2, function, quark, p, 20.0));
            // Measured 1e-3, 3e-4 and 3.6e-3, of numbers of 20 to 1.3e3.
            assert_near(plus, minus, 4e-3);
        }
    }
}

/// W. van Neerven, A. Vogt, hep-ph/9907472, section 3: an independent fit of the exact odd coefficients.
#[test]
fn odd_coefficients_follow_the_older_fit() {
    let minus = |point: &Point| {
        let (z, l, l1) = (point.z, point.ln_z, point.ln_1mz);
        let f2 = -84.18 - 1010.0 * z - l * (1.235 + l * (19.56 + 3.748 * l))
            + l1 * (-663.0 + l1 * (71.08 - 17.19 * l1))
            + l * l1 * (80.41 * l - 192.4 * l1);
        let fl = -52.27 + 100.8 * z + (23.29 * z - 0.043) * l * l - 22.21 * l + 13.30 * l1 * l1
            - 59.12 * l1
            - 141.7 * l * l1;
        let f3 = -206.1 - 576.8 * z - l * (67.60 + l * (33.31 + 3.922 * l)) + l1 * (-409.6 + l1 * (94.61 - 15.20 * l1))
            - 147.9 * l * l1 * l1;
        [(F2, f2), (FL, fl), (F3, f3)]
    };
    for i in 1..100 {
        let point = Point::from_z(f64::from(i) / 100.0);
        for (function, older) in minus(&point) {
            let newer = power(&coefficients::kernel(2, function, NsMinus), 0).regular(&point, 0.0);
            // Measured at worst 0.8 per cent (FL at 0.99), and 0.45 where they are small.
            assert_near(newer, older, 8e-3 * older.abs() + 0.5);
        }
    }
}

/// High-energy factorisation (S. Catani, F. Hautmann, hep-ph/9405388): a quark radiates the gluon of the leading
/// 1/z with CF where a gluon does so with CA.
#[test]
fn leading_small_z_terms_have_the_ratio_of_colours() {
    // z C(z) is constant here up to z ln^3 z.
    for (function, digits) in [(F2, 1.4e-5), (FL, 3.1e-4)] {
        let [quark, gluon] = [PureSinglet, Gluon].map(|source| times_z(2, function, source, 1, 60.0));
        // Half a unit of the last digit of both: four decimals of 5.3 and 11.9 in F2, three of 2.4 and 5.3 in FL.
        assert_near(quark / gluon, CF / CA, digits * CF / CA);
    }
    let [quark, gluon] =
        [PureSinglet, Gluon].map(|source| (times_z(3, FL, source, 1, 60.0) - times_z(3, FL, source, 1, 50.0)) / -10.0);
    // Two decimals of 182.
    assert_near(quark / gluon, CF / CA, 3e-5 * CF / CA);
}

/// The leading logarithms at large z exponentiate: with CF for quarks, CA for the gluon (S. Moch, A. Vogt,
/// arXiv:0902.2342).
#[test]
fn leading_large_z_logarithms_of_fl_exponentiate() {
    for (coefficient, p, power_of_y, colour, first) in [(NsPlus, 0, 0, CF, 4.0 * CF), (Gluon, 1, 1, CA, 8.0)] {
        // The fourth difference in ln(1-z) of C/(1-z)^k leaves 24 times the coefficient of ln^4.
        let at = |l1: f64| {
            let point = Point::at(-(-l1.exp()).ln_1p());
            power(&coefficients::kernel(3, FL, coefficient), p).regular(&point, 0.0)
                / point.one_minus_z.powi(power_of_y)
        };
        let difference = at(-24.0) - 4.0 * at(-22.0) + 6.0 * at(-20.0) - 4.0 * at(-18.0) + at(-16.0);
        let leading = difference / (24.0 * 16.0);
        let expected = 0.5 * first * (2.0 * colour) * (2.0 * colour);
        // Terms (1-z) ln^4(1-z) and rounding at 1 - z = 1e-7.
        assert_near(leading, expected, 1e-3 * expected);
    }
}

/// Nothing overflows or becomes undefined however near an end the quadrature comes.
#[test]
fn every_coefficient_is_finite_near_both_ends() {
    for order in 0..=3 {
        for function in StructureFunction::ALL {
            for coefficient in Coefficient::ALL {
                let kernel = coefficients::kernel(order, function, coefficient);
                for t in [1e-300, 1e-100, 1e-17, 1e-16, 1e-8, 1.0, 100.0, 300.0] {
                    let value = kernel.regular(&Point::at(t), 4.0);
                    assert!(value.is_finite(), "{} {} at t = {t:e}", function.name(), coefficient.name());
                }
            }
        }
    }
}

/// What begins at which order, and where knowledge ends.
#[test]
fn only_what_begins_later_or_is_unknown_is_zero() {
    for order in 0..=4 {
        for function in StructureFunction::ALL {
            for coefficient in Coefficient::ALL {
                let first = match (function, coefficient) {
                    (F2 | F3, NsPlus | NsMinus) => 0,
                    (FL, NsPlus | NsMinus) | (F2 | FL, Gluon) => 1,
                    (F2 | FL, PureSinglet) => 2,
                    (F3, PureSinglet | Gluon) => usize::MAX,
                };
                let unknown = order > function.highest_order() || (order == 3 && coefficient == NsMinus);
                let zero = coefficients::kernel(order, function, coefficient).is_zero();
                assert_eq!(zero, order < first || unknown, "{} {}", function.name(), coefficient.name());
            }
        }
    }
}
