"""Shapes: derivatives against differences, sum rules against mpmath, and what is refused."""

import pickle

import mpmath
import numpy as np
import pytest
import scalewright as sw
from fitting.laws import GRID, function, network, power_law, shapes, terms, tilted_derivative
from scalewright import InputError
from scalewright.fitting.shapes import FunctionShape, Network, PowerLaw, Term

SHAPES = shapes()


def moved(shape, seed):
    """Return parameters near the start, within the bounds."""
    rng = np.random.default_rng(seed)
    return np.clip(shape.start + 0.05 * rng.normal(size=shape.start.size), *shape.bounds)


@pytest.mark.parametrize("name", SHAPES)
@pytest.mark.parametrize("seed", range(3))
def test_the_jacobian_is_the_derivative(name, seed):
    shape = SHAPES[name]
    p, step = moved(shape, seed), 1e-3
    jacobian = shape.jacobian(p)
    assert jacobian.shape == (len(shape.names), len(shape.flavours), GRID.nodes)
    for place in range(p.size):
        direction = step * np.eye(p.size)[place]
        # Six-point central difference, error h^6 = 1e-18 in the seventh derivative, rounding 2e-16/h
        weights = {1: 3 / 4, 2: -3 / 20, 3: 1 / 60}
        by_hand = sum(
            w * (shape(p + k * direction) - shape(p - k * direction)) / step for k, w in weights.items()
        )
        size = max(abs(by_hand).max(), abs(shape(p)).max())
        assert abs(jacobian[place] - by_hand).max() < 1e-10 * size, shape.names[place]


def integral(power, fall, coefficients, member, s):
    """Return the integral of x^(s-1) F from 0 to 1 by mpmath's adaptive quadrature."""

    def f(x):
        return (
            x ** (power + s - 1) * (1 - x) ** fall * sum(c * member(k, x) for k, c in enumerate(coefficients))
        )

    return mpmath.quad(f, [0, 1e-6, 1e-3, 0.1, 0.5, 0.9, 1])


FAMILIES = {
    "plain": lambda n: lambda k, y: y**k,
    "chebyshev": lambda n: lambda k, y: mpmath.chebyt(k, 1 - 2 * y),
    "bernstein": lambda n: lambda k, y: mpmath.binomial(n, k) * y**k * (1 - y) ** (n - k),
}


@pytest.mark.parametrize("family", FAMILIES)
@pytest.mark.parametrize("variable", ["x", "sqrt x"])
def test_sum_rules_hold_by_quadrature_of_other_origin(family, variable):
    shape = power_law(family, 3, variable)
    p = moved(shape, 5)
    all_of_them = dict(zip(shape.names, p, strict=True)) | shape.solved(p)
    with mpmath.workdps(30):

        def moment(term, s):
            kind, y = (family, variable) if term in ("g", "u_v") else ("plain", "x")
            order = sorted(n for n in all_of_them if n.startswith(term + ".c"))
            c = [mpmath.mpf(float(all_of_them[n])) for n in order]
            member = FAMILIES[kind](len(c) - 1)
            in_x = (lambda k, x: member(k, x)) if y == "x" else (lambda k, x: member(k, mpmath.sqrt(x)))
            a, b = (mpmath.mpf(float(all_of_them[f"{term}.{n}"])) for n in ("power", "fall"))
            return integral(a, b, c, in_x, s)

        # flavours: u = u_v + ubar, d = d_v + dbar, s = sbar = dbar/2
        momentum = sum(w * moment(t, 1) for t, w in
                       {"g": 1, "u_v": 1, "d_v": 1, "ubar": 2, "dbar": 3}.items())  # fmt: skip
        # quadrature near x^-0.9 is good to 1e-12 here; the sum rule itself to rounding
        assert abs(momentum - 1) < 1e-11
        assert abs(moment("u_v", 0) - 2) < 1e-11
        assert abs(moment("d_v", 0) - 1) < 1e-11


@pytest.mark.parametrize("family", FAMILIES)
def test_sum_rules_survive_the_highest_degree(family):
    shape = power_law(family, 8)
    one = shape.densities(moved(shape, 2), q2=2.0, nf=3)
    fine = sw.ChebyshevGrid(x_min=1e-4, resolution="fine")
    finer = power_law(family, 8, grid=fine).densities(moved(shape, 2), q2=2.0, nf=3)
    # the grid's quadrature, not the sum rule, sets these: standard 1e-6, fine 1e-8
    for densities, tolerance in ((one, 1e-5), (finer, 1e-7)):
        np.testing.assert_allclose(densities.momentum(), 1.0, atol=tolerance)
        np.testing.assert_allclose(densities.number("u"), 2.0, atol=tolerance)
        np.testing.assert_allclose(densities.number("d"), 1.0, atol=tolerance)
        np.testing.assert_allclose(densities.number("s"), 0.0, atol=1e-14)


def test_what_lies_below_the_grid_is_the_integral_there():
    shape = power_law()
    p = moved(shape, 1)
    momentum, numbers = shape.below(p)
    full = dict(zip(shape.names, p, strict=True)) | shape.solved(p)
    c = [full[f"u_v.c{k}"] for k in range(3)]
    with mpmath.workdps(20):
        u_v = mpmath.quad(
            lambda x: x ** (full["u_v.power"] - 1) * (1 - x) ** full["u_v.fall"]
            * (c[0] + c[1] * x + c[2] * x * x), [0, 1e-9, 1e-6, 1e-4],
        )  # fmt: skip
    assert numbers[1] == pytest.approx(float(u_v), rel=1e-9)
    # Momentum: a grid that goes lower, and the rest
    wide = power_law(grid=sw.ChebyshevGrid(x_min=1e-7, resolution="fine"))
    low = sw.Densities(wide.grid, q2=2.0, nf=3, flavours=wide.flavours, values=wide(p))
    between = low.momentum(part="above")[0] - shape.densities(p, q2=2.0, nf=3).momentum(part="above")[0]
    assert momentum == pytest.approx(between + wide.below(p)[0], abs=3e-7)


def test_a_network_keeps_its_sums_to_rounding():
    shape = network()
    for seed in range(5):
        one = shape.densities(moved(shape, seed), q2=2.0, nf=3)
        np.testing.assert_allclose(one.momentum(), 1.0, atol=1e-13)
        np.testing.assert_allclose(one.number("u"), 2.0, atol=1e-13)
        np.testing.assert_allclose(one.number("d"), 1.0, atol=1e-13)


def test_a_network_is_the_chain_of_layers_it_says():
    shape = Network(GRID, {"g": (0.5, 3.0)}, nf=3, hidden=[2], relations=[f"{q} = 0*g" for q in
                    ("u", "d", "s", "ubar", "dbar", "sbar")])  # fmt: skip
    p = dict(zip(shape.names, shape.start, strict=True))
    for node in (0, 20, GRID.nodes - 1):
        x = float(GRID.x[node])
        inputs = (2 * x - 1, 1 + 2 * np.log(x) / np.log(1e4))
        hidden = [np.tanh(sum(p[f"weight[0, {o}, {i}]"] * inputs[i] for i in (0, 1)) + p[f"bias[0, {o}]"])
                  for o in (0, 1)]  # fmt: skip
        out = sum(p[f"weight[1, 0, {i}]"] * hidden[i] for i in (0, 1)) + p["bias[1, 0]"]
        assert shape(shape.start)[0, node] == pytest.approx(x**0.5 * (1 - x) ** 3 * out, rel=1e-12)


def test_a_strange_asymmetry_has_no_number():
    many = {**terms(), "s_v": Term(0.3, 6.0, [0.0, 0.2, -0.1])}
    shape = PowerLaw(
        GRID, many, nf=3, relations=["s+ = dbar"], momentum="g", numbers={"u_v": 2, "d_v": 1, "s_v": 0}
    )
    one = shape.densities(moved(shape, 4), q2=2.0, nf=3)
    np.testing.assert_allclose(one.number("s"), 0.0, atol=1e-7)  # quadrature of the grid: 1e-6 of the size
    assert abs(one.combination("s_v")).max() > 1e-3


def test_relations_hold_at_every_node():
    one = power_law().densities(power_law().start, q2=2.0, nf=3)
    values = {f: one.values[0, place] for place, f in enumerate(one.flavours)}
    np.testing.assert_allclose(values[3], 0.5 * values[-1], rtol=1e-14)
    np.testing.assert_array_equal(values[3], values[-3])


def test_restrictions_move_together():
    shape = SHAPES["restricted"]
    full = dict(zip(shape.shape.names, shape.full(shape.start + 0.1), strict=True))
    assert full["u_v.c1"] == 0.1
    assert full["ubar.power"] == full["dbar.power"]
    assert full["ubar.fall"] == pytest.approx(0.9 * full["dbar.fall"], rel=1e-15)
    assert not {"u_v.c1", "ubar.power", "ubar.fall"} & set(shape.names)


def test_restrictions_can_be_stacked():
    twice = (
        power_law().restricted(fixed=["g.fall"], priors={"u_v.c1": (0.0, 1.0)}).restricted(fixed=["u_v.c2"])
    )
    assert twice.priors == {"u_v.c1": (0.0, 1.0)}
    assert len(twice.names) == len(power_law().names) - 2


def test_a_prior_of_what_is_tied_later_is_not_forgotten():
    known = power_law().restricted(priors={"ubar.power": (-0.1, 0.01)})
    with pytest.raises(InputError, match=r"tied = 'ubar.power': it has a prior"):
        known.restricted(tied={"ubar.power": "dbar.power"})
    assert known.restricted(tied={"dbar.power": "ubar.power"}).priors == {"ubar.power": (-0.1, 0.01)}
    assert known.restricted(fixed=["ubar.power"]).priors == {}  # a constant of chi-square


@pytest.mark.parametrize("name", SHAPES)
def test_shapes_can_be_pickled(name):
    shape = SHAPES[name]
    again = pickle.loads(pickle.dumps(shape, protocol=5))
    np.testing.assert_array_equal(again(shape.start), shape(shape.start))
    assert again.names == shape.names


def test_differences_stay_within_bounds():
    seen = []

    def f(x, p):
        seen.append(p[0])
        return p[0] ** 2 * (1 - x)

    for start in (0.0, 1e-9, 1.0):
        shape = FunctionShape(GRID, [21], f, [start], bounds=(0.0, 1.0))
        # three of five points may lie on one side: error of the fourth derivative, zero here, and rounding
        np.testing.assert_allclose(shape.jacobian([start])[0, 0], 2 * start * (1 - GRID.x), atol=1e-11)
    assert min(seen) >= 0.0
    assert max(seen) <= 1.0


F = FunctionShape
WRONG = {
    "too few": (lambda: PowerLaw(GRID, terms(), nf=3), "nothing determines"),
    "too many": (
        lambda: PowerLaw(
            GRID, terms(), nf=3, relations=["s = dbar", "sbar = dbar", "s = sbar"]),
        "one too many among",
    ),
    "no relation": (lambda: PowerLaw(GRID, terms(), nf=3, relations=["s"]), 'must read "left = right"'),
    "empty relation": (lambda: PowerLaw(GRID, terms(), nf=3, relations=["s = s"]), "both sides are the same"),
    "gluon number": (lambda: power_law(numbers={"g": 1.0}), "only differences of quarks"),
    "sea number": (lambda: power_law(numbers={"ubar": 1.0}), "only differences of quarks"),
    "momentum of a number": (lambda: power_law(momentum="u_v"), "determined by its number already"),
    "unknown term": (lambda: power_law(momentum="gluon"), 'must be a term: .*"?g'),
    "no momentum": (
        lambda: PowerLaw(
            GRID, {"dbar - ubar": Term(0.5, 5), "g": Term(0, 5), "ubar + dbar": Term(0, 7)}, nf=3,
            relations=["u = ubar", "d = dbar", "s = ubar + dbar", "sbar = s"], momentum="dbar - ubar"),
        "carries no momentum",
    ),
    "diverging number": (
        lambda: power_law().restricted(bounds={"u_v.power": (-0.2, 1.0)}), "both must lie in"),
    "diverging start": (lambda: PowerLaw(
        GRID, terms() | {"u_v": Term(-0.1, 3)}, nf=3, relations=["s = dbar", "sbar = s"], numbers={"u_v": 2}),
        r"start\[u_v.power\] = -0.1"),
    "diverging fixed": (lambda: power_law().restricted(fixed={"u_v.power": -0.2}), "must lie in"),
    "diverging tie": (lambda: power_law().restricted(tied={"u_v.power": ("g.power", 1.0)}), "must lie in"),
    "unknown parameter": (lambda: power_law().restricted(fixed=["u_v.powr"]), 'did you mean "u_v.power"'),
    "fixed twice": (lambda: power_law().restricted(fixed=["g.fall"], bounds={"g.fall": (1, 9)}), "or tied"),
    "tied in a ring": (
        lambda: power_law().restricted(tied={"g.fall": "u_v.fall", "u_v.fall": "g.fall"}), "tied itself"),
    "bounds cross": (lambda: power_law().restricted(bounds={"g.fall": (9, 1)}), "must lie below the second"),
    "start outside": (lambda: power_law().restricted(bounds={"g.fall": (8, 9)}), "the start must lie in"),
    "prior of no width": (lambda: power_law().restricted(priors={"g.fall": (5, 0)}), "deviation above 0"),
    "parameters": (lambda: power_law()([1.0]), "the shape of parameters must be"),
    "nan": (lambda: power_law()(np.full(len(power_law().names), np.nan)), "must be finite"),
    "polynomial": (lambda: Term(0, 5, [1], polynomial="legendre"), "polynomial"),
    "degree": (lambda: Term(0, 5, np.ones(10)), "1 to 9 coefficients"),
    "variable": (lambda: Term(0, 5, variable="ln x"), "variable"),
    "function raises": (lambda: F(GRID, [21], lambda x, p: 1 / 0, [1.0])([1.0]), "ZeroDivisionError"),
    "function shape": (lambda: F(GRID, [21, 1], lambda x, p: x, [1.0])([1.0]), "the shape must be"),
    "function nan": (lambda: F(GRID, [21], lambda x, p: x * np.nan, [1.0])([1.0]), "must be finite"),
    "jacobian shape": (
        lambda: function(jacobian=lambda x, p: tilted_derivative(x, p)[0]).jacobian([1, 1, 1]), "shape"),
    "names": (lambda: F(GRID, [21], lambda x, p: x, [1.0], names=["a", "b"]), "1 names"),
    "hidden": (lambda: network(hidden=[0]), "must be from 1 to 64"),
    "network number 0": (lambda: network(numbers={"u_v": 0}), "cannot make it 0"),
    "network power": (lambda: Network(GRID, {"g": (-1.5, 3)}, nf=3), "above -1|nothing determines"),
}  # fmt: skip


@pytest.mark.parametrize("name", WRONG)
def test_what_is_wrong_is_refused_with_the_reason(name):
    make, words = WRONG[name]
    with pytest.raises(InputError, match=words):
        make()
