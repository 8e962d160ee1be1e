"""Covariance and correlation files: units, repair, refusal."""

import numpy as np
import pytest
from scalewright import InputError, Measurements
from scalewright._measured.correlated import Correlated, repaired

# Correlations that cannot be: 1 goes with 2 and with 3, but 2 goes against 3. Its eigenvalues are 1.9, 1.9
# and 1 - 2 * 0.9 = -0.8, the last on (1, -1, -1).
BROKEN = np.array([[1.0, 0.9, 0.9], [0.9, 1.0, -0.9], [0.9, -0.9, 1.0]])


def test_a_covariance_file_is_added(run):
    run.with_suffix(".m.csv").write_text("1e-4,2e-5,0\n2e-5,4e-4,0\n0,0,9e-4\n")
    bare = Measurements.read(run).covariance()
    with run.open("a") as file:
        file.write(
            '\n[[covariance]]\nfile = "run1.m.csv"\nkind = "covariance"\n'
            'given_in = "value"\nscales_with = "nothing"\n'
        )
    added = np.array([[1e-4, 2e-5, 0], [2e-5, 4e-4, 0], [0, 0, 9e-4]])
    np.testing.assert_allclose(Measurements.read(run).covariance(), bare + added, rtol=1e-13, atol=1e-18)


@pytest.mark.parametrize("given_in", ["value", "percent"])
@pytest.mark.parametrize("scales_with", ["nothing", "value"])
def test_units_and_scaling_of_a_covariance(make, given_in, scales_with):
    absolute = np.array([[0.04, 0.01, 0.0], [0.01, 0.09, 0.02], [0.0, 0.02, 0.25]])
    value = np.array([1.0, 2.0, 4.0])
    given = absolute if given_in == "value" else absolute / np.outer(value, value) * 1e4
    part = {"kind": "covariance", "given_in": given_in, "scales_with": scales_with}
    table = make(None, [given], uncertainty=[], covariance=[part])
    np.testing.assert_allclose(table.covariance(), absolute, rtol=1e-13, atol=1e-18)
    scale = np.array([2.0, 1.5, 0.5]) if scales_with == "value" else np.ones(3)
    moved = table.covariance(value * [2.0, 1.5, 0.5])
    np.testing.assert_allclose(moved, absolute * np.outer(scale, scale), rtol=1e-13, atol=1e-18)


def test_a_correlation_takes_the_place_of_its_uncertainty(make):
    matrix = np.array([[1.0, 0.5, 0.25], [0.5, 1.0, 0.5], [0.25, 0.5, 1.0]])
    table = make(None, [matrix], covariance=[{"kind": "correlation", "of": "stat"}])
    size = np.array([0.1, 0.2, 0.3])
    np.testing.assert_allclose(table.covariance(), np.outer(size, size) * matrix, rtol=1e-14)


def test_a_broken_matrix_is_refused_by_naming_its_rows(make):
    message = (
        r"matrix 1: not positive semi-definite: the smallest eigenvalue of the correlations is -0\.8, "
        r"mostly of rows 1, 2, 3; repair = \"clip\" or \"nearest\""
    )
    with pytest.raises(InputError, match=message):
        make(None, [BROKEN], covariance=[{"kind": "correlation", "of": "stat"}])


def test_clipping_sets_negative_eigenvalues_to_zero():
    # By mpmath: eigenvalues of BROKEN, negative ones dropped, the diagonal brought back to 1.
    import mpmath

    with mpmath.workdps(30):
        values, vectors = mpmath.eigsy(mpmath.matrix(BROKEN.tolist()))
        kept = mpmath.diag([max(v, 0) for v in values])
        plain = vectors * kept * vectors.T
        expected = [
            [float(plain[i, j] / mpmath.sqrt(plain[i, i] * plain[j, j])) for j in range(3)] for i in range(3)
        ]
    better, moved = repaired(BROKEN, "clip", "m")
    np.testing.assert_allclose(better, expected, atol=1e-14)
    assert np.linalg.eigvalsh(better)[0] > -1e-15
    assert moved == pytest.approx(
        np.abs(np.linalg.eigvalsh(better) - np.linalg.eigvalsh(BROKEN)).max(), rel=1e-12
    )


def test_the_nearest_correlation_matrix_is_that_of_a_published_example():
    # N. Higham, IMA J. Numer. Anal. 22 (2002) 329, section 4: the nearest correlation matrix to
    # [[1, 1, 0], [1, 1, 1], [0, 1, 1]] has 0.7607 and 0.1573 (recalled from memory, four digits).
    better, moved = repaired(np.array([[1.0, 1, 0], [1, 1, 1], [0, 1, 1]]), "nearest", "m")
    np.testing.assert_allclose(
        better, [[1, 0.7607, 0.1573], [0.7607, 1, 0.7607], [0.1573, 0.7607, 1]], atol=5e-5
    )
    assert moved > 0.1


@pytest.mark.parametrize("seed", range(5))
def test_nearest_is_no_farther_than_clipping_or_than_a_minimiser(seed):
    from scipy.optimize import minimize

    rng = np.random.default_rng(seed)
    broken = np.eye(4)
    upper = np.triu_indices(4, 1)
    broken[upper] = rng.uniform(-1, 1, 6)
    broken.T[upper] = broken[upper]
    nearest, _ = repaired(broken, "nearest", "m")
    clipped, _ = repaired(broken, "clip", "m")

    def distance(rest):  # correlation matrices as products of unit vectors
        vectors = rest.reshape(4, 4) / np.linalg.norm(rest.reshape(4, 4), axis=1, keepdims=True)
        return ((vectors @ vectors.T - broken) ** 2).sum()

    best = min(minimize(distance, rng.normal(size=16)).fun for _ in range(5))
    reached = ((nearest - broken) ** 2).sum()
    assert reached <= ((clipped - broken) ** 2).sum() * (1 + 1e-12)
    assert reached <= best * (1 + 1e-6) + 1e-9  # the minimiser stops at gradients of 1e-5


def test_a_repair_is_reported(make):
    part = {"kind": "correlation", "of": "stat", "repair": "clip"}
    assert "repaired: an eigenvalue moved by" in make(None, [BROKEN], covariance=[part]).describe()


@pytest.mark.parametrize("repair", ["clip", "nearest"])
def test_a_rounded_covariance_beyond_correlation_one_is_repaired_on_request(make, repair):
    # variances 0.00994 and 0.01004, correlation 0.9999: printed with two digits the correlation is 1.005
    matrix = np.array([[0.0099, 0.01], [0.01, 0.01]])
    kind = {"kind": "covariance", "given_in": "value", "scales_with": "nothing", "repair": repair}
    points = {"x": [0.1, 0.2], "q2": [1.0, 1.0], "value": [1.0, 2.0], "stat": [0.1, 0.1]}
    table = make(points, [matrix], covariance=[kind])
    # the nearest matrix of unit diagonal and no negative eigenvalue has correlation 1
    size = np.sqrt([0.0099, 0.01])
    np.testing.assert_allclose(table.covariance(), np.outer(size, size) + 0.01 * np.eye(2), rtol=1e-9)
    assert "repaired: an eigenvalue moved by 0.00504" in table.describe()


def test_rounding_below_zero_is_no_reason_to_refuse(make):
    ones = np.ones((3, 3))  # eigenvalues 3, 0, 0 in exact arithmetic, and about -1e-16 here
    table = make(None, [ones], covariance=[{"kind": "correlation", "of": "stat"}])
    size = np.array([0.1, 0.2, 0.3])
    np.testing.assert_allclose(table.covariance(), np.outer(size, size), rtol=1e-14)


def test_a_datum_without_variance_has_no_part_in_it(make):
    matrix = np.array([[0.04, 0.0, 0.01], [0.0, 0.0, 0.0], [0.01, 0.0, 0.09]])
    table = make(
        None, [matrix], covariance=[{"kind": "covariance", "given_in": "value", "scales_with": "nothing"}]
    )
    expected = matrix + np.diag([0.1, 0.2, 0.3]) ** 2
    np.testing.assert_allclose(table.covariance(), expected, rtol=1e-14)


def test_independent_part_and_sources_rebuild_the_matrix():
    rng = np.random.default_rng(5)
    root = rng.normal(size=(6, 6))
    full = root @ root.T
    size = np.sqrt(np.diagonal(full))
    part = Correlated("m", size, full / np.outer(size, size), True)
    own, shifts = part.nuisance(np.full(6, 2.0))
    assert (own > 0.0).all()
    np.testing.assert_allclose(np.diag(own) + shifts @ shifts.T, 4.0 * full, rtol=1e-12)  # eigensystem of 6


def test_what_is_drawn_does_not_depend_on_the_choice_of_eigenvectors(monkeypatch):
    # equal correlations have one eigenvalue n - 1 times: any basis of that space is as good, and another
    # number of threads gives another one; replicas of one seed were other replicas then
    matrix = np.full((5, 5), 0.3) + 0.7 * np.eye(5)
    plain = Correlated("m", np.ones(5), matrix, False).draw(np.random.default_rng(1), (4, 5))
    eigh = np.linalg.eigh

    def turned(one):
        values, vectors = eigh(one)
        mix = np.linalg.qr(np.random.default_rng(2).normal(size=(4, 4)))[0]
        return values, np.concatenate([vectors[:, :4] @ mix, -vectors[:, 4:]], axis=1)

    monkeypatch.setattr(np.linalg, "eigh", turned)
    again = Correlated("m", np.ones(5), matrix, False).draw(np.random.default_rng(1), (4, 5))
    np.testing.assert_allclose(again, plain, rtol=0, atol=1e-14)  # sums of five numbers of order one
