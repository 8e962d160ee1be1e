"""Applying operators, against plain numpy products of their blocks, and laws that hold for any input."""

import numpy as np
import pytest
import scalewright as sw
from apply.toy import functions

EPS = 2.0**-52
QUARKS = {4: "charm", 5: "bottom", 6: "top"}


def plain(ops, scale, values, flavours):
    """The blocks by their names, as products of numpy; written from their description, not from the core."""
    block = dict(zip(ops.block_names, ops.blocks[scale], strict=True))
    at = {flavour: values[:, place] for place, flavour in enumerate(flavours)}
    light = range(1, ops.light + 1)
    plus = {q: at[q] + at[-q] for q in light}
    minus = {q: at[q] - at[-q] for q in light}
    singlet, valence = sum(plus.values()), sum(minus.values())
    ns_minus = block.get("ns-", block["ns+"])
    common = block.get("light-<-light-", ns_minus)
    made = {21: at[21] @ block["gluon<-gluon"].T + singlet @ block["gluon<-light+"].T}
    all_plus = at[21] @ block["light+<-gluon"].T + singlet @ block["light+<-light+"].T
    for q in light:
        p = (plus[q] - singlet / ops.light) @ block["ns+"].T + all_plus / ops.light
        m = (minus[q] - valence / ops.light) @ ns_minus.T + valence @ common.T / ops.light
        made[q], made[-q] = (p + m) / 2, (p - m) / 2
    for h in range(ops.light + 1, int(ops.nf[scale]) + 1):
        name = QUARKS[h]
        p = at[21] @ block[f"{name}+<-gluon"].T + singlet @ block[f"{name}+<-light+"].T
        m = valence @ block[f"{name}-<-light-"].T if f"{name}-<-light-" in block else 0.0
        made[h], made[-h] = (p + m) / 2, (p - m) / 2
    return made


def test_result_is_the_product_of_the_blocks(ops, many):
    evolved = ops.apply(many)
    for scale in range(ops.q2.size):
        for flavour, expected in plain(ops, scale, many.values, many.flavours).items():
            found = evolved.values[scale, :, evolved.flavours.index(flavour)]
            # a few hundred terms summed in another order: rounding times their number
            size = abs(expected).max()
            np.testing.assert_allclose(
                found, expected, rtol=0, atol=300 * EPS * max(size, abs(many.values).max())
            )


def test_flavours_that_are_not_active_are_zero(ops, many):
    evolved = ops.apply(many, flavours=[4, -4, 5, -5, 6, 21])
    inactive = [(0, f) for f in (4, -4, 5, -5)] + [(s, f) for s in (1,) for f in (5, -5)]
    for scale, flavour in inactive:
        assert abs(evolved.nf[scale]) < abs(flavour)
        assert not evolved.values[scale, :, evolved.flavours.index(flavour)].any()
    assert not evolved.values[:, :, evolved.flavours.index(6)].any()
    assert evolved.values[:, :, evolved.flavours.index(21)].any()


def test_at_the_start_nothing_changes(ops, many):
    evolved = ops.apply(many)
    assert ops.q2[0] == ops.start_q2
    for place, flavour in enumerate(many.flavours):
        found = evolved.values[0, :, evolved.flavours.index(flavour)]
        np.testing.assert_allclose(
            found, many.values[:, place], rtol=0, atol=20 * EPS * abs(many.values).max()
        )


def test_replicas_one_by_one_make_the_same_bits(ops, many, grid):
    together = ops.apply(many).values
    for i in range(many.replicas):
        one = sw.Densities(grid, q2=2.0, nf=3, flavours=many.flavours, values=many.values[i])
        np.testing.assert_array_equal(ops.apply(one).values[:, 0], together[:, i])


def test_replicas_may_stand_in_any_order_and_number(ops, many, grid):
    together = ops.apply(many).values
    order = np.random.default_rng(0).permutation(np.tile(np.arange(7), 40))
    shuffled = sw.Densities(grid, q2=2.0, nf=3, flavours=many.flavours, values=many.values[order])
    np.testing.assert_array_equal(ops.apply(shuffled).values, together[:, order])


def test_flavours_may_stand_in_any_order(ops, many, grid):
    order = [3, 0, 6, 1, 5, 2, 4]
    flavours = [many.flavours[i] for i in order]
    turned = sw.Densities(grid, q2=2.0, nf=3, flavours=flavours, values=many.values[:, order])
    np.testing.assert_array_equal(ops.apply(turned).values, ops.apply(many).values)


def test_sums_are_carried_to_sums(ops, many, grid):
    mixed = np.einsum("r,rfn->fn", np.arange(7.0) - 2, many.values)
    one = ops.apply(sw.Densities(grid, q2=2.0, nf=3, flavours=many.flavours, values=mixed)).values[:, 0]
    expected = np.einsum("r,srfn->sfn", np.arange(7.0) - 2, ops.apply(many).values)
    np.testing.assert_allclose(one, expected, rtol=0, atol=2000 * EPS * abs(expected).max())


def test_stream_is_apply_scale_by_scale(ops, many):
    whole = ops.apply(many)
    parts = list(ops.stream(many))
    assert [(part.q2, part.nf) for part in parts] == list(zip(ops.q2, ops.nf, strict=True))
    for scale, part in enumerate(parts):
        places = [whole.flavours.index(flavour) for flavour in part.flavours]
        np.testing.assert_array_equal(part.values, whole.values[scale][:, places])


def test_scales_in_between_are_served_by_a_live_set(ops, theory, grid, many):
    other = sw.build_operators(theory, grid, start_q2=2.0, q2=[37.0, 1e4]).apply(many)
    found = ops.apply(many, q2=37.0)
    scale = abs(other.values).max()
    # both within the tolerance of the steps, 1e-8, of the truth
    places = [other.flavours.index(flavour) for flavour in found.flavours]
    np.testing.assert_allclose(found.values[0], other.values[0][:, places], rtol=0, atol=2e-8 * scale)


def test_flavours_missing_may_be_zero(ops, start, grid):
    part = sw.Densities.sample(grid, q2=2.0, nf=3, functions={21: functions()[21]})
    filled = {flavour: (lambda x: 0 * x) for flavour in start.flavours} | {21: functions()[21]}
    expected = ops.apply(sw.Densities.sample(grid, q2=2.0, nf=3, functions=filled))
    np.testing.assert_array_equal(ops.apply(part, missing="zero").values, expected.values)


def test_result_goes_where_it_is_told(ops, many):
    expected = ops.apply(many)
    out = np.full(expected.values.shape, np.nan)
    evolved = ops.apply(many, out=out)
    assert np.shares_memory(evolved.values, out)
    np.testing.assert_array_equal(out, expected.values)


# ---- refusals -------------------------------------------------------------------------------------


def changed(many, grid, **options):
    parts = {"q2": 2.0, "nf": 3, "flavours": many.flavours, "values": many.values} | options
    return sw.Densities(grid, **parts)


def test_what_does_not_fit_is_refused(ops, many, grid):
    other = sw.ChebyshevGrid(x_min=1e-4)
    values = np.ones((7, other.nodes))
    foreign = sw.Densities(other, q2=2.0, nf=3, flavours=many.flavours, values=values)
    cases = [
        (
            foreign,
            {},
            sw.InputError,
            r"densities\.grid = ChebyshevGrid.*: the operators are for ChebyshevGrid",
        ),
        (
            changed(many, grid, q2=2.1),
            {},
            sw.InputError,
            r"densities\.q2 = 2\.1: the operators start from 2 GeV",
        ),
        (changed(many, grid, nf=4), {}, sw.InputError, r"densities\.nf = 4: the operators start from nf = 3"),
        (ops.apply(many), {}, sw.InputError, r"densities have 4 scales: the operators start from one, 2 GeV"),
        (np.ones(3), {}, sw.InputError, r"densities must be Densities, not ndarray"),
        (many, {"q2": 1.0}, sw.RangeError, r"1"),
        (many, {"q2": 2e4}, sw.RangeError, r"20000"),
        (many, {"q2": -1.0}, sw.InputError, r"q2 = -1: q2 must lie in \(0, inf\) GeV\^2"),
        (many, {"q2": [10.0, 10.0]}, sw.InputError, r"q2 = 10 at index 1: the scale .* stands at index 0"),
        (many, {"nf": 4}, sw.InputError, r"nf: give q2 with it"),
        (many, {"flavours": [22]}, sw.InputError, r"flavours = 22 at index 0"),
        (many, {"threads": 0}, sw.InputError, r"threads = 0: threads must be from 1 to 4096"),
        (
            many,
            {"missing": "none"},
            sw.InputError,
            r'missing = \'none\': missing must be one of "error", "zero"',
        ),
    ]
    for densities, options, error, says in cases:
        with pytest.raises(error, match=says):
            ops.apply(densities, **options)
        with pytest.raises(error, match=says):
            list(ops.stream(densities, **options))


def test_a_flavour_that_is_active_must_be_there(ops, many, grid):
    part = changed(many, grid, flavours=many.flavours[:5], values=many.values[:, :5])
    with pytest.raises(
        sw.InputError, match=r'no flavour 3, -3, active at nf = 3: give them, or .*missing="zero"'
    ):
        ops.apply(part)


def test_a_flavour_that_is_not_active_must_be_zero(ops, many, grid):
    values = np.concatenate([many.values, many.values[:, :1]], axis=1)
    heavy = changed(many, grid, flavours=(*many.flavours, 4), values=values)
    with pytest.raises(
        sw.InputError, match=r"flavours = 4: not active at nf = 3 and not zero: .*intrinsic=\(4,\)"
    ):
        ops.apply(heavy)
    values[:, -1] = 0.0
    empty = changed(many, grid, flavours=(*many.flavours, 4), values=values)
    np.testing.assert_array_equal(ops.apply(empty).values, ops.apply(many).values)


def test_a_place_that_does_not_fit_is_refused(ops, many):
    shape = ops.apply(many).values.shape
    frozen = np.empty(shape)
    frozen.flags.writeable = False
    cases = [
        (np.empty(shape[1:]), r"out must have the shape"),
        (np.empty(shape, np.float32), r"out must hold float64"),
        (np.empty(shape, ">f8"), r"out must hold float64"),
        (np.empty(shape[::-1]).T, r"out must be C-ordered"),
        (frozen, r"out must be C-ordered, aligned and writeable"),
        ([1.0], r"out must be an array, not list"),
    ]
    for out, says in cases:
        with pytest.raises(sw.InputError, match=says):
            ops.apply(many, out=out)


def test_a_place_within_the_input_is_refused(ops, grid, many):
    one = ops.apply(many, q2=[10.0], flavours=many.flavours)
    room = np.concatenate([many.values[np.newaxis]] * 2)
    inside = sw.Densities(grid, q2=2.0, nf=3, flavours=many.flavours, values=room[0])
    if not np.shares_memory(inside.values, room):
        pytest.skip("the densities have copied what they were given")
    with pytest.raises(sw.InputError, match="out must not share memory"):
        ops.apply(inside, q2=[10.0], flavours=many.flavours, out=room[:1])
    np.testing.assert_array_equal(
        ops.apply(inside, q2=[10.0], flavours=many.flavours, out=room[1:]).values, one.values
    )


def test_threads_of_the_environment_must_be_a_number(ops, many, monkeypatch):
    expected = ops.apply(many, threads=1).values
    monkeypatch.setenv("SCALEWRIGHT_THREADS", "2")
    np.testing.assert_array_equal(ops.apply(many).values, expected)
    monkeypatch.setenv("SCALEWRIGHT_THREADS", "many")
    with pytest.raises(sw.InputError, match="SCALEWRIGHT_THREADS = 'many': the environment variable must be"):
        ops.apply(many)


def test_a_stream_into_one_place_gives_the_same(ops, many):
    apart = [part.values.copy() for part in ops.stream(many)]
    shape = (2, *apart[0].shape)
    together = [part.values.copy() for part in ops.stream(many, out=np.empty(shape))]
    np.testing.assert_array_equal(np.stack(together), np.stack(apart))
    with pytest.raises(sw.InputError, match="out must have the shape"):
        ops.stream(many, out=np.empty(shape[1:]))
