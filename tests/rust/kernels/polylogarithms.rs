//! Polylogarithms and points against exact values and identities.

use crate::moments::{assert_near, integrate};
use scalewright_core::numerics::endpoint::Point;
use scalewright_core::numerics::polylog::{ZETA2, ZETA3, li2, li3, s12};

/// L. Lewin, "Polylogarithms and Associated Functions": values in closed form.
#[test]
fn polylogarithms_have_their_known_values() {
    let l = std::f64::consts::LN_2;
    // Two or three rounding errors of numbers of order one.
    let few = 5e-16;
    assert_near(li2(1.0), ZETA2, few);
    assert_near(li2(-1.0), -0.5 * ZETA2, few);
    assert_near(li2(0.5), 0.5 * (ZETA2 - l * l), few);
    assert_near(li3(1.0), ZETA3, few);
    assert_near(li3(-1.0), -0.75 * ZETA3, few);
    assert_near(li3(0.5), 0.875 * ZETA3 - 0.5 * ZETA2 * l + l * l * l / 6.0, few);
    assert_near(s12(1.0), ZETA3, few);
    assert_near(s12(-1.0), 0.125 * ZETA3, few);
    assert_near(s12(0.5), 0.125 * ZETA3 - l * l * l / 6.0, few);
}

/// Duplication, reflection and inversion formulas (L. Lewin; Landen's identity of Li3 with S12).
#[test]
fn polylogarithms_obey_their_identities() {
    for i in 1..200 {
        let z = f64::from(i) / 200.0;
        let point = Point::from_z(z);
        let (l, l1) = (point.ln_z, point.ln_1mz);
        // Sums of up to six terms of order one to ten.
        let few = 4e-15;
        assert_near(point.li2_z + point.li2_mz, 0.5 * li2(z * z), few);
        assert_near(point.li3_z + point.li3_mz, 0.25 * li3(z * z), few);
        assert_near(point.li2_z + point.li2_1mz, ZETA2 - l * l1, few);
        let landen = -point.s12_z - point.li3_1mz + l1 * point.li2_1mz + 0.5 * l * l1 * l1 + ZETA3;
        assert_near(landen, 0.0, few);
        if z <= 0.5 {
            let crossed = point.s12_z - point.li3_z + l1 * point.li2_z + l1 * l1 * l1 / 6.0;
            assert_near(li3(-z / (1.0 - z)), crossed, few);
        }
    }
}

/// The defining integrals, by quadrature.
#[test]
fn polylogarithms_are_their_integrals() {
    for x in [-1.0, -0.7, -0.1, 0.3, 0.49, 0.51, 0.9, 0.999] {
        // y = x e^-t, dy/y = -dt
        let ln_1my = |t: f64| (-x * (-t).exp()).ln_1p();
        assert_near(li2(x), integrate(|t| -ln_1my(t)), 1e-14);
        assert_near(s12(x), integrate(|t| 0.5 * ln_1my(t).powi(2)), 1e-14);
        assert_near(li3(x), integrate(|t| -t * ln_1my(t)), 1e-14);
    }
}

#[test]
fn points_lose_nothing_at_either_end() {
    let near_one = Point::at(1e-20);
    assert_near(near_one.one_minus_z * 1e20, 1.0, 1e-15);
    assert_near(near_one.ln_1mz, 1e-20f64.ln(), 1e-14);
    // Li2(1-z) = t - t^2/4 ..., S12(1-z) = t^2/4 ... by their series.
    assert_near(near_one.li2_1mz * 1e20, 1.0, 1e-15);
    assert_near(near_one.s12_1mz * 1e40, 0.25, 1e-15);
    let near_zero = Point::at(60.0);
    let z = (-60f64).exp();
    assert_near(near_zero.ln_1mz / z, -1.0, 1e-15);
    assert_near(near_zero.li3_z / z, 1.0, 1e-15);
    assert_near(near_zero.li3_mz / z, -1.0, 1e-15);
}
