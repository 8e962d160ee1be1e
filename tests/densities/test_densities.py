"""Densities as objects: axes, scales on thresholds, combinations, copies, texts."""

import copy
import pickle

import numpy as np
import pytest
from densities.inputs import FUNCTIONS, PUBLISHED_FLAVOURS, published
from scalewright import Below, ChebyshevGrid, Densities, InputError, RangeError

Q2 = np.array([2.0, 20.25, 20.25, 1e4])
NF = np.array([4, 4, 5, 5])
FLAVOURS = (21, *range(1, 6), *range(-5, 0))


@pytest.fixture(scope="module")
def grid():
    return ChebyshevGrid(x_min=1e-5)


@pytest.fixture(scope="module")
def one(grid):
    return Densities.sample(grid, q2=2.0, nf=3, functions=FUNCTIONS)


@pytest.fixture(scope="module")
def many(grid):
    values = np.random.default_rng(3).normal(size=(4, 6, 11, grid.nodes))
    below = Below(np.arange(24.0).reshape(4, 6), np.zeros((4, 6, 6)))
    return Densities(grid, q2=Q2, nf=NF, flavours=FLAVOURS, values=values, below=below)


def test_axes_of_one_scale_and_of_many(one, many, grid):
    assert (one.q2, one.nf, one.scales, one.replicas) == (2.0, 3, 1, 1)
    assert one.values.shape == (1, 7, grid.nodes)
    assert (many.scales, many.replicas) == (4, 6) and many.values.shape == (4, 6, 11, grid.nodes)
    assert many.q2.tolist() == Q2.tolist() and many.nf.tolist() == NF.tolist()
    assert many.momentum().shape == (4, 6) and many.number("c").shape == (4, 6)
    assert many.moment(21, 2).shape == (4, 6) and many.combination("sea").shape == (4, 6, grid.nodes)
    assert many.resolution().shape == (4, 6, 11, grid.degrees.size)
    assert one.resolution().shape == (1, 7, grid.degrees.size)


def test_two_axes_make_one_replica(one, grid):
    again = Densities(grid, q2=2.0, nf=3, flavours=one.flavours, values=one.values[0])
    assert again.values.shape == one.values.shape and (again.values == one.values).all()


def test_axes_of_answers_follow_the_question(many):
    assert many.at(2.0, 0.1, 21).shape == (6,)
    assert many.at(2.0, [0.1, 0.2], 21).shape == (6, 2)
    assert many.at([2.0, 1e4], [0.1, 0.2], "u_v").shape == (2, 6, 2)
    assert many.at([2.0], 0.1, "sea").shape == (1, 6)
    assert many.at(1e4, np.full((2, 3), 0.1), 2).shape == (6, 2, 3)


def test_values_between_nodes_are_those_of_the_function(one):
    x = np.array([1e-5, 1e-4, 0.03, 0.3, 0.7])
    # the accuracy promised at standard resolution
    np.testing.assert_allclose(one.at(2.0, x, "gluon")[0], FUNCTIONS[21](x), rtol=1e-6)
    np.testing.assert_allclose(one.at(None, x, "u_v")[0], FUNCTIONS[2](x), rtol=1e-6)


def test_on_a_threshold_the_value_above_is_the_default(many):
    for index, nf in ((1, 4), (2, 5)):
        np.testing.assert_array_equal(
            many.at(20.25, 0.1, 21, nf=nf), many.grid.interpolate(many.values[index, :, 0], 0.1)
        )
        assert many.scale(20.25, nf=nf).nf == nf
    np.testing.assert_array_equal(many.at(20.25, 0.1, 21), many.at(20.25, 0.1, 21, nf=5))
    both = many.at([20.25, 20.25], 0.1, 21, nf=[4, 5])
    np.testing.assert_array_equal(both[0], many.at(20.25, 0.1, 21, nf=4))
    with pytest.raises(RangeError, match=r"nf = 3: at q2 = 20.25 GeV\^2 nf is 4, 5"):
        many.at(20.25, 0.1, 21, nf=3)


def test_a_scale_that_is_not_at_hand_is_refused_by_name(many):
    match = (
        r"q2 = 50 at index 1: not among the scales at hand, 2, 20.25, 20.25, 10000 GeV\^2; operators serve"
    )
    with pytest.raises(RangeError, match=match):
        many.at([2.0, 50.0], 0.1, 21)
    assert many.at(1e4 * (1 + 1e-13), 0.1, 21).shape == (6,)


def test_one_scale_is_a_view_with_what_lies_below(many):
    part = many.scale(1e4)
    assert (part.q2, part.nf, part.replicas) == (1e4, 5, 6)
    assert np.shares_memory(part.values, many.values)
    assert part.below.momentum.tolist() == many.below.momentum[3:].tolist()
    with pytest.raises(InputError, match="q2 = None: q2 must be given: there are 4 scales"):
        many.scale(None)


def test_combinations_are_sums_of_flavours(many):
    quarks = range(1, 6)
    plus = sum(many.values[:, :, FLAVOURS.index(q)] + many.values[:, :, FLAVOURS.index(-q)] for q in quarks)
    minus = sum(many.values[:, :, FLAVOURS.index(q)] - many.values[:, :, FLAVOURS.index(-q)] for q in quarks)
    # sums of ten numbers of order one
    np.testing.assert_allclose(many.combination("singlet"), plus, rtol=0, atol=1e-14)
    np.testing.assert_allclose(many.combination("valence"), minus, rtol=0, atol=1e-14)
    np.testing.assert_allclose(many.combination("sea"), plus - minus, rtol=0, atol=1e-14)


def test_a_flavour_that_is_not_held_is_not_zero(grid):
    made = Densities.sample(grid, 2.0, 3, {21: FUNCTIONS[21], 2: FUNCTIONS[2]})
    with pytest.raises(InputError, match="flavour = 'u_v': these densities do not hold ubar, only g, u"):
        made.at(2.0, 0.1, "u_v")
    with pytest.raises(InputError, match="flavour = 'singlet': these densities do not hold d, s, dbar"):
        made.combination("singlet")
    with pytest.raises(InputError, match="flavour = 4: these densities do not hold c"):
        made.at(2.0, 0.1, 4)


def test_one_function_of_flavour_x_and_scale_makes_many_scales(grid):
    def evolving(flavour, x, q2):
        return np.log(q2 + 2) * published(flavour, x)

    made = Densities.from_function(evolving, grid, [2.0, 8.0], [3, 4], PUBLISHED_FLAVOURS)
    assert made.values.shape == (2, 1, 7, grid.nodes) and made.below.number.shape == (2, 1, 6)
    np.testing.assert_allclose(made.momentum()[1] / made.momentum()[0], np.log(10) / np.log(4), rtol=1e-14)


def test_a_function_may_write_to_its_x(grid):
    def careless(x):
        x -= 1.0
        return -x

    made = Densities.sample(grid, 2.0, 3, {21: careless})
    np.testing.assert_array_equal(made.values[0, 0], 1.0 - grid.x)


def test_layout_of_memory_changes_no_bit(many, grid):
    values = np.array(many.values)
    spaced = np.zeros((*values.shape[:-1], 2 * grid.nodes))[..., ::2]
    spaced[...] = values
    frozen = values.copy()
    frozen.flags.writeable = False
    layouts = {
        "fortran": np.asfortranarray(values),
        "big-endian": values.astype(">f8"),
        "strided": spaced,
        "reversed": np.ascontiguousarray(values[..., ::-1])[..., ::-1],
        "read-only": frozen,
        "list": values.tolist(),
        "longdouble": values.astype(np.longdouble),
        "masked, nothing masked": np.ma.masked_invalid(values),
    }
    for name, layout in layouts.items():
        made = Densities(grid, q2=Q2, nf=NF, flavours=FLAVOURS, values=layout, below=many.below)
        assert made == many, name
        assert made.values.flags.c_contiguous and made.values.dtype == np.float64
    single = Densities(grid, q2=Q2, nf=NF, flavours=FLAVOURS, values=values.astype(np.float32))
    np.testing.assert_array_equal(single.values, values.astype(np.float32))
    whole = Densities(grid, q2=2, nf=3, flavours=[21], values=np.ones((1, grid.nodes), dtype=np.int32))
    assert (whole.values == 1.0).all()


def test_an_array_that_fits_is_not_copied_and_stays_writable(grid):
    values = np.ones((5, 1, grid.nodes))
    made = Densities(grid, q2=2.0, nf=3, flavours=(21,), values=values)
    assert np.shares_memory(made.values, values) and values.flags.writeable
    with pytest.raises(ValueError, match="read-only"):
        made.values[0] = 0.0


@pytest.mark.parametrize("protocol", range(2, pickle.HIGHEST_PROTOCOL + 1))
def test_pickle_and_copies_are_equal(one, many, protocol):
    for made in (one, many):
        for other in (pickle.loads(pickle.dumps(made, protocol)), copy.copy(made), copy.deepcopy(made)):
            assert other == made and repr(other) == repr(made)
            assert not other.values.flags.writeable


def test_protocol_five_passes_the_values_out_of_band(many):
    buffers = []
    text = pickle.dumps(many, 5, buffer_callback=buffers.append)
    assert len(text) < many.values.nbytes / 4
    assert pickle.loads(text, buffers=buffers) == many


def test_differing_densities_differ(one, many, grid):
    assert one != many and one != "one"
    other = Densities(grid, q2=2.0, nf=3, flavours=one.flavours, values=one.values, below=one.below)
    assert other == one
    assert Densities(grid, q2=2.0, nf=4, flavours=one.flavours, values=one.values, below=one.below) != one
    assert Densities(grid, q2=2.0, nf=3, flavours=one.flavours, values=one.values) != one


def test_texts_say_scales_flavours_and_replicas(one, many):
    assert repr(one) == f"Densities(1 replica, 7 flavours, q2=2 GeV^2, nf=3, {one.grid.nodes} nodes)"
    assert "6 replicas, 11 flavours, 4 scales" in repr(many)
    for made in (one, many):
        assert "\n" not in repr(made)
        assert made._repr_html_().count("<tr>") == 7 == len(str(made).splitlines()) - 1
    assert "g, d, dbar" in str(one) and "momentum and quark numbers known" in str(one)


@pytest.mark.parametrize("suffix", ["one", "many", "list of one", "unknown below"])
def test_what_is_saved_is_loaded(tmp_path, one, many, grid, suffix):
    made = {
        "one": one,
        "many": many,
        "list of one": Densities(grid, q2=[2.0], nf=[3], flavours=one.flavours, values=one.values[None]),
        "unknown below": Densities(grid, q2=2.0, nf=3, flavours=one.flavours, values=one.values),
    }[suffix]
    path = tmp_path / "set.h5"
    made.save(path)
    for copied in (False, True):
        other = Densities.load(path, copy=copied)
        assert other == made and other.grid == made.grid
