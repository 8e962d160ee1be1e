"""Operators as objects: composing, storing, copying, printing, comparing."""

import copy
import pickle

import numpy as np
import pytest
import scalewright as sw
from apply.toy import functions


def close(found, expected, tolerance):
    """Agreement relative to the largest value."""
    np.testing.assert_allclose(found, expected, rtol=0, atol=tolerance * abs(expected).max())


@pytest.fixture(scope="module")
def halves(theory, grid):
    first = sw.build_operators(theory, grid, start_q2=2.0, q2=[10.0])
    second = sw.build_operators(theory, grid, start_q2=10.0, q2=[100.0, 1e4])
    return first, second


def test_two_steps_are_one(halves, ops, many):
    first, second = halves
    both = second @ first
    assert (both.start_q2, both.start_nf) == (2.0, 3)
    np.testing.assert_array_equal(both.q2, second.q2)
    evolved, whole = both.apply(many), ops.apply(many, q2=second.q2)
    assert evolved.flavours == whole.flavours
    close(evolved.values, whole.values, 2e-8)  # both within the tolerance of the steps, 1e-8
    in_turn = second.apply(first.apply(many).scale(None))
    close(evolved.values, in_turn.values, 1e-12)  # the same products in another order


def test_what_flowed_below_adds_up(halves, start):
    first, second = halves
    in_turn = second.apply(first.apply(start).scale(None)).below
    both = second.after(first).apply(start).below
    # sums of 10^2 terms of either sign, of order 1
    np.testing.assert_allclose(both.momentum, in_turn.momentum, rtol=0, atol=1e-12)
    np.testing.assert_allclose(both.number[..., :5], in_turn.number[..., :5], rtol=0, atol=1e-12)


def test_steps_that_do_not_fit_are_refused(halves, ops, theory, grid):
    first, second = halves
    elsewhere = sw.build_operators(theory, grid, start_q2=20.0, q2=[50.0])
    coarse = sw.build_operators(theory, sw.ChebyshevGrid(1e-3), start_q2=10.0, q2=[50.0])
    other = sw.build_operators(sw.Theory(order="LO"), grid, start_q2=10.0, q2=[50.0])
    down = sw.build_operators(theory, grid, start_q2=5.0, start_nf=4, q2=[10.0], nf=[3])
    fewer = sw.build_operators(theory, grid, start_q2=10.0, start_nf=3, q2=[50.0])
    with pytest.raises(sw.RangeError, match=r"20"):
        elsewhere.after(first)
    with pytest.raises(sw.InputError, match=r"first\.grid = .*: the second set is for"):
        coarse.after(first)
    with pytest.raises(sw.InputError, match=r"first\.theory differs"):
        other.after(first)
    with pytest.raises(sw.InputError, match=r"flavour 4 arrives at 10 GeV\^2 \(nf = 3\)"):
        fewer.after(down)
    with pytest.raises(sw.InputError, match=r"first must be Operators, not int"):
        second.after(3)
    with pytest.raises(TypeError):
        second @ 3


def test_stored_operators_come_back_to_the_bit(ops, many, tmp_path):
    ops.save(tmp_path / "ops.h5")
    for copied in (False, True):
        again = sw.Operators.load(tmp_path / "ops.h5", copy=copied)
        assert again == ops
        assert hash(again) == hash(ops)
        np.testing.assert_array_equal(again.blocks, ops.blocks)
        np.testing.assert_array_equal(again.apply(many).values, ops.apply(many).values)
        np.testing.assert_array_equal(again.apply(many, q2=100.0).values, ops.apply(many, q2=100.0).values)
    again.save(tmp_path / "again.h5")
    assert (tmp_path / "again.h5").read_bytes() == (tmp_path / "ops.h5").read_bytes()


def test_below_is_stored_with_them(ops, start, tmp_path):
    ops.save(tmp_path / "ops.h5")
    assert sw.Operators.load(tmp_path / "ops.h5").apply(start).below == ops.apply(start).below


def test_stored_operators_serve_what_they_hold(ops, many, tmp_path):
    ops.save(tmp_path / "ops.h5")
    again = sw.Operators.load(tmp_path / "ops.h5")
    with pytest.raises(sw.RangeError, match=r"q2 = 50 \(nf = 5\): these operators hold 2 \(nf = 3\), 10"):
        again.apply(many, q2=50.0)


def test_what_is_not_operators_is_refused(start, tmp_path):
    start.save(tmp_path / "start.h5")
    with pytest.raises(sw.StoreError, match=r"start\.h5: holds densities, not operators"):
        sw.Operators.load(tmp_path / "start.h5")


def test_sealed_but_wrong_arrays_are_refused(ops, tmp_path):
    from scalewright.files import hdf5

    ops.save(tmp_path / "ops.h5")
    arrays, notes = hdf5.read(tmp_path / "ops.h5", "operators")
    changes = [
        {"/scales/nf": arrays["/scales/nf"][:2]},
        {"/blocks/values": arrays["/blocks/values"][:, :-1]},
        {"/grid/edges": arrays["/grid/edges"][::-1]},
        {"/theory": np.array("{}x")},
        {"/flows/values": np.zeros(3)},
    ]
    for change in changes:
        hdf5.write(tmp_path / "bad.h5", "operators", arrays | change, notes)
        with pytest.raises(sw.StoreError, match=r"bad\.h5: sealed, but not operators as we write them"):
            sw.Operators.load(tmp_path / "bad.h5")
    del arrays["/blocks/names"]
    hdf5.write(tmp_path / "bad.h5", "operators", arrays, notes)
    with pytest.raises(sw.StoreError, match=r"bad\.h5: sealed, but not operators"):
        sw.Operators.load(tmp_path / "bad.h5")


@pytest.mark.parametrize("protocol", range(2, pickle.HIGHEST_PROTOCOL + 1))
def test_pickled_operators_are_the_same(ops, many, protocol):
    again = pickle.loads(pickle.dumps(ops, protocol))
    assert again == ops
    np.testing.assert_array_equal(again.apply(many).values, ops.apply(many).values)
    assert repr(again) == repr(ops)


def test_large_arrays_are_pickled_without_a_copy(ops):
    parts = []
    pickle.dumps(ops, 5, buffer_callback=parts.append)
    assert sum(part.raw().nbytes for part in parts) >= ops.blocks.nbytes


def test_a_copy_is_itself(ops):
    assert copy.copy(ops) is ops
    assert copy.deepcopy(ops) is ops


def test_operators_that_differ_are_not_equal(ops, halves):
    assert ops != halves[0]
    assert ops != "ops"


def test_nothing_can_be_changed(ops):
    for array in (ops.blocks, ops.q2, ops.nf):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 0
    with pytest.raises(AttributeError):
        ops.q2 = [1.0]


def test_printing(ops, halves):
    assert repr(ops).startswith(
        "Operators(NNLO, 2 GeV^2 (nf = 3) -> 4 scales from 2 to 10000 GeV^2 (nf = 3 to 5)"
    )
    assert "any scale in between" in str(ops)
    assert "these scales only" in str(halves[1] @ halves[0])
    assert len(str(ops).splitlines()) <= 12
    assert max(map(len, str(ops).splitlines())) <= 140
    assert ops._repr_html_().count("<tr>") == len(str(ops).splitlines()) - 1
    assert "<-" not in ops._repr_html_()


def test_a_route_may_begin_below_its_threshold(theory, grid, start):
    """The published benchmark does: three flavours on the charm threshold."""
    on = sw.Theory(order="NNLO", coupling=theory.coupling, thresholds_q2=(2.0, 20.0, 3e4))
    lower = sw.build_operators(on, grid, start_q2=2.0, start_nf=3, q2=[2.0, 2.0], nf=[3, 4])
    evolved = lower.apply(start)
    close(evolved.at(2.0, grid.x, "g", nf=3), start.at(2.0, grid.x, "g"), 1e-14)
    charm = evolved.at(2.0, [1e-3], "c+", nf=4)
    assert abs(charm).max() > 0.0  # heavy matching at a^2 on the threshold


@pytest.mark.parametrize(
    ("options", "says"),
    [
        ({"start_q2": 0.0}, r"start_q2 = 0: start_q2 must lie in \(0, inf\) GeV\^2"),
        ({"start_q2": "2"}, r"start_q2 = '2': start_q2 must be real numbers, not text"),
        ({"q2": []}, r"q2 must hold at least one scale"),
        ({"q2": [10.0, np.nan]}, r"q2 = nan at index 1: q2 must be finite"),
        ({"q2": [10.0, 10.0]}, r"q2 = 10 at index 1: the scale with nf = 4 stands at index 0 already"),
        ({"start_nf": 6}, r"start_nf = 6: the theory has 3 to 5 flavours"),
        ({"nf": [7]}, r"nf = 7 at index 0: nf must be from 3 to 6"),
        ({"nf": [6]}, r"nf = 6 at index 0: the theory has 3 to 5 flavours"),
        ({"nf": [4, 4]}, r"nf must be one number or 1 of them"),
        ({"intrinsic": [3]}, r"intrinsic = 3 at index 0: intrinsic must be heavy flavours from 4 to 6"),
        ({"tolerance": 0.0}, r"tolerance = 0: tolerance must lie in \[1e-14, 0\.01\]"),
        ({"threads": -1}, r"threads = -1"),
        ({"progress": "yes"}, r"progress = 'yes': progress must be True, False or a callable"),
        ({"further_orders": [3]}, r"further_orders = 3 at index 0: must be a mapping"),
        ({"further_orders": [{"ns": 3}]}, r"further_orders\[0\] = 'ns': .* must be one of \"ns\+\""),
        ({"further_orders": [{"gg": 3}]}, r"further_orders\[0\]\['gg'\] = 3: must be a SplittingKernel"),
    ],
)
def test_what_cannot_be_built_is_named(theory, grid, options, says):
    with pytest.raises(sw.InputError, match=says):
        sw.build_operators(theory, grid, **({"start_q2": 2.0, "q2": [10.0]} | options))


def test_kinds_are_checked(theory, grid):
    with pytest.raises(sw.InputError, match="theory must be a Theory, not ChebyshevGrid"):
        sw.build_operators(grid, theory, start_q2=2.0, q2=[10.0])
    with pytest.raises(sw.InputError, match="grid must be a ChebyshevGrid, not str"):
        sw.build_operators(theory, "standard", start_q2=2.0, q2=[10.0])


def test_progress_is_told(theory, grid):
    seen = []
    sw.build_operators(theory, grid, start_q2=2.0, q2=[10.0, 1e4], progress=lambda *n: seen.append(n))
    done, total = zip(*seen, strict=True)
    assert list(done) == sorted(done)
    assert done[-1] == total[-1] == max(total)


def test_a_callable_that_raises_ends_the_build(theory, grid):
    def stop(done, total):
        raise ZeroDivisionError("enough")

    with pytest.raises(ZeroDivisionError, match="enough"):
        sw.build_operators(theory, grid, start_q2=2.0, q2=[1e4], progress=stop)


def test_an_order_of_ones_own_acts(theory, grid, start):
    """Pure gluon loss at a^4: the change is -a^4 times the local part, integrated over ln mu^2."""
    lower = sw.build_operators(theory, grid, start_q2=2.0, q2=[3.0], nf=3)
    size = 2000.0
    kernel = sw.SplittingKernel(regular=lambda z, nf: 0 * z, local=-size)
    higher = sw.build_operators(theory, grid, start_q2=2.0, q2=[3.0], nf=3, further_orders=[{"gg": kernel}])
    scales = np.geomspace(2.0, 3.0, 4001)
    a = theory.alpha_s(scales, nf=np.full(scales.size, 3)) / (4 * np.pi)
    expected = -size * np.trapezoid(a**4, np.log(scales))
    only_gluon = sw.Densities.sample(grid, q2=2.0, nf=3, functions={21: functions()[21]})
    before = lower.apply(only_gluon, missing="zero").at(3.0, [0.1], "g")
    after = higher.apply(only_gluon, missing="zero").at(3.0, [0.1], "g")
    # what comes back by way of the quarks is of higher order in a: a few per cent of the change
    np.testing.assert_allclose(np.log(after / before)[0, 0], expected, rtol=0.1)
    assert start.replicas == 1
