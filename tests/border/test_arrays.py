"""Arrays of every kind cross the border: the same numbers, or a refusal that names the argument."""

import numpy as np
import pytest
import scalewright as sw

FLAVOURS = (21, 1, -1, 2, -2, 3, -3, 4, -4)


def apply(ops, values):
    return ops.apply(sw.Densities(ops.grid, q2=2.0, nf=4, flavours=FLAVOURS, values=values)).values


LAYOUTS = {
    "list": lambda v: v.tolist(),
    "fortran": np.asfortranarray,
    "reversed": lambda v: np.ascontiguousarray(v[::-1])[::-1],
    "every other": lambda v: np.repeat(v, 2, axis=2)[:, :, ::2],
    "transposed": lambda v: np.ascontiguousarray(v.transpose(2, 0, 1)).transpose(1, 2, 0),
    "big-endian": lambda v: v.astype(">f8"),
    "longdouble": lambda v: v.astype(np.longdouble),
    "masked array without masks": np.ma.array,
    "unaligned": lambda v: np.frombuffer(b"\0" + v.tobytes(), np.uint8)[1:].view("f8").reshape(v.shape),
}


@pytest.mark.parametrize("layout", LAYOUTS)
def test_layout_of_memory_changes_no_bit(ops, values, layout):
    given = LAYOUTS[layout](values)
    before = np.array(given, dtype="f8")
    np.testing.assert_array_equal(apply(ops, given), apply(ops, values))
    np.testing.assert_array_equal(np.asarray(given, dtype="f8"), before)


def test_read_only_and_mapped_arrays_are_taken(ops, values, tmp_path):
    expected = apply(ops, values)
    frozen = values.copy()
    frozen.flags.writeable = False
    np.testing.assert_array_equal(apply(ops, frozen), expected)
    np.save(tmp_path / "a.npy", values)
    np.testing.assert_array_equal(apply(ops, np.load(tmp_path / "a.npy", mmap_mode="r")), expected)


def test_broadcast_arrays_are_taken(ops, values):
    one = np.broadcast_to(values[:1], (4, *values.shape[1:]))
    np.testing.assert_array_equal(apply(ops, one), np.repeat(apply(ops, values[:1]), 4, axis=1))


def test_single_precision_and_whole_numbers_are_taken_at_their_value(ops, values):
    single = values.astype("f4")
    np.testing.assert_array_equal(apply(ops, single), apply(ops, single.astype("f8")))
    whole = (10 * values).astype("i4")
    np.testing.assert_array_equal(apply(ops, whole), apply(ops, whole.astype("f8")))


REFUSED = {
    "nan": (
        lambda v: np.where(v == v[2, 3, 4], np.nan, v),
        r"values = nan at index \(2, 3, 4\): values must be finite",
    ),
    "inf": (lambda v: np.where(v == v[0, 0, 0], -np.inf, v), r"values = -inf at index \(0, 0, 0\)"),
    "complex": (lambda v: v + 0j, "values .* must be real numbers, not complex"),
    "text": (lambda v: v.astype(str), "must be real numbers, not text"),
    "objects": (lambda v: v.astype(object), "must be real numbers, not objects"),
    "bool": (lambda v: v > 0, "must be real numbers, not bool"),
    "none": (lambda v: None, "values must be given"),
    "short": (lambda v: v[:, :, :-1], "the axes must be"),
    "few flavours": (lambda v: v[:, :-1], "the axes must be"),
    "one axis": (lambda v: v[0, 0], "the axes must be"),
    "too many axes": (lambda v: v[np.newaxis, np.newaxis], "the axes must be"),
    "ragged": (lambda v: [[1.0], [1.0, 2.0]], "differ in length"),
    "masked": (lambda v: np.ma.masked_greater(v, 0), "masked entries"),
}


@pytest.mark.parametrize("case", REFUSED)
def test_what_is_not_finite_real_numbers_is_refused(ops, values, case):
    change, says = REFUSED[case]
    with pytest.raises(sw.InputError, match=says):
        apply(ops, change(values))


def test_extreme_numbers_stay_numbers(ops, values):
    unit = apply(ops, values)
    for factor in (2.0**-900, 2.0**-300, 2.0**300, 2.0**900):
        # powers of two are exact, and so is every product and sum below
        np.testing.assert_array_equal(apply(ops, factor * values), factor * unit)
    zero = apply(ops, 0 * values)
    assert not zero.any()
    assert np.isfinite(apply(ops, np.full_like(values, 5e-324))).all()


def test_no_replica_is_no_work(ops, values):
    assert apply(ops, values[:0]).shape == (2, 0, 11, ops.grid.nodes)


def test_result_belongs_to_the_caller(ops, densities):
    first, second = ops.apply(densities), ops.apply(densities)
    assert not np.shares_memory(first.values, second.values)
    assert not first.values.flags.writeable
    assert first.values.flags.c_contiguous
    assert first.values.dtype == np.float64


def test_reference_counts_do_not_grow(ops, densities, values):
    import sys

    tracked = (ops, densities, ops.grid, ops.theory)
    before = [sys.getrefcount(item) for item in tracked]
    for _ in range(50):
        ops.apply(densities)
        with pytest.raises(sw.InputError, match="missing"):
            ops.apply(densities, missing="?")
    after = [sys.getrefcount(item) for item in tracked]
    assert max(b - a for a, b in zip(before, after, strict=True)) <= 2
