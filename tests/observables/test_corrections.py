"""Corrections of rows: the formula, exact derivatives, known factors, and what is refused."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from scalewright._corrected.bound import Bound
from scalewright.corrections import Function, HigherTwist, KnownFactor, Polynomial, Spline, TargetFactor

X = np.array([0.05, 0.3, 0.05, 0.3, 0.3, 0.3])
Q2 = np.array([4.0, 9.0, 4.0, 9.0, 9.0, 9.0])
Y = 0.6
RHO_FREE = 1 + (1 - Y) ** 2  # Y+


@pytest.fixture(scope="module")
def fmap(grid):
    rows = SimpleNamespace(
        x=X, q2=Q2, y=[Y] * 6, beam="e+", exchange="photon",
        measure=["F2", "F2", "F2", "FL", "reduced_cross_section", "F2"],
        target=["proton", "proton", "deuteron", "deuteron", "proton", {"z": 26, "a": 56}],
    )  # fmt: skip
    return sw.forward_map(sw.Theory(order="NLO"), grid, start_q2=1.5, start_nf=3, points=rows)


def law(x, p):
    return p[0] * np.exp(-p[1] * x)


def law_jacobian(x, p):
    return np.stack([np.exp(-p[1] * x), -p[0] * x * np.exp(-p[1] * x)], axis=1)


def test_a_factor_multiplies_and_an_addition_enters_with_its_weight(fmap, start):
    plain = fmap.predict(start)[0]
    line = Polynomial(1, family="plain", a=0.5, b=2.0, start=[0.3, -1.0])
    h = X**0.5 * (1 - X) ** 2 * (0.3 - X)
    proton = np.array([1, 1, 0, 0, 1, 0])
    factor = fmap.predict(start, HigherTwist(line))[0]
    np.testing.assert_allclose(factor, plain * (1 + proton * h / Q2), rtol=1e-13)
    # F2, FL and reduced cross section: F2 - y^2/Y+ FL
    for name, weights in (("F2", [1, 1, 0, 0, 1, 0]), ("FL", [0, 0, 0, 0, -(Y**2) / RHO_FREE, 0])):
        twist = HigherTwist(line, form="addition", structure_function=name)
        added = fmap.predict(start, [twist])[0]
        np.testing.assert_allclose(added, plain + np.array(weights) * h / Q2, rtol=1e-13)


def test_single_questions_have_the_same_corrections(fmap, start):
    evolved = sw.evolve(fmap.theory, start, [9.0])
    twist = HigherTwist(Polynomial(1, start=[0.3, 0.2]), form="addition")
    asked = {"x": 0.3, "q2": 9.0, "y": Y, "beam": "e+", "exchange": "photon"}
    asked |= {"densities": evolved, "theory": fmap.theory, "corrections": twist}
    value = sw.structure_function("reduced_cross_section", **asked)[0]
    assert value == pytest.approx(fmap.predict(start, twist)[0, 4], rel=1e-8)  # steps in scale


def test_each_target_has_its_own_and_factors_multiply(fmap, start):
    plain = fmap.predict(start)[0]
    given = [
        HigherTwist(Polynomial(0, start=[0.5]), targets=["proton", "deuteron"]),
        TargetFactor(Polynomial(0, start=[-0.02])),
        KnownFactor(lambda x, q2: 1 - 0.1 * x, 0.01, targets={"z": 26, "a": 56}),
        HigherTwist(Polynomial(0, start=[0.1]), targets="deuteron", form="addition", structure_function="FL"),
    ]
    expected = plain * (1 + np.array([1, 1, 1, 1, 1, 0]) * 0.5 / Q2) * [1, 1, 0.98, 0.98, 1, 0.97]
    expected += np.array([0, 0, 0, 1, 0, 0]) * 0.1 / Q2
    np.testing.assert_allclose(fmap.predict(start, given)[0], expected, rtol=1e-13)
    # numerical errors are those of the map, times the factors
    errors = [fmap.numerical_error(start, some)[0] for some in ((), given)]
    expected = errors[0] * (1 + np.array([1, 1, 1, 1, 1, 0]) * 0.5 / Q2) * [1, 1, 0.98, 0.98, 1, 0.97]
    np.testing.assert_allclose(errors[1], expected, rtol=1e-13)


def test_derivatives_agree_with_differences(fmap, start):
    rows = fmap.predict_rows(start)[0]
    given = [
        HigherTwist(Polynomial(2, a=0.4, b=3.0, free=["a", "b"], start=[0.3, -0.2, 0.1])),
        HigherTwist(Spline([0.01, 0.1, 0.5], start=[1.0, 2.0, 3.0]), targets="deuteron", form="addition"),
        TargetFactor(Function(law, [0.1, 2.0])),
        TargetFactor(Function(law, [-0.2, 1.0], jacobian=law_jacobian), targets="proton"),
        KnownFactor(0.9, {"model": lambda x, q2: 0.1 * x, "scale": 0.02}),
    ]
    bound = Bound(given, fmap)
    rng = np.random.default_rng(3)
    q = bound.start + rng.uniform(0.0, 0.1, bound.start.size)
    exact, step = bound.jacobian(rows, q), 2e-3
    for place, name in enumerate(bound.names):
        unit = step * np.eye(q.size)[place]
        at = {k: bound.corrected(rows, q + k * unit) for k in (-2, -1, 1, 2)}
        # four points: error h^4, 2e-11 times fifth derivatives
        found = (8 * (at[1] - at[-1]) - (at[2] - at[-2])) / (12 * step)
        np.testing.assert_allclose(exact[:, place], found, rtol=1e-8, atol=1e-9, err_msg=name)


def test_free_exponents_agree_with_a_complex_step():
    x, q = np.array([1e-3, 0.2, 0.9]), np.array([0.3, -0.7, 0.5, 2.5])
    at = Polynomial(1, free=["a", "b"]).on(x, ["", "", ""])

    def written_out(p):
        return x ** p[2] * (1 - x) ** p[3] * (p[0] + p[1] * (1 - 2 * x))

    found = np.stack([written_out(q + 1e-30j * unit).imag / 1e-30 for unit in np.eye(4)], axis=1)
    np.testing.assert_allclose(at.value(q), written_out(q), rtol=1e-14)
    np.testing.assert_allclose(at.jacobian(q), found, rtol=1e-13)


def test_parameters_of_a_curve_may_be_fixed_or_bounded(fmap, start):
    whole = Spline([0.01, 0.1, 0.5], start=[1.0, 2.0, 3.0])
    part = whole.restricted(fixed={"k1": 0.0}, bounds={"k0": (0.0, 5.0)})
    twist = HigherTwist(part, name="h")
    assert twist.names == ("h.k0", "h.k2") and twist.limits[2].tolist() == [5.0, np.inf]
    same = HigherTwist(Spline([0.01, 0.1, 0.5], start=[1.0, 0.0, 3.0]), name="h")
    np.testing.assert_array_equal(fmap.predict(start, twist), fmap.predict(start, same))
    rows = fmap.predict_rows(start)[0]
    full, some = (Bound(one, fmap) for one in (same, twist))
    np.testing.assert_array_equal(full.jacobian(rows, full.start)[:, [0, 2]], some.jacobian(rows, some.start))
    for options, message in [
        ({"fixed": ["k9"]}, "fixed = 'k9': no parameter of this name; there are 'k0', 'k1', 'k2'"),
        ({"fixed": "k0"}, "fixed must be a list of names"),
        ({"fixed": ["k0"], "bounds": {"k0": (0, 1)}}, "bounds = 'k0': the parameter is fixed"),
        ({"bounds": {"k0": (2.0, 3.0)}}, r"start\[k0\] = 1: must lie in \[2, 3\]"),
    ]:
        with pytest.raises(sw.InputError, match=message):
            whole.restricted(**options)


def test_a_table_of_factors_is_read_and_joined_by_straight_lines(fmap, start, tmp_path):
    file = tmp_path / "deuteron.csv"
    file.write_text("x,factor,model\n0.01,1.0,0.0\n0.11,0.9,0.01\n0.5,0.9,0.02\n")
    known = KnownFactor.read(file)
    assert known.names == ("R_deuteron.model",)
    plain, corrected = fmap.predict(start)[0], fmap.predict(start, known)[0]
    np.testing.assert_allclose(corrected, plain * [1, 1, 0.96, 0.9, 1, 1], rtol=1e-13)
    shifted = fmap.predict(start, known.at({"R_deuteron.model": 2.0, "other": 1.0}))[0]
    assert shifted[2] == pytest.approx(plain[2] * (0.96 + 2 * 0.004), rel=1e-13)
    for text, message in [
        ("x,factor\n0.1,1\n0.1,1\n", "line 3, column x: 0.1: x must grow from line to line"),
        ("x,factor,a\n0.1,1,0\n0.2,1,-1\n", "line 3, column a: -1: an uncertainty must not be negative"),
        ("x,factr\n0.1,1\n", 'no column .factor.: .* did you mean "factr"'),
        ("x,factor\n0.1,1\n", "at least two lines"),
        ("x,factor\n0.1,one\n0.2,1\n", "line 2, column factor: 'one' is not a number"),
        ("x,factor\n0.1,1\n0.2,1\n", r"column factor: x = 0.05: the table spans \[0.1, 0.2\]"),
    ]:
        file.write_text(text)
        with pytest.raises(sw.InputError, match=message):
            fmap.predict(start, KnownFactor.read(file))


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: HigherTwist(Polynomial(1), targets="neutron"), "h_neutron: no row .* has target neutron"),
        (lambda: HigherTwist(Polynomial(1), targets="protn"), 'did you mean "proton"'),
        (lambda: HigherTwist(Polynomial(1), current="charged"), "target proton and a charged current"),
        (lambda: HigherTwist(lambda x: x), "curve must be a Polynomial, a Spline or a Function"),
        (lambda: HigherTwist(Polynomial(1), form="factr"), 'form must be one of "factor", "addition"'),
        (lambda: HigherTwist(Polynomial(1), structure_function="F1"), "structure_function must be one of"),
        (lambda: HigherTwist(Spline([0.1, 0.2, 0.4])), r"point 0: x = 0.05: .* spline span \[0.1, 0.4\]"),
        (lambda: Spline([0.1, 0.4]), "at least 3"),
        (lambda: Polynomial(9), "degree must be from 0 to 8"),
        (lambda: Polynomial(1, free=["c"]), 'free must be one of "a", "b"'),
        (lambda: [HigherTwist(Polynomial(0))] * 2, "h_proton.c0.: two have a parameter of this name"),
        (lambda: HigherTwist(Function(lambda x, p: 1 / 0, [1.0])), "function raised ZeroDivisionError"),
        (lambda: HigherTwist(Function(lambda x, p: x[:1], [1.0])), "returned values of shape"),
        (lambda: KnownFactor("0.9"), "factor must be real numbers"),
        (lambda: KnownFactor(0.9, {"a": np.nan}), r"uncertainty\[a\] must lie in"),
        (lambda: 3, "must be HigherTwist, TargetFactor or KnownFactor"),
        (lambda: HigherTwist(Polynomial(0)).at({"h_protn.c0": 1.0}), "none of the parameters 'h_proton.c0'"),
    ],
)
def test_bad_corrections_are_refused(fmap, start, make, message):
    with pytest.raises(sw.InputError, match=message):
        fmap.predict(start, make())
