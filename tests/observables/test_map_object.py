"""The map as an object: equal, copied, pickled, frozen and shown."""

import copy
import pickle
from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw

GRID = sw.ChebyshevGrid.from_panels([0.0, 0.7, 2.5, 9.3], [9, 9, 9])
ROWS = {"x": [0.01, 0.1], "q2": [10.0, 100.0], "measure": "F2", "exchange": "photon"}


def built(theory=None, start_nf=3, **change):
    options = {name: change.pop(name) for name in ("target_mass", "electroweak") if name in change}
    rows = SimpleNamespace(**ROWS | change)
    theory = theory or sw.Theory(order="NLO")
    return sw.forward_map(theory, GRID, start_q2=1.5, start_nf=start_nf, points=rows, **options)


@pytest.fixture(scope="module")
def fmap():
    return built()


@pytest.mark.parametrize("protocol", range(2, pickle.HIGHEST_PROTOCOL + 1))
def test_a_pickled_map_is_the_same(fmap, protocol):
    again = pickle.loads(pickle.dumps(fmap, protocol))
    assert again == fmap and hash(again) == hash(fmap) and repr(again) == repr(fmap)
    assert not again.matrix.flags.writeable and again.steps_error == fmap.steps_error
    densities = np.tile(np.sqrt(GRID.x) * (1 - GRID.x) ** 3, (7, 1))
    for ask in ("predict", "numerical_error"):
        np.testing.assert_array_equal(getattr(again, ask)(densities), getattr(fmap, ask)(densities))
    np.testing.assert_array_equal(again.derivative("alpha_s"), fmap.derivative("alpha_s"))


def test_the_matrix_is_pickled_without_a_copy(fmap):
    parts = []
    pickle.dumps(fmap, 5, buffer_callback=parts.append)
    assert any(part.raw().nbytes == fmap.matrix.nbytes for part in parts)


def test_a_copy_is_itself_and_nothing_can_be_set(fmap):
    assert copy.copy(fmap) is fmap and copy.deepcopy(fmap) is fmap
    for name in ("matrix", "theory", "start_q2", "anything"):
        with pytest.raises(AttributeError):
            setattr(fmap, name, 1.0)
    with pytest.raises(AttributeError, match="a ForwardMap is frozen: matrix cannot be deleted"):
        del fmap.matrix
    with pytest.raises(ValueError, match="read-only"):
        fmap.matrix[0] = 1.0


def test_maps_of_the_same_are_equal_and_others_are_not(fmap, tmp_path):
    assert built() == fmap and built(place=("a", "b")) == fmap  # where a point stands does not count
    fmap.save(tmp_path / "map.h5")
    assert sw.ForwardMap.load(tmp_path / "map.h5") == fmap
    for other in (
        built(sw.Theory(order="NLO", coupling=sw.Coupling(0.12, q2=91.1876**2, nf=5))),
        built(x=[0.01, 0.2]),
        built(measure="FL"),
        built(tagged="charm"),
        built(target_mass=True),
        built(electroweak=sw.Electroweak.on_shell()),
        built(x=[0.01], q2=[10.0]),
        "map",
    ):
        assert other != fmap


def test_data_of_other_rows_make_another_map(fmap):
    table = {"title": "A", "measures": "F2", "exchange": "photon", "uncertainty": [
        {"name": "a", "size": 0.1, "given_in": "value", "scales_with": "nothing"}]}  # fmt: skip
    columns = {"x": ROWS["x"], "q2": ROWS["q2"], "value": [1.0, 1.0]}
    sums = {"combination": {"rows": {"one": {}}, "numerator": {"one": 2.0}}}
    plain, doubled = (
        sw.forward_map(
            sw.Theory(order="NLO"), GRID, start_q2=1.5, start_nf=3,
            points=sw.Measurements.from_columns(table | more, columns),
        )
        for more in ({}, sums)
    )  # fmt: skip
    assert plain == fmap and doubled != fmap


def test_a_map_shows_itself(fmap):
    assert repr(fmap) == "ForwardMap(NLO, 2 rows, 2 data, from 1.5 GeV^2 (nf = 3))"
    assert str(fmap) == fmap.describe()
    assert fmap._repr_html_().startswith("<pre>ForwardMap(NLO, 2 rows")
