"""Ensembles: statistics against numpy, scipy and repetition; reweighting against exact results; files."""

import pickle

import numpy as np
import pytest
import scalewright as sw
from scalewright import InputError, StoreError
from scalewright.fitting import _statistics
from scalewright.fitting.ensemble import Ensemble
from scipy import stats

GRID = sw.ChebyshevGrid.from_panels([0.0, 1.0, 4.0], [4, 4])


def ensemble_of(columns, **options):
    """Return an ensemble whose parameters are the columns and whose gluon grows with the first."""
    columns = np.atleast_2d(np.asarray(columns, float).T).T
    values = columns[:, :1, None] * (GRID.x**0.2 * (1 - GRID.x) ** 3)
    densities = sw.Densities(GRID, q2=2.0, nf=3, flavours=[21], values=values)
    names = [f"p{i}" for i in range(columns.shape[1])]
    return Ensemble(densities, parameters=columns, names=names, **options)


def drawn(seed, count=500):
    rng = np.random.default_rng(seed)
    return rng.multivariate_normal([1.0, -2.0], [[0.04, 0.03], [0.03, 0.25]], size=count)


def test_plain_statistics_are_those_of_numpy():
    columns = drawn(1)
    ensemble = ensemble_of(columns)
    for i, name in enumerate(ensemble.names):
        values = columns[:, i]
        assert ensemble.mean(name).value == pytest.approx(values.mean(), rel=1e-12)
        assert ensemble.mean(name).error == pytest.approx(stats.sem(values), rel=1e-12)
        assert ensemble.std(name).value == pytest.approx(values.std(ddof=1), rel=1e-12)
        low, high = ensemble.interval(name, 0.9)
        assert low.value == pytest.approx(np.quantile(values, 0.05, method="hazen"), rel=1e-12)
        assert high.value == pytest.approx(np.quantile(values, 0.95, method="hazen"), rel=1e-12)
    found = ensemble.correlation("p0", "p1").value
    assert found == pytest.approx(np.corrcoef(columns.T)[0, 1], rel=1e-12)


def test_weights_count_like_repetition():
    columns, times = drawn(2, 40), np.random.default_rng(3).integers(1, 5, size=40)
    weighted = ensemble_of(columns, weights=times)
    repeated = np.repeat(columns, times, axis=0)
    assert weighted.mean("p0").value == pytest.approx(repeated[:, 0].mean(), rel=1e-12)
    assert weighted.correlation("p0", "p1").value == pytest.approx(np.corrcoef(repeated.T)[0, 1], rel=1e-12)
    # the deviation has its own count of freedom: that of reliability weights, 1 - sum of squares
    plain = repeated[:, 0].std()
    assert weighted.std("p0").value == pytest.approx(
        plain / np.sqrt(1 - (times**2).sum() / times.sum() ** 2), rel=1e-12
    )


@pytest.mark.parametrize("law", ["normal", "exponential", "uniform"])
def test_sampling_errors_are_the_spread_over_many_ensembles(law):
    rng = np.random.default_rng(5)
    trials, count = 400, 200
    found = {"mean": [], "std": [], "low": [], "high": [], "correlation": []}
    for _ in range(trials):
        one = getattr(rng, law)(size=count)
        ensemble = ensemble_of(np.stack([one, one + getattr(rng, law)(size=count)], axis=1))
        found["mean"].append(ensemble.mean("p0"))
        found["std"].append(ensemble.std("p0"))
        low, high = ensemble.interval("p0")
        found["low"].append(low)
        found["high"].append(high)
        found["correlation"].append(ensemble.correlation("p0", "p1"))
    for name, estimates in found.items():
        values, errors = np.array(estimates).T
        # the spread of 400 is known to 3.5 per cent; errors are of first order in 1/sqrt(200): 4 sigma
        assert errors.mean() == pytest.approx(values.std(ddof=1), rel=0.15), name


@pytest.mark.parametrize(("level", "few", "enough"), [(0.95, 38, 40), (0.6827, 5, 6)])
def test_the_error_of_an_interval_is_unknown_where_replicas_are_too_few(level, few, enough):
    # 20 normal replicas gave 0.41 of the true spread of the ends of the 95 per cent interval
    values = np.random.default_rng(1).normal(size=(enough, 1))
    assert all(end.error > 0 for end in ensemble_of(values).interval("p0", level))
    assert all(np.isnan(end.error) for end in ensemble_of(values[:few]).interval("p0", level))


def test_quantities_have_any_shape():
    ensemble = ensemble_of(drawn(4))
    x = GRID.x[[1, 3, 5]]
    at = ensemble.at(x, "g")
    assert at.shape == (500, 3)
    np.testing.assert_allclose(ensemble.mean(at).value, at.mean(axis=0), rtol=1e-12)
    assert ensemble.interval(at)[0].error.shape == (3,)
    both = ensemble.correlation(at[:, :, None], np.stack([at, -at], axis=-1)[:, 0][:, None, :])
    np.testing.assert_allclose(both.value, [[1, -1]] * 3, atol=1e-12)
    assert ensemble.correlation("p1", at).value.shape == (3,)


def test_what_does_not_vary_has_no_correlation():
    ensemble = ensemble_of(np.stack([np.arange(5.0), np.full(5, 2.0)], axis=1))
    assert np.isnan(ensemble.correlation("p0", "p1").value)
    assert ensemble.std("p1") == (0.0, 0.0)


def test_intervals_of_a_gaussian_are_its_deviations():
    ensemble = ensemble_of(np.random.default_rng(8).normal(size=4000))
    # 68.27 and 95.45 per cent: one and two standard deviations of a Gaussian
    for level, deviations in ((0.6827, 1.0), (0.9545, 2.0)):
        low, high = ensemble.interval("p0", level)
        assert abs(low.value + deviations) < 4 * low.error
        assert abs(high.value - deviations) < 4 * high.error


@pytest.mark.parametrize("weighted", [False, True])
def test_a_matrix_of_correlations_is_every_one_of_them(weighted):
    rng = np.random.default_rng(9)
    a, b = rng.normal(size=(300, 2, 3)), rng.normal(size=(300, 4))
    b[:, 0] = a[:, 0, 0]
    b[:, 1] += 0.5 * a[:, 1, 2]
    ensemble = ensemble_of(np.arange(300.0), weights=rng.uniform(size=300) if weighted else None)
    found = ensemble.correlation_matrix(a, b)
    one_by_one = ensemble.correlation(a[:, :, :, None], b[:, None, None, :])
    assert found.value.shape == (2, 3, 4)
    np.testing.assert_allclose(found.value, one_by_one.value, rtol=1e-12, atol=1e-13)
    # sums of fourth powers of order one that cancel where the correlation is 1
    np.testing.assert_allclose(found.error, one_by_one.error, rtol=1e-9, atol=1e-8)
    alone = ensemble.correlation_matrix("p0")
    assert alone.value == pytest.approx(1.0, rel=1e-14)
    rows = ensemble.correlation_matrix(b)
    np.testing.assert_allclose(rows.value, rows.value.T, rtol=1e-13)


def test_statistics_of_many_numbers_are_those_of_each(monkeypatch):
    values = np.random.default_rng(10).normal(size=(50, 7, 9))
    ensemble = ensemble_of(np.arange(50.0), weights=np.arange(1.0, 51.0))

    def all_of_them():
        return [ensemble.mean(values), ensemble.std(values), *ensemble.interval(values, 0.95)]

    whole = all_of_them()
    monkeypatch.setattr(_statistics, "_ELEMENTS", 500)  # ten columns at a time
    for one, other in zip(whole, all_of_them(), strict=True):
        for a, b in zip(one, other, strict=True):
            np.testing.assert_allclose(a, b, rtol=1e-12, atol=1e-15)
            assert a.shape == (7, 9)
    assert ensemble.mean(values[:, :0]).value.shape == (0, 9)


# ---- reweighting ---------------------------------------------------------------------------------------


def test_giele_keller_weights_give_the_posterior_of_a_gaussian():
    # Prior 0 +- 1, a measurement 1 +- 0.5: posterior mean 0.8, deviation sqrt(0.2); Bayes' theorem
    prior = np.random.default_rng(6).normal(size=4000)
    ensemble = ensemble_of(prior).reweighted(((prior - 1.0) / 0.5) ** 2, "Giele-Keller")
    centre, spread = ensemble.mean("p0"), ensemble.std("p0")
    assert abs(centre.value - 0.8) < 4 * centre.error
    assert abs(spread.value - np.sqrt(0.2)) < 4 * spread.error
    assert ensemble.effective_replicas < 4000


def test_two_measurements_are_one_after_the_other_or_both():
    prior = np.random.default_rng(7).normal(size=300)
    first, second = (prior - 0.3) ** 2, (prior + 0.2) ** 2 / 4
    ensemble = ensemble_of(prior)
    both = ensemble.reweighted(first + second, "Giele-Keller")
    turns = ensemble.reweighted(first, "Giele-Keller").reweighted(second, "Giele-Keller")
    np.testing.assert_allclose(both.weights, turns.weights, rtol=1e-12)


def test_weights_of_both_methods_are_their_formulas():
    chi2, count = np.array([3.0, 5.0, 8.0, 20.0]), 6
    ensemble = ensemble_of(np.arange(4.0))
    plain = ensemble.reweighted(chi2, "Giele-Keller", least=1).weights
    np.testing.assert_allclose(plain, np.exp(-chi2 / 2) / np.exp(-chi2 / 2).sum(), rtol=1e-13)
    # arXiv:1012.0836: chi^(n-1) exp(-chi2/2); effective number exp(1/N sum w ln(N/w)), sum of w = N
    other = ensemble.reweighted(chi2, "1012.0836", data=count, least=1)
    raw = chi2 ** ((count - 1) / 2) * np.exp(-chi2 / 2)
    np.testing.assert_allclose(other.weights, raw / raw.sum(), rtol=1e-13)
    w = 4 * other.weights
    assert other.effective_replicas == pytest.approx(np.exp((w * np.log(4 / w)).sum() / 4), rel=1e-13)
    # one datum: the methods are the same
    one = ensemble.reweighted(chi2, "1012.0836", data=1, least=1).weights
    np.testing.assert_allclose(one, plain, rtol=1e-13)


def test_equal_weights_are_all_effective():
    assert ensemble_of(np.arange(7.0)).effective_replicas == pytest.approx(7.0, rel=1e-14)


def test_large_chi_squares_do_not_underflow():
    ensemble = ensemble_of(np.arange(3.0))
    for method in ("Giele-Keller", "1012.0836"):
        weights = ensemble.reweighted([1e5, 1e5, 1e6], method, data=100, least=1).weights
        np.testing.assert_allclose(weights, [0.5, 0.5, 0.0], atol=1e-12)


def test_unweighted_replicas_say_what_weighted_ones_did():
    prior = np.random.default_rng(6).normal(size=4000)
    weighted = ensemble_of(prior).reweighted(((prior - 1.0) / 0.5) ** 2, "Giele-Keller")
    plain = weighted.unweighted()
    assert plain.replicas == int(weighted.effective_replicas)
    assert plain.effective_replicas == pytest.approx(plain.replicas, rel=1e-12)
    for what in (plain.mean, plain.std):
        # Bayes' theorem, as above
        exact = {plain.mean: 0.8, plain.std: np.sqrt(0.2)}[what]
        assert abs(what("p0").value - exact) < 4 * what("p0").error
    # likely replicas several times, with all that belongs to them
    numbers, times = np.unique(plain.index, return_counts=True)
    expected = weighted.weights[numbers] * plain.replicas
    assert (abs(times - expected) <= 1.0).all()
    np.testing.assert_array_equal(plain.parameters, weighted.parameters[plain.index])
    np.testing.assert_array_equal(plain.densities.values[:, 0], weighted.densities.values[plain.index, 0])


def test_equal_weights_are_unweighted_as_they_are():
    ensemble = full()
    equal = Ensemble(ensemble.densities, parameters=ensemble.parameters, names=ensemble.names)
    assert_equal(equal, equal.unweighted())
    thrice = equal.unweighted(90)
    np.testing.assert_array_equal(np.unique(thrice.index, return_counts=True)[1], 3)
    assert thrice.mean("p0").value == pytest.approx(equal.mean("p0").value, rel=1e-12)


# ---- files and words -----------------------------------------------------------------------------------


def full():
    rng = np.random.default_rng(8)
    return ensemble_of(
        drawn(9, 30), weights=rng.uniform(size=30), index=np.arange(30) * 2, chi2=rng.uniform(size=30),
        chi2_data=rng.uniform(size=30), data=12, failed={5: "not converged", 1: "naïve"}, seed=2**70,
        negative=3,
    )  # fmt: skip


def assert_equal(one, other):
    assert one.densities == other.densities
    assert (one.names, one.failed, one.seed) == (other.names, other.failed, other.seed)
    assert (one.data, one.negative) == (other.data, other.negative)
    for name in ("parameters", "weights", "index", "chi2", "chi2_data"):
        np.testing.assert_array_equal(getattr(one, name), getattr(other, name), err_msg=name)


@pytest.mark.parametrize("copy", [False, True])
def test_a_stored_ensemble_comes_back_with_every_bit(tmp_path, copy):
    path = tmp_path / "e.h5"
    for ensemble in (full(), ensemble_of(np.arange(3.0)), Ensemble(full().densities)):
        ensemble.save(path)
        assert_equal(ensemble, Ensemble.load(path, copy=copy))
        first = path.read_bytes()
        Ensemble.load(path).save(path)
        assert path.read_bytes() == first


def test_another_kind_of_file_is_refused(tmp_path):
    path = tmp_path / "d.h5"
    full().densities.save(path)
    with pytest.raises(StoreError, match="holds densities, not ensemble"):
        Ensemble.load(path)
    full().save(path)
    with pytest.raises(StoreError, match="holds ensemble, not densities"):
        sw.Densities.load(path)
    damaged = bytearray(path.read_bytes())
    damaged[3000] ^= 1
    path.write_bytes(damaged)
    with pytest.raises(StoreError, match="damaged"):
        Ensemble.load(path)


def test_a_lattice_holds_replicas_without_weights(tmp_path):
    ensemble, path = full(), tmp_path / "e.csv"
    with pytest.raises(InputError, match=r"a lattice holds no weights: write that of unweighted\(\)"):
        ensemble.to_csv(path)
    plain = ensemble.unweighted(12)
    plain.to_csv(path)
    with pytest.warns(sw.ResolutionWarning, match="g is resolved to"):  # five nodes a panel
        again = sw.Densities.from_csv(path, GRID)
    np.testing.assert_array_equal(again.values, plain.densities.values)


def few_failed():
    return ensemble_of(drawn(1, 200), failed={7: "x"})


def test_every_summary_warns_of_many_failed_fits():
    ensemble = full()
    changed = ensemble.reweighted(np.ones(30), "Giele-Keller", least=1.0).unweighted()
    for one in (ensemble, changed):
        for text in (str(one), repr(one), one._repr_html_()):
            assert "more than 1 per cent" in text
    few = few_failed()
    for text in (str(few), repr(few)):
        assert "more than" not in text
        assert "1 f" in text


def test_ensembles_print_and_pickle():
    ensemble = full()
    text = str(ensemble)
    assert "WARNING: 2 fits failed, more than 1 per cent" in text
    assert "3 pseudo-data were negative, and kept" in text
    assert "are effective" in text
    assert "sampling" in text
    assert repr(few_failed()) == "Ensemble(200 replicas, 2 parameters, 1 failed)"
    assert ensemble._repr_html_().startswith("<pre>Ensemble")
    assert_equal(ensemble, pickle.loads(pickle.dumps(ensemble)))
    few = few_failed()
    assert "WARNING" not in str(few)
    assert "1 fits failed and are left out" in str(few)
    for odd in (ensemble_of([[1.0]]), Ensemble(ensemble.densities)):
        assert str(odd).startswith("Ensemble")


def test_an_ensemble_is_carried_to_other_scales():
    grid = sw.ChebyshevGrid.from_panels([0.0, 0.7, 2.5, 6.0], [8, 8, 8])
    values = np.random.default_rng(1).uniform(0.9, 1.1, (5, 7, 1)) * grid.x**0.2 * (1 - grid.x) ** 3
    densities = sw.Densities(grid, q2=2.0, nf=3, flavours=[21, 1, -1, 2, -2, 3, -3], values=values)
    ops = sw.build_operators(sw.Theory(order="LO", flavours=3), grid, start_q2=2.0, q2=[10.0, 100.0])
    ensemble = Ensemble(densities, weights=[1, 2, 3, 4, 5]).evolved(ops, threads=1)
    at = ensemble.at([0.1, 0.3], "g", q2=100.0)
    np.testing.assert_array_equal(at, ops.apply(densities).at(100.0, [0.1, 0.3], "g"))
    assert ensemble.mean(at).value.shape == (2,)
    assert ensemble.weights[4] == 5 / 15
    parts = list(Ensemble(densities, weights=[1, 2, 3, 4, 5]).stream(ops, threads=1))
    assert [part.densities.q2 for part in parts] == [10.0, 100.0]
    np.testing.assert_array_equal(parts[1].at([0.1, 0.3], "g"), at)
    np.testing.assert_array_equal(parts[1].weights, ensemble.weights)


def test_nothing_can_be_changed():
    for name in ("weights", "parameters", "chi2"):
        with pytest.raises(ValueError, match="read-only"):
            getattr(full(), name)[0] = 1.0


WRONG = {
    "densities": (lambda: Ensemble(None), "densities must be Densities"),
    "parameters": (lambda: Ensemble(full().densities, parameters=np.ones((3, 1)), names=["a"]), "shape"),
    "names": (lambda: Ensemble(full().densities, parameters=np.ones((30, 2)), names=["a"]), "shape"),
    "weights": (lambda: ensemble_of(np.ones(3), weights=[1, -1, 1]), "must not be negative"),
    "no weights": (lambda: ensemble_of(np.ones(3), weights=[0, 0, 0]), "must not all be 0"),
    "nan": (lambda: ensemble_of(np.ones(3), weights=[1, np.nan, 1]), "must be finite"),
    "index": (lambda: ensemble_of(np.ones(3), index=[1]), "there must be 3"),
    "name": (lambda: full().mean("p3"), "no parameter of this name; there are"),
    "quantity": (lambda: full().std(np.ones(4)), "the first axis must have 30 replicas"),
    "quantity nan": (lambda: full().std(np.full(30, np.nan)), "must be finite"),
    "level": (lambda: full().interval("p0", 1.0), r"level must lie in \(0, 1\)"),
    "one replica": (lambda: ensemble_of([[1.0]]).std("p0"), "need at least two"),
    "one weight": (lambda: ensemble_of(np.ones(3), weights=[0, 1, 0]).std("p0"), "need at least two"),
    "broadcast": (lambda: full().correlation(np.ones((30, 2)), np.ones((30, 3))), "cannot be broadcast"),
    "operators": (lambda: full().evolved(None), "operators must be Operators"),
    "stream": (lambda: full().stream(None), "operators must be Operators"),
    "unweighted": (lambda: full().unweighted(0), "replicas must be from 1"),
    "method": (lambda: full().reweighted(np.ones(30), "bayes"), "method must be one of"),
    "chi2": (lambda: full().reweighted(-np.ones(30), "Giele-Keller"), "must not be negative"),
    "chi2 shape": (lambda: full().reweighted(np.ones(3), "Giele-Keller"), "shape"),
    "data": (lambda: full().reweighted(np.ones(30), "1012.0836"), "needs the number of new data"),
    "data 0": (lambda: full().reweighted(np.ones(30), "1012.0836", data=0), "at least 1"),
    "all perfect": (lambda: full().reweighted(np.zeros(30), "1012.0836", data=3), "0 for every replica"),
    "too few": (
        lambda: ensemble_of(np.arange(100.0)).reweighted(np.arange(100.0), "Giele-Keller"),
        r"of 100 replicas \d\.\d are effective afterwards, fewer than least = 50",
    ),
}


@pytest.mark.parametrize("name", WRONG)
def test_what_is_wrong_is_refused_with_the_reason(name):
    make, words = WRONG[name]
    with pytest.raises(InputError, match=words):
        make()
