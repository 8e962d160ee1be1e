"""Which numbers are taken as they are, and which are refused: the checks behind every argument."""

import numpy as np
import pytest
from scalewright import ChebyshevGrid, Densities, InputError, _check


@pytest.fixture(scope="module")
def grid():
    return ChebyshevGrid(x_min=1e-5)


@pytest.mark.parametrize(
    "value",
    [1e308, -1e308, 5e-324, 0.0],
)
def test_extreme_but_finite_values_are_taken(value):
    # the sum of the two largest overflows, the entries are finite all the same
    array = np.full((3, 2), value)
    assert (_check.real_array("values", array) == value).all()


def test_numbers_beyond_float64_are_not_finite():
    if np.finfo(np.longdouble).max <= np.finfo(np.float64).max:
        pytest.skip("longdouble is float64 here")
    with pytest.raises(InputError, match=r"values = inf at index 0: values must be finite|values = .*e\+400"):
        _check.real_array("values", np.array([1, 0], np.longdouble) * np.longdouble("1e400"))


def test_only_generators_and_objects_that_are_no_arrays_are_refused():
    with pytest.raises(InputError, match="values must be real numbers, not generator"):
        _check.real_array("values", (x for x in [1.0]))
    with pytest.raises(InputError, match="values must be real numbers, not objects"):
        _check.real_array("values", [object(), 1.0])
    assert _check.whole_array("flavours", np.array([21, 2], dtype=">i2")).tolist() == [21, 2]
    with pytest.raises(InputError, match=r"nf must be below 2\^63"):
        _check.whole_array("nf", np.array([2**63], dtype=np.uint64))


def test_no_argument_is_changed(grid):
    values, q2, nf = np.ones((2, 1, 1, grid.nodes)), np.array([2.0, 3.0]), np.array([3, 3])
    before = [array.copy() for array in (values, q2, nf)]
    made = Densities(grid, q2=q2, nf=nf, flavours=(21,), values=values)
    made.at(q2, [0.1, 0.2], 21, nf=nf)
    for array, old in zip((values, q2, nf), before, strict=True):
        assert (array == old).all() and array.flags.writeable
