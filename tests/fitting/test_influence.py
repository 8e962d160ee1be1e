"""What data do to a result: the closed forms against refits without them."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from fitting.problems import (
    ALPHA_S,
    GRID,
    START_Q2,
    Rows,
    bent_shape,
    linear_shape,
    points,
    truth,
)
from scalewright import InputError
from scalewright.fitting.influence import density_gradient, influence
from scalewright.fitting.least_squares import fit

#: Errors so small that predictions are linear within them; at twice the size a table misses the 5 per cent.
SMALL = 0.0005
KIND = {"given_in": "value", "scales_with": "nothing"}
SPLIT = {"Run 1": slice(0, 32, 3), "Run 2": slice(1, 32, 3), "Run 3": slice(2, 32, 3)}


def table(title, values, where, size):
    """Return one table; all tables share an offset, and each has a tilt of its own."""
    x, q2 = (np.array(one)[where] for one in points())
    value = np.asarray(values)[where]
    columns = {"x": x, "q2": q2, "value": value, "stat": np.full(x.size, size)}
    columns["tilt"] = 0.5 * size * np.linspace(-1, 1, x.size)
    errors = [{"column": "stat", **KIND}, {"column": "tilt", "correlated": True, **KIND},
              {"name": "offset", "size": 0.5 * size, "shared_as": "offset", **KIND}]  # fmt: skip
    return sw.Measurements.from_columns(
        {"title": title, "measures": "F2", "exchange": "photon", "uncertainty": errors}, columns
    )


def problem(shape, size, seed, form="covariance", keep=None, alpha_s=None):
    """Return map and chi-square of three tables drawn from the law, or of those data that are kept."""
    law = truth(shape, None if alpha_s is None else map_of(np.ones(32, dtype=bool), alpha_s))
    order = np.concatenate([np.arange(32)[where] for where in SPLIT.values()])
    whole = sw.Measurements.join([table(title, law, where, size) for title, where in SPLIT.items()])
    drawn = whole.with_values(whole.pseudo_data(np.random.default_rng(seed)).values)
    keep = np.ones(32, dtype=bool) if keep is None else keep
    return map_of(order[keep]), sw.ChiSquare(drawn.cut(keep=keep), form)


def map_of(places, alpha_s=ALPHA_S):
    x, q2 = (np.array(one)[places].tolist() for one in points())
    return Rows(alpha_s, x, q2)


def without(chi2, part, of):
    """Return which data stay."""
    mine = chi2.measurements.table_of == part if of == "tables" else np.arange(32) == part
    return ~mine


@pytest.mark.parametrize("form", ["covariance", "nuisance"])
@pytest.mark.parametrize("of", ["tables", "data"])
def test_influence_on_a_linear_fit_is_what_a_refit_finds(of, form):
    shape = linear_shape()
    fmap, chi2 = problem(shape, 0.02, 1, form)
    result = fit(fmap, chi2, shape)
    found = influence(result, np.eye(len(shape.names)), of)
    for part in range(3) if of == "tables" else (0, 17, 31):
        again = fit(*problem(shape, 0.02, 1, form, without(chi2, part, of)), shape)
        # exact: what is left is the rounding of fits, 1e-9 of an error, times the widening
        np.testing.assert_allclose(
            (found.change[part] - (again.parameters - result.parameters)) / result.errors, 0.0, atol=1e-6
        )
        np.testing.assert_allclose(found.error_without[part], again.errors, rtol=1e-6)
    np.testing.assert_allclose(found.error, result.errors, rtol=1e-9)


def test_a_table_counts_to_five_per_cent_of_the_error_where_the_coupling_is_free():
    shape, known = bent_shape(), {"alpha_s": ALPHA_S}
    fmap, chi2 = problem(shape, SMALL, 2)
    result = fit(fmap, chi2, shape, theory=known)
    x = [0.01, 0.2]
    at = {"alpha_s": influence(result, "alpha_s"), "g": influence(result, density_gradient(result, x, "g"))}
    for part in range(3):
        again = fit(*problem(shape, SMALL, 2, keep=without(chi2, part, "tables")), shape, theory=known)
        moved = again.value("alpha_s") - result.value("alpha_s")
        assert abs(at["alpha_s"].change[part] - moved) < 0.05 * result.error("alpha_s")
        moved = (again.densities.at(None, x, "g") - result.densities.at(None, x, "g"))[0]
        assert (abs(at["g"].change[part] - moved) < 0.05 * result.error_of(x, "g")).all()
        assert at["alpha_s"].error_without[part] == pytest.approx(again.error("alpha_s"), rel=0.05)
    # not a matter of course: tables do move it
    assert abs(at["alpha_s"].change / at["alpha_s"].error).max() > 0.5


def test_shares_add_up_and_are_those_of_sums_of_measurements():
    shape = linear_shape()
    fmap, chi2 = problem(shape, 0.02, 3)
    result = fit(fmap, chi2, shape)
    tables, data = (influence(result, np.eye(len(shape.names)), of) for of in ("tables", "data"))
    np.testing.assert_allclose(tables.share.sum(axis=0), 1.0, rtol=1e-9)
    np.testing.assert_allclose(tables.share_of_priors, 0.0, atol=1e-9)
    for part in range(3):
        mine = chi2.measurements.table_of == part
        np.testing.assert_allclose(tables.share[part], data.share[mine].sum(axis=0), rtol=1e-9)
    # a parameter is a sum of weights times data: weights by moving each datum in turn
    value, weights = chi2.measurements.value, []
    for datum in (0, 20):
        moved = chi2.measurements.with_values(value + 0.01 * np.eye(32)[datum])
        weights.append((fit(fmap, sw.ChiSquare(moved), shape).parameters - result.parameters) / 0.01)
    deletion = _deletion(result, chi2)
    for place, weight in zip((0, 20), weights, strict=True):
        np.testing.assert_allclose(deletion[place], weight, rtol=1e-5)  # of a difference of two fits


def _deletion(result, chi2):
    """Return the weights of data in parameters, (datum, parameter)."""
    from scalewright.fitting._deletion import Deletion

    made = Deletion.of(result, chi2)
    return made.along @ (made.root @ made.root.T)


def test_a_prior_has_its_share():
    shape = linear_shape()
    fmap, chi2 = problem(shape, 0.02, 3)
    name = shape.names[0]
    alone = fit(fmap, chi2, shape)
    both = fit(fmap, chi2, shape, priors={name: (alone.value(name), alone.error(name))})
    # two measurements of equal error make half of the variance each, 1/2 of what it was
    assert influence(both, name).share_of_priors == pytest.approx(0.5, rel=1e-6)


def single(values, place):
    """Return a fit of two numbers, each measured by other data."""
    grid = GRID
    stat = [{"column": "stat", **KIND}]
    x = [0.1] * len(values)
    made = sw.Measurements.from_columns(
        {"title": "Run 1", "measures": "F2", "exchange": "photon", "uncertainty": stat},
        {"x": x, "q2": [2.0 + i for i in range(len(x))], "value": values, "stat": [0.1] * len(x)},
    )
    matrix = np.zeros((len(values), 2, grid.nodes))
    for row, flavour in enumerate(place):
        matrix[row, flavour] = grid.cardinals(0.1)
    fmap = SimpleNamespace(matrix=matrix, flavours=(1, 2), grid=grid, start_q2=2.0, start_nf=3)
    flat = sw.shapes.FunctionShape(grid, [1, 2], _flat, [1.0, 1.0], names=["a", "b"])
    return fit(fmap, sw.ChiSquare(made), flat)


def _flat(x, p):
    return np.outer(p, np.ones_like(x))


def test_what_one_datum_alone_knows_is_lost_with_it():
    result = single([1.0, 1.3, 2.0], [0, 0, 1])
    of_a, of_b = (influence(result, name, "data") for name in "ab")
    np.testing.assert_allclose(of_a.change[:2], [0.15, -0.15], rtol=1e-6)
    assert of_a.change[2] == pytest.approx(0.0, abs=1e-9)
    assert np.isnan(of_b.change[2])
    assert of_b.error_without[2] == np.inf
    assert of_b.error_without[0] == pytest.approx(of_b.error, rel=1e-9)
    assert "not determined without it" in str(of_b)
    whole = influence(result, "b")
    assert np.isnan(whole.change).all()
    assert np.isinf(whole.error_without).all()
    text = str(of_a)
    assert "Run 1, datum 1" in text
    assert "share 50 %" in text
    assert str(influence(result, np.eye(2))) == "Influence of 1 parts on (2,) numbers"


def operators(alpha_s, q2=50.0):
    theory = sw.Theory(order="LO", coupling=sw.Coupling(alpha_s, q2=START_Q2, nf=3), flavours=3)
    return sw.build_operators(theory, GRID, start_q2=START_Q2, q2=[q2])


def test_the_derivative_of_a_density_at_another_scale_is_that_of_evolution():
    shape, known, x = bent_shape(), {"alpha_s": ALPHA_S}, [0.01, 0.3]
    fmap, chi2 = problem(shape, SMALL, 2)
    result = fit(fmap, chi2, shape, theory=known)
    gradient = density_gradient(
        result, x, "g", q2=50.0, operators=lambda at: operators(at["alpha_s"])
    )  # fmt: skip

    def gluon(parameters):
        start = shape.densities(parameters[:-1], q2=START_Q2, nf=3)
        return operators(parameters[-1]).apply(start).at(50.0, x, "g")[0]

    for place, size in enumerate(result.errors):
        step = 0.02 * size * np.eye(len(result.names))[place]
        by_hand = (gluon(result.parameters + step) - gluon(result.parameters - step)) / (0.04 * size)
        # two points: error h^2 of a change that is small over 0.02 errors, and 1e-9 of the operators
        np.testing.assert_allclose(
            gradient[place], by_hand, rtol=1e-3, atol=1e-3 * abs(gradient[place]).max()
        )
    found = influence(result, gradient)
    again = fit(*problem(shape, SMALL, 2, keep=without(chi2, 2, "tables")), shape, theory=known)
    moved = gluon(again.parameters) - gluon(result.parameters)
    assert (abs(found.change[2] - moved) < 0.05 * found.error).all()


def linear_result(**options):
    shape = linear_shape()
    return fit(*problem(shape, 0.02, 1), shape, **options)


def blind():
    result = single([1.0, 1.3], [0, 0])
    return influence(result, "a")


class Plain:
    """A chi-square that is not ours."""

    def __init__(self, chi2):
        self.residuals, self.whiten = chi2.residuals, chi2.whiten


def foreign():
    shape = linear_shape()
    fmap, chi2 = problem(shape, 0.02, 1)
    return influence(fit(fmap, Plain(chi2), shape), shape.names[0])


WRONG = {
    "result": (lambda: influence(None, "a"), "result must be a FitResult"),
    "of": (lambda: influence(linear_result(), "g.c1", of="runs"), "of must be one of"),
    "name": (lambda: influence(linear_result(), "g.c9"), "no parameter of this name"),
    "gradient": (lambda: influence(linear_result(), [1.0]), "the first axis must have"),
    "blind": (blind, "there is no covariance"),
    "foreign": (foreign, "must be one with a ChiSquare"),
    "no fit": (lambda: density_gradient(None, 0.1, 21), "result must be a FitResult"),
    "no operators": (lambda: density_gradient(linear_result(), 0.1, 21, q2=50.0), "must be given"),
    "odd operators": (
        lambda: density_gradient(linear_result(), 0.1, 21, q2=50.0, operators=lambda at: 3),
        "must return Operators",
    ),
    "fixed operators": (
        lambda: density_gradient(
            linear_result(theory={"alpha_s": ALPHA_S}), 0.1, 21, q2=50.0, operators=operators(ALPHA_S)
        ),
        "the fit has theory parameters 'alpha_s'",
    ),
}


@pytest.mark.parametrize("name", WRONG)
def test_what_is_wrong_is_refused_with_the_reason(name):
    make, words = WRONG[name]
    with pytest.raises(InputError, match=words):
        make()
