//! Splitting functions against sum rules and exact moments.
//!
//! Published values are recalled from memory and agree with an independent calculation to the digits given.

use crate::moments::{ROUNDING, assert_near, moment, power};
use scalewright_core::colour::{CA, CF};
use scalewright_core::kernels::splitting::{self, Channel};
use scalewright_core::numerics::endpoint::Point;

/// Moment of the coefficient of `nf^p` of a splitting function.
fn splitting_moment(order: usize, channel: Channel, p: usize, n: f64) -> f64 {
    moment(&power(&splitting::kernel(order, channel), p), n, 0.0)
}

#[test]
fn quark_number_is_conserved() {
    for order in 0..2 {
        for p in 0..=order {
            assert_near(splitting_moment(order, Channel::NsMinus, p, 1.0), 0.0, ROUNDING);
        }
    }
    // What the NNLO parametrisations miss it by (4e-4, 2e-4, 3e-4 in one digit), P2 being of the order of 1e3.
    assert_near(splitting_moment(2, Channel::NsMinus, 0, 1.0), 0.0, 4e-4);
    assert_near(splitting_moment(2, Channel::NsMinus, 1, 1.0), 0.0, 2e-4);
    assert_near(splitting_moment(2, Channel::NsMinus, 2, 1.0), 0.0, ROUNDING);
    assert_near(splitting_moment(2, Channel::NsSea, 1, 1.0), 0.0, 3.5e-4);
}

fn quark_momentum(order: usize, p: usize) -> f64 {
    [Channel::NsPlus, Channel::PureSinglet, Channel::GluonQuark]
        .map(|channel| splitting_moment(order, channel, p, 2.0))
        .iter()
        .sum()
}

fn gluon_momentum(order: usize, p: usize) -> f64 {
    [Channel::QuarkGluon, Channel::GluonGluon].map(|channel| splitting_moment(order, channel, p, 2.0)).iter().sum()
}

#[test]
fn momentum_is_conserved() {
    for order in 0..2 {
        for p in 0..=order {
            assert_near(quark_momentum(order, p), 0.0, ROUNDING);
            assert_near(gluon_momentum(order, p), 0.0, ROUNDING);
        }
    }
    // What the NNLO parametrisations allow.
    for (p, (quark, gluon)) in [(6e-3, 1e-3), (3e-3, 7e-4), (1e-6, 6e-5)].into_iter().enumerate() {
        assert_near(quark_momentum(2, p), 0.0, quark);
        assert_near(gluon_momentum(2, p), 0.0, gluon);
    }
}

/// S. Moch, J. Vermaseren, A. Vogt, hep-ph/0403192 eq. (4.11): the coefficients of `1/(1-z)_+`.
#[test]
fn cusp_is_as_published() {
    let published: [&[f64]; 3] = [&[4.0 * CF], &[66.47322097, -5.92592593], &[1174.89827, -183.18743, -64.0 / 81.0]];
    // Printed digits of the values, of the quark and of the gluon parametrisation.
    let tolerance = [(1e-14, 1e-13), (1e-8, 2e-8), (5e-4, 5e-4)];
    for order in 0..splitting::ORDERS {
        for (p, &cusp) in published[order].iter().enumerate() {
            for channel in [Channel::NsPlus, Channel::NsMinus] {
                let plus = power(&splitting::kernel(order, channel), p).plus(0.0);
                assert_near(plus[0], cusp, tolerance[order].0);
            }
            let plus = power(&splitting::kernel(order, Channel::GluonGluon), p).plus(0.0);
            assert_near(plus[0], cusp * CA / CF, tolerance[order].1);
        }
    }
}

/// hep-ph/0403192 eq. (4.9), hep-ph/0404111 eq. (4.15); the shifts are those of the parametrisations.
#[test]
fn delta_terms_are_as_published() {
    let quark = [1295.62428, -173.93757, 1.13066637];
    let gluon = [4425.44832, -528.71955, 6.46296296];
    // Three decimals are printed in the quark parametrisation and of gg, four in its nf^2.
    for (channel, exact, shift) in [
        (Channel::NsPlus, quark, [-0.24, 0.011, 0.0]),
        (Channel::NsMinus, quark, [-0.154, 0.005, 0.0]),
        (Channel::GluonGluon, gluon, [0.446, -0.003, 0.0]),
    ] {
        let kernel = splitting::kernel(2, channel);
        for p in 0..3 {
            assert_near(kernel.terms[p].local, exact[p] + shift[p], 6e-4);
        }
    }
}

/// The coefficients of `ln(z)/z` at small z: hep-ph/0404111 eqs. (4.16)-(4.21).
#[test]
fn leading_small_z_logarithms_are_as_published() {
    for (channel, p, published) in [
        (Channel::GluonGluon, 0, 2675.847),
        (Channel::GluonGluon, 1, 157.269),
        (Channel::QuarkGluon, 1, -896.0 / 3.0),
        (Channel::PureSinglet, 1, -CF / CA * 896.0 / 3.0),
        (Channel::GluonQuark, 0, 1189.265),
    ] {
        let kernel = power(&splitting::kernel(2, channel), p);
        // z f(z) is linear in ln z here, up to z ln^4 z < 1e-15 relative.
        let at = |t: f64| {
            let point = Point::at(t);
            point.z * kernel.regular(&point, 0.0)
        };
        let slope = (at(50.0) - at(60.0)) / 10.0;
        // The parametrisations print one decimal (gg nf: two).
        assert_near(slope, published, 0.05);
    }
}

/// E. Floratos et al., Nucl. Phys. B 192 (1981) 417: the two-loop anomalous dimensions.
#[test]
fn two_loop_second_moments_are_as_published() {
    // Eight decimals are given.
    for (channel, p, published) in [
        (Channel::NsPlus, 0, -48.32921811),
        (Channel::NsPlus, 1, 3.16049383),
        (Channel::QuarkGluon, 1, 7.54320988),
        (Channel::PureSinglet, 1, 1.97530864),
    ] {
        assert_near(splitting_moment(1, channel, p, 2.0), published, 6e-9);
    }
}

/// S. Larin, P. Nogueira, T. van Ritbergen, J. Vermaseren, hep-ph/9605317.
#[test]
fn three_loop_second_moment_is_as_published() {
    // The parametrisation misses the exact moment by 3.5e-3 and 3.0e-3 (4e-6 of the whole); nf^2 is exact, and
    // five decimals are given.
    for (p, published, tolerance) in [(0, -859.44784, 3.6e-3), (1, 133.43814, 3.1e-3), (2, 1.22908, 6e-6)] {
        assert_near(splitting_moment(2, Channel::NsPlus, p, 2.0), published, tolerance);
    }
}

/// Nothing overflows or becomes undefined however near an end the quadrature comes.
#[test]
fn every_kernel_is_finite_near_both_ends() {
    for order in 0..splitting::ORDERS {
        for channel in Channel::ALL {
            let kernel = splitting::kernel(order, channel);
            for t in [1e-300, 1e-100, 1e-17, 1e-16, 1e-8, 1.0, 100.0, 300.0] {
                let value = kernel.regular(&Point::at(t), 4.0);
                assert!(value.is_finite(), "{} at t = {t:e}", channel.name());
            }
        }
    }
}

/// hep-ph/0403192 and hep-ph/0404111: what begins at which order.
#[test]
fn only_what_begins_later_is_zero() {
    for order in 0..splitting::ORDERS {
        for channel in Channel::ALL {
            let expected = match channel {
                Channel::NsSea => order < 2,
                Channel::PureSinglet => order < 1,
                _ => false,
            };
            assert_eq!(splitting::kernel(order, channel).is_zero(), expected);
        }
    }
}

#[test]
fn a_kernel_is_a_polynomial_in_nf() {
    for order in 0..splitting::ORDERS {
        let kernel = splitting::kernel(order, Channel::GluonGluon);
        let sum = |value: &dyn Fn(usize) -> f64| {
            (0..kernel.terms.len()).map(|p| value(p) * 5f64.powi(i32::try_from(p).unwrap())).sum::<f64>()
        };
        let point = Point::from_z(0.3);
        let regular = sum(&|p| power(&kernel, p).regular(&point, 0.0));
        let plus = sum(&|p| power(&kernel, p).plus(0.0).first().copied().unwrap_or(0.0));
        let local = sum(&|p| power(&kernel, p).local(0.0));
        // Three products and sums of numbers up to 1e4.
        assert_near(kernel.regular(&point, 5.0), regular, 1e-11);
        assert_near(kernel.plus(5.0)[0], plus, 1e-11);
        assert_near(kernel.local(5.0), local, 1e-11);
    }
}
/// G. Falcioni, F. Herzog, S. Moch, A. Vogt, arXiv:2302.07215 (qq) and 2307.04158 (qg): even moments for four
/// flavours as series `c0 alpha_s (1 + c1 alpha_s + c2 alpha_s^2)`; values recalled from memory.
#[test]
fn singlet_moments_are_as_published() {
    let quark: &[Channel] = &[Channel::NsPlus, Channel::PureSinglet];
    for (channels, n, published) in [
        (quark, 2.0, [-0.28294, 0.6219, 0.1461]),
        (quark, 4.0, [-0.55527, 0.6803, 0.4278]),
        (quark, 6.0, [-0.71645, 0.6489, 0.4265]),
        (&[Channel::QuarkGluon], 2.0, [0.21221, 0.9004, -0.1028]),
    ] {
        let series = [0, 1, 2].map(|order| {
            let part = |&channel: &Channel| moment(&splitting::kernel(order, channel), n, 4.0);
            let power = i32::try_from(order).unwrap() + 1;
            channels.iter().map(part).sum::<f64>() / (4.0 * std::f64::consts::PI).powi(power)
        });
        // Printed digits; of the last also 4e-5, by which the parametrisations miss it.
        assert_near(series[0], published[0], 5e-6);
        assert_near(series[1] / series[0], published[1], 6e-5);
        assert_near(series[2] / series[0], published[2], 1e-4);
    }
}
