//! Matching across a heavy-quark threshold against sum rules and the renormalisation group.

use crate::moments::{ROUNDING, assert_near, moment, power};
use scalewright_core::colour::CA;
use scalewright_core::kernels::matching::{self, Element, HeavyGluonForm, MassKind};
use scalewright_core::kernels::splitting::{self, Channel};
use scalewright_core::numerics::endpoint::Point;

/// Moments that tell kernels apart.
const MOMENTS: [f64; 5] = [2.0, 2.7, 4.0, 7.5, 20.0];

/// Moment of the part `a^order L^power` for the pole mass and the exact form.
fn matching_moment(order: usize, element: Element, power: usize, n: f64) -> f64 {
    let parts = matching::kernel(order, element, MassKind::Pole, HeavyGluonForm::Exact);
    moment(&parts[power], n, 0.0)
}

fn splitting_moment(order: usize, channel: Channel, p: usize, n: f64) -> f64 {
    moment(&power(&splitting::kernel(order, channel), p), n, 0.0)
}

#[test]
fn light_quark_number_is_conserved() {
    for power in 0..3 {
        assert_near(matching_moment(2, Element::LightQuark, power, 1.0), 0.0, ROUNDING);
    }
    for power in 0..2 {
        assert_near(matching_moment(1, Element::HeavyHeavy, power, 1.0), 0.0, ROUNDING);
    }
}

#[test]
fn momentum_of_every_source_is_conserved() {
    let from_quark = [Element::LightQuark, Element::GluonQuark, Element::HeavyQuark];
    let from_gluon = [Element::GluonGluon, Element::HeavyGluon];
    let from_heavy = [Element::HeavyHeavy, Element::GluonHeavy];
    for order in 1..=2 {
        for mass in [MassKind::Pole, MassKind::Msbar] {
            for power in 0..3 {
                for targets in [&from_quark[..], &from_gluon, &from_heavy] {
                    let part = |&element: &Element| {
                        let parts = matching::kernel(order, element, mass, HeavyGluonForm::Exact);
                        moment(&parts[power], 2.0, 0.0)
                    };
                    assert_near(targets.iter().map(part).sum(), 0.0, ROUNDING);
                }
            }
        }
    }
}

/// A. Vogt, hep-ph/0408244: the compact form stands for the exact one.
#[test]
fn compact_form_follows_the_exact_one() {
    let [exact, compact] = [HeavyGluonForm::Exact, HeavyGluonForm::Compact]
        .map(|form| matching::kernel(2, Element::HeavyGluon, MassKind::Pole, form));
    for i in 1..1000 {
        let point = Point::from_z(f64::from(i) / 1000.0);
        let [a, b] = [&exact, &compact].map(|parts| parts[0].regular(&point, 0.0));
        // Measured: 0.31 per cent, and 1e-3 where the function crosses zero.
        assert_near(b, a, 4e-3 * a.abs() + 2e-3);
    }
    // The momentum sum, tuned with the local term to its three decimals.
    assert_near(moment(&compact[0], 2.0, 0.0), moment(&exact[0], 2.0, 0.0), 5e-4);
    for power in 1..3 {
        let [a, b] = [&exact, &compact].map(|parts| moment(&parts[power], 3.0, 0.0));
        assert_near(a, b, 0.0);
    }
    // The 1/z term, of which the compact form prints two decimals.
    let far = Point::at(80.0);
    assert_near(far.z * exact[0].regular(&far, 0.0), -24.89, 5e-3);
}

/// A pole mass `m (1 + 16/3 a)` (K. Chetyrkin et al., hep-ph/9706430) makes `L` into `L - 32/3 a`.
#[test]
fn msbar_mass_shifts_the_logarithm_of_order_a() {
    for element in Element::ALL {
        for n in MOMENTS {
            let constant = |mass| {
                let parts = matching::kernel(2, element, mass, HeavyGluonForm::Exact);
                moment(&parts[0], n, 0.0)
            };
            let light_source = !matches!(element, Element::HeavyHeavy | Element::GluonHeavy);
            let shift = if light_source { -32.0 / 3.0 * matching_moment(1, element, 1, n) } else { 0.0 };
            assert_near(constant(MassKind::Msbar) - constant(MassKind::Pole), shift, ROUNDING);
        }
    }
}

/// Order a: `dA/d ln mu^2` is the difference of the LO splitting functions above and below.
#[test]
fn logarithms_at_order_a_follow_from_lo() {
    for n in MOMENTS {
        for (element, channel, p) in [
            (Element::HeavyGluon, Channel::QuarkGluon, 1),
            (Element::GluonGluon, Channel::GluonGluon, 1),
            (Element::HeavyHeavy, Channel::NsPlus, 0),
            (Element::GluonHeavy, Channel::GluonQuark, 0),
        ] {
            let expected = splitting_moment(0, channel, p, n);
            assert_near(matching_moment(1, element, 1, n), expected, ROUNDING);
        }
    }
}

/// Order a^2: `dA/d ln mu^2 = P^(nl+1) A - A P^(nl)`, with `a^(nl+1) = a^(nl) (1 + 2/3 a L)` and
/// `da/d ln mu^2 = -b0 a^2`; the parts linear in L at order a^2 read
///
/// `A2' = b0^(nl+1) A1 + P1^(nl+1) - P1^(nl) + P0^(nl+1) A1 - A1 P0^(nl) + 2/3 L P0^(nl)`.
#[test]
fn logarithms_at_order_a2_follow_from_nlo() {
    for nl in [3.0, 4.0] {
        let b0 = 11.0 / 3.0 * CA - 2.0 / 3.0 * (nl + 1.0);
        for n in MOMENTS {
            let lo = |channel, nf| moment(&splitting::kernel(0, channel), n, nf);
            let step = |channel| splitting_moment(1, channel, 1, n);
            let heavy_gluon = matching_moment(1, Element::HeavyGluon, 1, n);
            let gluon = matching_moment(1, Element::GluonGluon, 1, n);
            let [qq, gq] = [Channel::NsPlus, Channel::GluonQuark].map(|c| lo(c, nl));
            let [below, above] = [nl, nl + 1.0].map(|nf| lo(Channel::GluonGluon, nf));
            for (element, linear, square) in [
                (Element::LightQuark, step(Channel::NsPlus), 2.0 / 3.0 * qq),
                (Element::HeavyQuark, step(Channel::PureSinglet), -heavy_gluon * gq),
                (Element::GluonQuark, step(Channel::GluonQuark), (2.0 / 3.0 - gluon) * gq),
                (
                    Element::GluonGluon,
                    step(Channel::GluonGluon),
                    (b0 + above - below) * gluon + gq * heavy_gluon + 2.0 / 3.0 * below,
                ),
                (Element::HeavyGluon, step(Channel::QuarkGluon), (b0 + qq + gluon - below) * heavy_gluon),
            ] {
                assert_near(matching_moment(2, element, 1, n), linear, ROUNDING);
                assert_near(matching_moment(2, element, 2, n), 0.5 * square, ROUNDING);
            }
        }
    }
}
