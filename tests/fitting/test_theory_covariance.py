"""Scale variations: the equations of arXiv:1906.10698 written out, term by term."""

import numpy as np
import pytest
from scalewright import ChiSquare, InputError, Measurements
from scalewright.fitting.theory_covariance import scale_covariance

ALL = [(a, b) for a in (1, 4, 0.25) for b in (1, 4, 0.25)]
SIGN = {1: 0, 4: 1, 0.25: -1}


@pytest.fixture
def moved():
    rng = np.random.default_rng(1)
    return {point: rng.normal(1.0, 0.1, 6) for point in ALL}


def deltas(moved):
    return {(SIGN[a], SIGN[b]): values - moved[1, 1] for (a, b), values in moved.items()}


def outer(a, b=None):
    return np.outer(a, a if b is None else b)


# arXiv:1906.10698, section 4.2: one process (same), and two different ones (other); recalled from memory.
def same(name, d):
    p, m, z = 1, -1, 0
    return {
        "3": lambda: (outer(d[p, p]) + outer(d[m, m])) / 2,
        "5": lambda: (outer(d[p, z]) + outer(d[m, z]) + outer(d[z, p]) + outer(d[z, m])) / 2,
        "5bar": lambda: (outer(d[p, p]) + outer(d[m, m]) + outer(d[p, m]) + outer(d[m, p])) / 2,
        "7": lambda: (outer(d[p, z]) + outer(d[m, z]) + outer(d[z, p]) + outer(d[z, m]) + outer(d[p, p])
                      + outer(d[m, m])) / 3,
        "9": lambda: sum(outer(d[a, b]) for a in (p, m, z) for b in (p, m, z)) / 4,
    }[name]()  # fmt: skip


def other(name, d):
    p, m, z = 1, -1, 0
    return {
        "3": lambda: outer(d[p, p] + d[m, m]) / 4,
        "5": lambda: (2 * outer(d[p, z]) + 2 * outer(d[m, z]) + outer(d[z, p] + d[z, m])) / 4,
        "5bar": lambda: (outer(d[p, p] + d[p, m]) + outer(d[m, p] + d[m, m])) / 4,
        "7": lambda: (2 * outer(d[p, z]) + 2 * outer(d[m, z]) + outer(d[z, p] + d[z, m])
                      + outer(d[p, p] + d[m, m])) / 6,
        "9": lambda: (2 * outer(d[p, z] + d[p, p] + d[p, m]) + 2 * outer(d[m, z] + d[m, p] + d[m, m])
                      + 3 * outer(d[z, p] + d[z, m])) / 24,
    }[name]()  # fmt: skip


@pytest.mark.parametrize("name", ["3", "5", "5bar", "7", "9"])
def test_every_prescription_by_its_equations(moved, name):
    processes = ["NC", "NC", "CC", "CC", "CC", "NC"]
    alike = np.equal.outer(processes, processes)
    expected = np.where(alike, same(name, deltas(moved)), other(name, deltas(moved)))
    result = scale_covariance(moved, name, processes)
    np.testing.assert_allclose(result.matrix, expected, rtol=1e-12, atol=1e-16)
    np.testing.assert_allclose(
        scale_covariance(moved, name).matrix, same(name, deltas(moved)), rtol=1e-12, atol=1e-16
    )
    assert np.linalg.eigvalsh(result.matrix)[0] > -1e-15  # entries of 0.02
    assert result.processes == ("NC", "CC")


def test_it_says_what_is_common_to_what(moved):
    text = scale_covariance(moved, "7", [0, 0, 0, 1, 1, 1], own="hard_mur2_ratio").describe()
    assert text == (
        "scale variations, 7 points: hard_muf2_ratio varies for all data at once, "
        "hard_mur2_ratio for each of 0, 1 by itself"
    )


def test_it_is_a_covariance_for_chi_square(moved):
    measured = Measurements.from_columns(
        {"title": "A", "measures": "F2", "exchange": "photon",
         "uncertainty": [{"name": "a", "size": 0.1, "given_in": "value", "scales_with": "nothing"}]},
        {"x": np.linspace(0.1, 0.6, 6), "q2": np.full(6, 10.0), "value": np.ones(6)},
    )  # fmt: skip
    theory = scale_covariance(moved, "9", measured.table_of)
    residual = measured.value - moved[1, 1]
    expected = residual @ np.linalg.solve(0.01 * np.eye(6) + theory.matrix, residual)
    for form in ("covariance", "nuisance"):
        assert ChiSquare(measured, form, theory=theory).value(moved[1, 1]) == pytest.approx(
            expected, rel=1e-12
        )


@pytest.mark.parametrize(
    ("change", "arguments", "message"),
    [
        ({(4, 4): None}, {}, r"predictions: missing \(up, up\)"),
        ({(1, 1): None, (4, 1): None}, {}, r"predictions: missing \(central, central\), \(up, central\)"),
        (
            {(9, 1): np.ones(6)},
            {},
            r"predictions = \(9, 1\): each ratio must have one value above 1 and one below",
        ),
        ({(4, 4): np.ones(5)}, {}, r"predictions: 5 data at \(up, up\), 6 at \(central, central\)"),
        ({(4, 4): "abc"}, {}, r"predictions\[\(4, 4\)\] = 'abc': .* must be real numbers, not text"),
        ({(-4, 4): np.ones(6)}, {}, r"ratio = -4: ratio must lie in \(0, inf\)"),
        ({7: np.ones(6)}, {}, r"predictions = 7: a key must be \(common ratio, own ratio\)"),
        ({}, {"prescription": "8"}, 'prescription must be one of "3", "5", "5bar", "7", "9"'),
        ({}, {"processes": ["a"]}, "processes: 1 of them: there must be 6, one a datum"),
    ],
)
def test_wrong_variations_are_refused(moved, change, arguments, message):
    given = {key: value for key, value in (moved | change).items() if value is not None}
    with pytest.raises(InputError, match=message):
        scale_covariance(given, **arguments)


def test_predictions_must_be_a_mapping():
    with pytest.raises(InputError, match="predictions must map pairs of ratios to predictions"):
        scale_covariance([1, 2])
