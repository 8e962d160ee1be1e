"""Replicas: against Hessian and binomial counts; equal bits whatever the engine, a kill, a cut journal."""

import multiprocessing
import os
import pathlib
import pickle
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from dataclasses import replace

import numpy as np
import pytest
import scalewright as sw
from fitting import children
from fitting.laws import network
from fitting.problems import (
    FLAVOURS,
    GRID,
    START_Q2,
    bent_shape,
    fmap,
    linear_shape,
    measured,
    quick_shape,
    truth,
    twin_shape,
)
from fitting.runs import assert_same_bits, bent_problem, replicas_of
from scalewright import InputError, ScalewrightError
from scalewright.fitting import _parcel, _pool
from scalewright.fitting._central import of_data
from scalewright.fitting._parcel import Parcel
from scalewright.fitting._problem import Problem
from scalewright.fitting._solve import solve
from scalewright.fitting.least_squares import fit
from scalewright.fitting.replicas import fit_replicas
from scalewright.fitting.shapes import FunctionShape, Network
from scipy import stats

# ---- statistics ----------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def spread():
    shape = linear_shape()
    chi2 = sw.ChiSquare(measured(truth(shape), seed=3))
    return fit(fmap(), chi2, shape), replicas_of((fmap(), chi2, shape), replicas=600, workers=1)


def test_replicas_of_a_linear_fit_spread_as_the_hessian_says(spread):
    result, ensemble = spread
    n, covariance = ensemble.replicas, result.covariance
    assert n == 600
    errors = np.sqrt(np.diagonal(covariance))
    away = (ensemble.parameters.mean(axis=0) - result.parameters) / errors
    assert abs(away).max() < 4 / np.sqrt(n)
    sampled = np.cov(ensemble.parameters.T)
    # variance of an element of a sampled Gaussian covariance (Wishart): (C_ii C_jj + C_ij^2)/(n - 1)
    size = np.sqrt((np.outer(errors**2, errors**2) + covariance**2) / (n - 1))
    assert (abs(sampled - covariance) / size).max() < 4
    x = np.array([0.01, 0.1, 0.4])
    for flavour in ("g", "u_v", "sea"):
        spread = ensemble.std(ensemble.at(x, flavour))
        assert (abs(spread.value - result.error_of(x, flavour)) < 4 * spread.error).all()


def test_correlations_of_parameters_with_data_are_those_of_the_hessian(spread):
    result, ensemble = spread
    found = ensemble.correlation_matrix(ensemble.parameters, result.predict(ensemble.parameters))
    # a linear fit: differences of predictions are their derivatives
    along = result.predict(result.parameters + np.diag(result.errors)) - result.prediction
    with_data = result.covariance @ (along / result.errors[:, None])
    size = np.sqrt(np.einsum("pi,pi->i", along / result.errors[:, None], with_data))
    expected = with_data / result.errors[:, None] / size
    # 192 of them, not independent: 4 sampling errors are passed by chance once in a hundred runs, at most
    assert (abs(found.value - expected) < 4.0 * found.error).all()
    assert np.median(found.error) < 1.2 / np.sqrt(ensemble.replicas)  # (1 - r^2) over the root, at most 1


def test_priors_are_drawn_like_data():
    shape = linear_shape()
    chi2, name = sw.ChiSquare(measured(truth(shape), seed=3)), shape.names[0]
    tight = {name: (1.0, fit(fmap(), chi2, shape).error(name) / 3)}
    result = fit(fmap(), chi2, shape, priors=tight)
    ensemble = replicas_of((fmap(), chi2, shape), replicas=200, workers=1, priors=tight)
    spread = ensemble.std(name)
    assert abs(spread.value - result.error(name)) < 4 * spread.error


def test_replicas_vary_by_the_covariance_of_the_theory_too():
    # drawn from the errors of the data alone they spread by 8 and 11 sampling errors less than the Hessian
    values = truth(quick_shape())
    shifts = np.stack([0.05 * values, 0.04 * np.linspace(-1, 1, values.size) * values], axis=1)
    chi2 = sw.ChiSquare(measured(values, seed=3), theory=shifts @ shifts.T)
    result = fit(fmap(), chi2, quick_shape())
    ensemble = replicas_of((fmap(), chi2, quick_shape()), replicas=400, workers=1)
    for name in result.names:
        spread = ensemble.std(name)
        assert abs(spread.value - result.error(name)) < 4 * spread.error, name


def test_intervals_of_pseudo_experiments_cover_the_truth():
    shape, chi2_values, covered = linear_shape(), [], []
    exact = sw.ChiSquare(measured(truth(shape)))
    problem = Problem(fmap(), exact, shape)
    experiments = 300
    for number in range(experiments):
        rng = np.random.default_rng(np.random.SeedSequence(11, spawn_key=(number,)))
        pseudo = exact.measurements.pseudo_data(rng).values
        solution = solve(
            problem, problem.start, shift=problem.shift(exact.whiten(pseudo - exact.measurements.value))
        )
        errors = np.sqrt(np.diagonal(np.linalg.inv(solution.jacobian.T @ solution.jacobian)))
        covered.append(abs(solution.parameters - shape.start) / errors)
        chi2_values.append(solution.total)
    # one and two standard deviations of a Gaussian, within three of a binomial, for each of the parameters
    for deviations, level in ((1.0, 0.6827), (2.0, 0.9545)):
        within = np.mean(np.array(covered) < deviations, axis=0)
        assert (abs(within - level) < 3 * np.sqrt(level * (1 - level) / experiments)).all(), within
    freedom = len(exact.measurements) - len(shape.names)
    assert stats.kstest(chi2_values, stats.chi2(freedom).cdf).pvalue > 1e-3


def test_intervals_of_ensembles_cover_the_truth():
    shape = quick_shape()
    exact, covered, experiments = sw.ChiSquare(measured(truth(shape))), 0, 80
    for number in range(experiments):
        rng = np.random.default_rng(np.random.SeedSequence(12, spawn_key=(number,)))
        drawn = exact.measurements.with_values(exact.measurements.pseudo_data(rng).values)
        ensemble = replicas_of((fmap(), sw.ChiSquare(drawn), shape), replicas=20, seed=number, workers=1)
        gluon = ensemble.at(0.1, "g")
        centre, spread = ensemble.mean(gluon), ensemble.std(gluon)
        law = shape.densities(shape.start, q2=START_Q2, nf=3).at(None, 0.1, "g")
        covered += abs(centre.value - law[0]) < spread.value
    # twenty replicas: mean and deviation of so few cover 66 per cent (Student), the binomial spread is 5
    assert abs(covered / experiments - 0.6827) < 3 * np.sqrt(0.6827 * 0.3173 / experiments)


# ---- (seed, i) alone -----------------------------------------------------------------------------------


@pytest.mark.parametrize("workers", [2, 4])
def test_bits_do_not_depend_on_the_number_of_workers(serial, workers):
    assert_same_bits(serial, replicas_of(bent_problem(), workers=workers))


def test_bits_do_not_depend_on_chunks_engines_or_the_number_of_replicas(serial):
    with ThreadPoolExecutor(2) as threads:
        assert_same_bits(serial, replicas_of(bent_problem(), executor=threads, chunk=5))
    fewer = replicas_of(bent_problem(), replicas=5, workers=1)
    np.testing.assert_array_equal(fewer.parameters, serial.parameters[:5])
    other = replicas_of(bent_problem(), replicas=5, seed=8, workers=1)
    assert not np.isin(other.parameters, serial.parameters).any()


def test_the_global_generator_is_neither_used_nor_moved(serial):
    np.random.seed(1)
    before = np.random.get_state()[1].copy()
    assert_same_bits(serial, replicas_of(bent_problem(), workers=1))
    np.testing.assert_array_equal(np.random.get_state()[1], before)


def test_a_parcel_is_mapped_and_gives_the_same(tmp_path):
    content = {"a": np.arange(1000.0), "b": [np.eye(3), "text"]}
    with _parcel.Parcel(content) as parcel:
        for ticket in (parcel.ticket, replace(parcel.with_bytes(), name="other")):
            found = _parcel.content(ticket)
            np.testing.assert_array_equal(found["a"], content["a"])
            np.testing.assert_array_equal(found["b"][0], np.eye(3))
            assert not found["a"].flags.writeable
        path = pathlib.Path(parcel.ticket.path)
    assert not path.exists()
    assert isinstance(_parcel.content(replace(parcel.ticket, name="gone")), _parcel.Missing)


class Elsewhere(Executor):
    """An engine whose workers do not see our files, and come and go."""

    def __init__(self):
        self.with_bytes = 0

    def submit(self, fn, ticket, indices):
        _parcel._opened.clear()
        self.with_bytes += ticket.data is not None
        future = Future()
        future.set_result(fn(replace(ticket, path="/nowhere/parcel"), indices))
        return future


def test_workers_that_do_not_see_our_files_get_the_bytes(serial):
    engine = Elsewhere()
    assert_same_bits(serial, replicas_of(bent_problem(), executor=engine, workers=2, chunk=4))
    assert engine.with_bytes == 6  # one for each chunk, as every one met a new worker


# ---- kills ---------------------------------------------------------------------------------------------


def function_problem(function):
    shape = FunctionShape(GRID, FLAVOURS, function, [2.0, -0.1, 0.5], names=["norm", "power", "ratio"])
    return fmap(), sw.ChiSquare(measured(truth(shape), seed=2)), shape


def test_a_killed_worker_costs_nothing_but_time(tmp_path, monkeypatch):
    monkeypatch.setenv("SCALEWRIGHT_TEST_PARENT", str(os.getpid()))
    expected = replicas_of(function_problem(children.fragile), replicas=12, workers=1)
    for engine in (None, lambda: ProcessPoolExecutor(1, mp_context=multiprocessing.get_context("spawn"))):
        mark = tmp_path / "mark"
        mark.touch()
        monkeypatch.setenv("SCALEWRIGHT_TEST_MARK", str(mark))
        found = replicas_of(function_problem(children.fragile), replicas=12, workers=1 if engine else 2,
                            executor=engine, chunk=3)  # fmt: skip
        assert not mark.exists()  # a worker was killed
        assert_same_bits(expected, found)


def test_workers_that_always_die_are_an_error_that_names_the_replicas(monkeypatch):
    monkeypatch.setenv("SCALEWRIGHT_TEST_PARENT", str(os.getpid()))
    with pytest.raises(ScalewrightError, match=r"workers died 3 times without a result.* with replicas 0, 1"):
        replicas_of(function_problem(children.deadly), replicas=4, workers=2, chunk=1)
    assert multiprocessing.active_children() == []


def test_an_engine_of_the_users_that_breaks_is_named(monkeypatch):
    monkeypatch.setenv("SCALEWRIGHT_TEST_PARENT", str(os.getpid()))
    context = multiprocessing.get_context("spawn")
    with (
        ProcessPoolExecutor(1, mp_context=context) as engine,
        pytest.raises(ScalewrightError, match=r"ProcessPoolExecutor takes no more work.*give a function"),
    ):
        replicas_of(function_problem(children.deadly), replicas=4, executor=engine)


class Silent(Executor):
    def submit(self, fn, *args):
        return Future()


def test_a_silent_engine_is_named():
    with pytest.raises(
        ScalewrightError, match=r"Silent: no result within 0\.1 s while computing replicas 0, 1"
    ):
        replicas_of(bent_problem(), replicas=2, executor=Silent(), limit=0.1)


def test_an_interrupt_leaves_no_process_behind():
    def stop(done, total):
        if done:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        replicas_of(bent_problem(), replicas=200, workers=2, chunk=1, progress=stop)
    assert multiprocessing.active_children() == []


# ---- what fails, and what is refused -------------------------------------------------------------------


def test_failed_fits_are_listed_and_left_out(monkeypatch, tmp_path):
    monkeypatch.setenv("SCALEWRIGHT_TEST_LIMIT", "1e9")
    problem = function_problem(children.moody)
    all_of_them = replicas_of(problem, replicas=40, workers=1)
    limit = float(np.quantile(all_of_them.parameter("norm"), 0.8))
    monkeypatch.setenv("SCALEWRIGHT_TEST_LIMIT", str(limit))
    # started from the same place, not from a best fit that might have failed itself
    start = all_of_them.parameters.min(axis=0)
    ensemble = replicas_of(problem, replicas=40, workers=1, start=start, journal=tmp_path / "j")
    assert 0 < len(ensemble.failed) < 40
    assert ensemble.replicas == 40 - len(ensemble.failed)
    assert not set(ensemble.failed) & set(ensemble.index.tolist())
    assert all("too many gluons" in reason for reason in ensemble.failed.values())
    assert (ensemble.parameter("norm") <= limit).all()
    assert "WARNING" in str(ensemble)
    again = replicas_of(problem, replicas=40, workers=1, start=start, journal=tmp_path / "j")
    assert_same_bits(ensemble, again)


def test_a_fit_that_does_not_converge_is_a_failed_one():
    the_map, chi2, shape = bent_problem()
    with pytest.raises(
        ScalewrightError, match="all 3 replicas failed; replica 0: not converged: stopped after"
    ):
        replicas_of((the_map, chi2, shape), replicas=3, workers=1, start=shape.start + 0.3, evaluations=1)


def test_an_ensemble_says_what_the_data_do_not_see_and_that_they_have_no_best_fit():
    assert replicas_of(bent_problem(), replicas=2, workers=1).notes == ()
    twins = twin_shape()
    twin_run = (fmap(), sw.ChiSquare(measured(truth(twins), seed=1)), twins)
    blind = replicas_of(twin_run, replicas=4, workers=1)
    assert len(blind.notes) == 1
    assert all(word in blind.notes[0] for word in ("do not see", "d+.c0", "s+.c0"))
    assert blind.notes[0] in str(blind)
    the_map, chi2, shape = bent_problem()
    problem = Problem(the_map, chi2, shape)
    begin = shape.start + 0.3
    notes = of_data(problem, solve(problem, begin, evaluations=1))
    assert len(notes) == 1
    assert "the fit to the data themselves has not converged: stopped after" in notes[0]


def test_a_shape_that_fails_on_the_data_themselves_is_told_where_a_start_is_given(monkeypatch):
    monkeypatch.setenv("SCALEWRIGHT_TEST_LIMIT", "1e9")
    problem = function_problem(children.moody)
    many = replicas_of(problem, replicas=12, workers=1)
    values = np.sort(many.parameter("norm"))
    # the start is allowed, the best fit to the data is not, some replicas are
    monkeypatch.setenv("SCALEWRIGHT_TEST_LIMIT", str(values[3]))
    start = many.parameters[np.argsort(many.parameter("norm"))[0]]
    (note,) = replicas_of(problem, replicas=12, workers=1, start=start).notes
    assert note.startswith("WARNING: the fit to the data themselves: ") and "too many gluons" in note
    with pytest.raises(InputError, match="too many gluons"):
        replicas_of(problem, replicas=12, workers=1)


def flexible():
    powers = {"g": (-0.1, 5), "u_v": (0.7, 3), "d_v": (0.7, 4), "ubar": (-0.1, 7), "dbar": (-0.1, 7)}
    shape = Network(GRID, powers, nf=3, hidden=[6], relations=["s = 0.5*dbar", "sbar = s"], momentum="g",
                    numbers={"u_v": 2, "d_v": 1})  # fmt: skip
    bent = bent_shape()
    return fmap(), sw.ChiSquare(measured(truth(bent), seed=6, size=0.01)), shape


def test_a_flexible_shape_is_stopped_before_it_learns_the_noise():
    the_map, chi2, shape = flexible()
    assert len(shape.names) > 32  # more parameters than data
    with pytest.raises(InputError, match="parameters for 32 data"):
        replicas_of((the_map, chi2, shape), replicas=2, workers=1)
    ensemble = replicas_of((the_map, chi2, shape), replicas=8, workers=1, validation=0.3, evaluations=60)
    assert ensemble.replicas == 8
    at_start = chi2.value(the_map.predict(shape(shape.start)[order(shape)]))
    # the law is found: far better than the start, for data of which a third was not fitted
    assert np.median(ensemble.chi2_data) < 0.2 * at_start
    np.testing.assert_allclose(ensemble.densities.momentum(), 1.0, atol=1e-12)
    assert_same_bits(
        ensemble,
        replicas_of((the_map, chi2, shape), replicas=8, workers=1, validation=0.3, evaluations=60, chunk=3),
    )


def test_a_search_that_its_evaluations_cut_off_is_no_good_fit():
    problem = flexible()
    with pytest.raises(
        ScalewrightError, match=r"all 2 replicas failed; .*the validation might still improve"
    ):
        replicas_of(problem, replicas=2, workers=1, validation=0.3, evaluations=3)


def order(shape):
    return [shape.flavours.index(flavour) for flavour in fmap().flavours]


def test_what_cannot_be_sent_is_refused():
    problem = function_problem(lambda x, p: children.law(x, p))
    with pytest.raises(InputError, match=r"cannot be sent to other processes.*workers=1"):
        replicas_of(problem, replicas=2, workers=2)
    assert replicas_of(problem, replicas=2, workers=1).replicas == 2


def test_what_a_worker_cannot_read_is_named():
    # the exception could not be read in turn: the pool broke three times, and "workers died"
    with Parcel(children.Closed()) as parcel, pytest.raises(InputError) as caught:
        _pool._task(parcel.ticket, [0])
    again = pickle.loads(pickle.dumps(caught.value))
    assert str(again) == "shape cannot be read in a worker: Twofold: no, a library"


WRONG = {
    "replicas": ({"replicas": 0}, "replicas must be from 1"),
    "seed": ({"seed": -1}, "seed must be at least 0"),
    "seed text": ({"seed": "x"}, "seed must be a whole number"),
    "workers": ({"workers": 0}, "workers must be from 1"),
    "chunk": ({"chunk": 0}, "chunk must be at least 1"),
    "limit": ({"limit": 0}, "limit must lie in"),
    "validation": ({"validation": 1.0}, r"validation must lie in \[0, 0.9\]"),
    "patience": ({"patience": 0}, "patience must be at least 1"),
    "executor": ({"executor": 3}, "executor must be an Executor"),
    "executor made": ({"executor": lambda: 3}, "must return a concurrent.futures.Executor"),
    "start": ({"start": [1.0]}, "the shape of start"),
    "progress": ({"progress": 3}, "progress must be"),
    "prior": ({"priors": {"x": (1, 1)}}, "no free parameter"),
}


@pytest.mark.parametrize("name", WRONG)
def test_what_is_wrong_is_refused_with_the_reason(name):
    options, words = WRONG[name]
    with pytest.raises(InputError, match=words):
        replicas_of(bent_problem(), **({"replicas": 2, "workers": 1} | options))


def test_chi_square_must_know_its_measurements():
    with pytest.raises(InputError, match="chi2 must be a ChiSquare"):
        fit_replicas(fmap(), None, network(), replicas=1, seed=1)


def test_the_scale_of_the_densities_is_that_of_the_map(serial):
    assert serial.densities.q2 == START_Q2
    assert serial.densities.nf == 3
