"""Sum rules and resolution: against Beta functions and scipy's quadrature."""

import numpy as np
import pytest
from densities.inputs import FUNCTIONS, MOMENTUM, NUMBER, POWERS, PUBLISHED_FLAVOURS, power, published
from scalewright import ChebyshevGrid, Densities, ResolutionWarning
from scipy.integrate import quad
from scipy.special import beta, betainc, betaincc

# Interpolation at standard resolution is good to 1e-6 at x <= 0.9 at worst, and to 1e-7 in an integral, where
# errors of both signs meet.
STANDARD = 1e-7


@pytest.fixture(scope="module")
def grid():
    return ChebyshevGrid(x_min=1e-5)


@pytest.fixture(scope="module")
def one(grid):
    return Densities.sample(grid, q2=2.0, nf=3, functions=FUNCTIONS)


def test_momentum_above_and_below_is_the_beta_function(one):
    assert one.momentum() == pytest.approx(MOMENTUM, rel=STANDARD)
    assert one.momentum().shape == (1,)
    above = sum(n * beta(a + 1, b + 1) * betaincc(a + 1, b + 1, 1e-5) for n, a, b in POWERS.values())
    assert one.momentum(part="above") == pytest.approx(above, rel=STANDARD)


@pytest.mark.parametrize("quark", [1, 2, 3, "d", "u", "s"])
def test_number_above_and_below_is_the_beta_function(one, quark):
    exact = NUMBER[{"d": 1, "u": 2, "s": 3}.get(quark, quark)]
    assert one.number(quark) == pytest.approx(exact, rel=STANDARD, abs=1e-15)
    assert abs(one.number(quark, part="above")) <= abs(one.number(quark))


def test_what_lies_below_is_integrated_to_rounding(one):
    # integrals over powers of x near zero: 1e-13 is a few hundred roundings of terms of one sign
    for quark, (amount, a, b) in ((1, POWERS[1]), (2, POWERS[2])):
        exact = amount * beta(a, b + 1) * betainc(a, b + 1, 1e-5)
        assert one.below.number[0, 0, quark - 1] == pytest.approx(exact, rel=1e-13)
    exact = sum(n * beta(a + 1, b + 1) * betainc(a + 1, b + 1, 1e-5) for n, a, b in POWERS.values())
    assert one.below.momentum[0, 0] == pytest.approx(exact, rel=1e-13)
    by_quad = sum(quad(f, 0, 1e-5, epsabs=0, epsrel=1e-10)[0] for f in FUNCTIONS.values())
    assert one.below.momentum[0, 0] == pytest.approx(by_quad, rel=1e-9)  # asked of quad, times the flavours


def test_published_toy_input_keeps_its_sum_rules():
    # its normalisations are printed with seven digits; numbers 2 and 1 and momentum 1 (hep-ph/0204316)
    grid = ChebyshevGrid(1e-7)
    toy = Densities.from_function(published, grid, q2=2.0, nf=3, flavours=PUBLISHED_FLAVOURS)
    assert toy.number("u") == pytest.approx(2.0, abs=1e-6)
    assert toy.number("d") == pytest.approx(1.0, abs=1e-6)
    assert toy.momentum() == pytest.approx(1.0, abs=1e-6)


def test_a_valence_that_drowns_in_a_steep_sea_is_still_integrated(grid):
    # q - qbar loses all its digits where 2 x^0.3 is the rounding of two seas 5 x^-0.4, a few units of 2^-53,
    # say 1e-15; what the valence has below that x is the tolerance
    sea, valence = power(5.0, -0.4, 7.0), power(2.0, 0.3, 3.0)
    functions = {2: lambda x: sea(x) + valence(x), -2: sea}
    made = Densities.sample(grid, q2=2.0, nf=3, functions=functions)
    exact = 2.0 * beta(0.3, 4.0) * betainc(0.3, 4.0, 1e-5)
    drowned = (1e-15 * 10.0 / 2.0) ** (1 / 0.7)
    assert made.below.number[0, 0, 1] == pytest.approx(exact, rel=0, abs=2.0 / 0.3 * drowned**0.3)


def test_an_integral_that_diverges_is_unknown_and_says_so(grid):
    functions = {21: power(1.0, -1.2, 5.0), 1: power(1.0, -0.2, 5.0), -1: power(0.5, -0.2, 5.0)}
    made = Densities.sample(grid, q2=2.0, nf=3, functions=functions)
    assert np.isnan(made.below.momentum).all() and np.isnan(made.below.number[0, 0, 0])
    assert (made.below.number[0, 0, 1:] == 0.0).all()
    with pytest.warns(ResolutionWarning, match=r"momentum: above x_min = .* only"):
        assert made.momentum() == made.momentum(part="above")
    with pytest.warns(ResolutionWarning, match=r"number\(1\): above x_min = .* only"):
        made.number(1)


def test_arrays_know_nothing_below_and_say_so(one, grid):
    many = Densities(grid, q2=2.0, nf=3, flavours=one.flavours, values=np.repeat(one.values, 3, axis=0))
    assert many.below is None
    with pytest.warns(ResolutionWarning, match="what lies below is not known") as caught:
        momentum = many.momentum()
    assert caught[0].filename == __file__
    np.testing.assert_array_equal(momentum, np.repeat(one.momentum(part="above"), 3))
    assert many.momentum(part="above").shape == (3,)


@pytest.mark.parametrize(("flavour", "amount", "a", "b"), [(21, *POWERS[21]), ("u_v", *POWERS[2])])
@pytest.mark.parametrize("N", [2, 3, 4.5, 8])
def test_moments_are_beta_functions(one, flavour, amount, a, b, N):
    exact = amount * beta(a + N - 1, b + 1) * betaincc(a + N - 1, b + 1, 1e-5)
    assert one.moment(flavour, N) == pytest.approx(exact, rel=STANDARD)


def test_second_moment_of_everything_is_the_momentum(one):
    total = one.moment("g", 2) + one.moment("singlet", 2)
    assert total == pytest.approx(one.momentum(part="above"), rel=1e-14)  # the same sum in another order


def test_estimated_resolution_bounds_the_true_error():
    grid = ChebyshevGrid(1e-6)
    random = np.random.default_rng(5)
    u = np.linspace(0.05, grid.u[-1], 1500)
    x = np.exp(-u)
    cards = grid.cardinals(x)
    panel = np.clip(np.searchsorted(grid.edges, u, side="left") - 1, 0, grid.degrees.size - 1)
    for _ in range(100):
        a, b, c = random.uniform(-0.4, 0.8), random.uniform(1.5, 10), random.uniform(-1, 3)
        function = lambda y, a=a, b=b, c=c: y**a * (1 - y) ** b * (1 + c * np.sqrt(y))  # noqa: E731
        made = Densities(grid, q2=2.0, nf=3, flavours=(21,), values=function(grid.x)[None])
        estimate = made.resolution()[0, 0]
        error = abs(cards @ made.values[0, 0] - function(x))
        for p in range(grid.degrees.size):
            inside = panel == p
            true = error[inside].max() / abs(function(x[inside])).max()
            # never less than a third of the true error; 1e-13 is rounding
            assert estimate[p] >= true / 3 - 1e-13


def test_a_kink_is_reported(grid):
    with pytest.warns(ResolutionWarning, match=r"g is resolved to .* in x = .*, not to 1e-06") as caught:
        made = Densities.sample(grid, 2.0, 3, {21: lambda x: abs(x - 0.2) * (1 - x)})
    assert caught[0].filename == __file__
    assert made.resolution().shape == (1, 1, grid.degrees.size)
    assert made.resolution().max() > 1e-4


def test_a_density_that_vanishes_is_resolved(grid):
    made = Densities.sample(grid, 2.0, 3, {21: lambda x: 0.0})
    assert (made.resolution() == 0.0).all() and (made.momentum() == 0.0).all()
