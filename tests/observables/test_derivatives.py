"""Derivatives of a map against differences of whole maps, rebuilt at tight tolerance."""

from types import SimpleNamespace

import differences
import numpy as np
import pytest
import scalewright as sw

#: Coarse: maps are compared with maps, whatever they are worth.
GRID = sw.ChebyshevGrid.from_panels([0.0, 0.7, 2.5, 9.3], [9, 9, 9])
X, Q2 = np.array([0.001, 0.05, 0.3]), np.array([8.0, 200.0, 2e4])
ROWS = [
    {"measure": "reduced_cross_section", "exchange": "photon+Z", "beam": "e+"},
    {"measure": "FL", "exchange": "photon"},
    {"measure": "F2", "exchange": "photon", "tagged": "charm"},
    {"measure": "F2", "current": "charged", "beam": "nu", "target": "isoscalar"},
    {"measure": "xF3", "current": "charged", "beam": "nubar", "tagged": "charm"},
]
DEFAULT = {"current": "neutral", "exchange": None, "beam": None, "tagged": None, "target": "proton"}
#: Theories in which every part of a row takes part, and whose scales lie away from thresholds.
CASES = {
    "massless": ({"order": "NNLO", "hard_mur2_ratio": 2.0, "hard_muf2_ratio": 0.7}, {"target_mass": True}),
    "matched": ({"order": "NNLO", "heavy_quarks": "matched"}, {}),
    "matched, chi": (
        {"order": "NLO", "heavy_quarks": "matched", "hard_mur2_ratio": 0.7, "hard_muf2_ratio": 2.0},
        {"subtraction": "chi"},
    ),
    "massive": ({"order": "NLO", "heavy_quarks": "massive", "flavours": 3, "fl_counting": "own"}, {}),
}


def points():
    columns = {name: [(DEFAULT | row).get(name) for row in ROWS for _ in X] for name in ("measure", *DEFAULT)}
    return SimpleNamespace(x=np.tile(X, len(ROWS)), q2=np.tile(Q2, len(ROWS)), s=1e5, **columns)


def built(theory, options, tolerance=None):
    return sw.forward_map(
        theory, GRID, start_q2=1.5, start_nf=3, points=points(), tolerance=tolerance, **options
    )


@pytest.mark.parametrize("case", CASES)
def test_derivatives_are_those_of_rebuilt_maps(case):
    given, options = CASES[case]
    masses = sw.QuarkMasses(1.4, 4.5, 170.0, "pole")
    theory = sw.Theory(masses=masses, thresholds_q2=(2.5, 25.0, 3e4), **given)
    fmap = built(theory, options)
    for parameter in ("alpha_s", "charm", "bottom", "hard_mur2_ratio", "hard_muf2_ratio"):

        def build(value, parameter=parameter):
            moved = differences.moved(theory, parameter, value)
            return built(moved, options, differences.TOLERANCE).matrix

        expected, error = differences.differentiated(build, differences.value(theory, parameter))
        size = np.abs(expected).max(axis=(1, 2))
        off = np.abs(fmap.derivative(parameter) - expected).max(axis=(1, 2))
        # single entries: the steps of the map's own tolerance, 1e-8 for smooth densities
        assert (off <= 1e-6 * size).all(), (parameter, off, size)
        # the differences show their own error; what is asked of them is a tenth of that
        assert (error.max(axis=(1, 2)) <= 1e-6 * size).all()
        # a smooth density: what differences have lost by rounding, 1e-12 of the map over a step of 2.5e-3
        shape = np.outer(np.arange(1, 8), np.sqrt(GRID.x) * (1 - GRID.x) ** 3)
        found, exact, value = (
            np.einsum("rfn,fn->r", one, shape) for one in (fmap.derivative(parameter), expected, fmap.matrix)
        )
        per_unit = np.abs(value) / differences.value(theory, parameter)
        assert (np.abs(found - exact) <= 1e-8 * (np.abs(exact) + per_unit)).all(), parameter


def test_what_does_not_enter_has_no_derivative():
    theory = sw.Theory(order="LO", flavours=3)
    rows = SimpleNamespace(x=X, q2=Q2, measure="F2", exchange="photon")
    fmap = sw.forward_map(theory, GRID, start_q2=1.5, points=rows)
    # LO F2 does not know mu_r, and no mass where the coupling steps continuously
    for parameter in ("hard_mur2_ratio", "charm", "bottom", "top"):
        assert not fmap.derivative(parameter).any()
    assert fmap.derivative("alpha_s").any() and fmap.derivative("hard_muf2_ratio").any()
    with pytest.raises(sw.InputError, match="parameter = 'strange'"):
        fmap.derivative("strange")


def test_a_stored_map_has_the_same_derivative(tmp_path):
    rows = SimpleNamespace(x=X, q2=Q2, measure="F2", exchange="photon")
    fmap = sw.forward_map(sw.Theory(order="NLO"), GRID, start_q2=1.5, start_nf=3, points=rows)
    fmap.save(tmp_path / "map.h5")
    again = sw.ForwardMap.load(tmp_path / "map.h5")
    np.testing.assert_array_equal(again.derivative("alpha_s"), fmap.derivative("alpha_s"))
