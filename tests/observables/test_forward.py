"""The map as an object: data of rows, storing, memory, and agreement with single questions."""

import tracemalloc
from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw

DESCRIPTION = {
    "title": "A",
    "measures": "reduced_cross_section",
    "beam": "e+",
    "s": 1e5,
    "uncertainty": [{"column": "stat", "given_in": "percent", "scales_with": "nothing"}],
}
COLUMNS = {
    "x": [0.001, 0.05, 0.3],
    "q2": [8.0, 200.0, 2e4],
    "value": [1.0, 1.0, 1.0],
    "stat": [1.0, 1.0, 1.0],
}


@pytest.fixture(scope="module")
def table():
    return sw.Measurements.from_columns(DESCRIPTION, COLUMNS)


@pytest.fixture(scope="module")
def fmap(grid, table):
    return sw.forward_map(sw.Theory(heavy_quarks="matched"), grid, start_q2=1.5, start_nf=3, points=table)


def test_measurements_make_a_map(fmap, grid, start, table):
    assert fmap.matrix.shape == (3, 7, grid.nodes) and not fmap.matrix.flags.writeable
    assert fmap.flavours == (21, 1, 2, 3, -1, -2, -3) or set(fmap.flavours) == {21, 1, 2, 3, -1, -2, -3}
    theory = fmap.theory
    evolved = sw.evolve(theory, start, table.q2)
    value = sw.structure_function(
        "reduced_cross_section", x=table.x, q2=table.q2, s=1e5, densities=evolved, theory=theory, beam="e+"
    )
    np.testing.assert_allclose(fmap.predict(start), value, rtol=1e-8)  # steps in scale


def test_predictions_are_linear_and_taken_by_replica(fmap, start):
    both = np.concatenate([start.values, 2.0 * start.values])
    many = sw.Densities(start.grid, q2=start.q2, nf=start.nf, flavours=start.flavours, values=both)
    one = fmap.predict(start)[0]
    np.testing.assert_allclose(fmap.predict(many), [one, 2 * one], rtol=1e-13)
    order = [start.flavours.index(f) for f in fmap.flavours]
    np.testing.assert_allclose(fmap.predict(start.values[:, order]), [one], rtol=1e-14)


def test_ratios_of_rows_are_data(grid, start):
    plain = dict(DESCRIPTION, measures="F2", exchange="photon")
    plain.pop("beam")
    combined = plain | {
        "combination": {
            "rows": {"deuteron": {"target": "deuteron"}, "proton": {"target": "proton"}},
            "numerator": {"deuteron": 1.0},
            "denominator": {"proton": 1.0},
        }
    }
    table = sw.Measurements.from_columns(combined, COLUMNS)
    fmap = sw.forward_map(sw.Theory(order="NLO"), grid, start_q2=1.5, start_nf=3, points=table)
    assert len(fmap.points) == 6 and fmap.data.data == 3
    evolved = sw.evolve(fmap.theory, start, COLUMNS["q2"])
    top, bottom = (
        sw.structure_function(
            "F2",
            x=table.x,
            q2=table.q2,
            densities=evolved,
            theory=fmap.theory,
            exchange="photon",
            target=target,
        )[0]
        for target in ("deuteron", "proton")
    )
    np.testing.assert_allclose(fmap.predict(start)[0], top / bottom, rtol=1e-8)  # steps in scale


def test_a_stored_map_comes_back_to_the_bit(fmap, start, tmp_path):
    path = tmp_path / "map.h5"
    fmap.save(path)
    for copy in (False, True):
        again = sw.ForwardMap.load(path, copy=copy)
        assert np.array_equal(again.matrix, fmap.matrix) and again.theory == fmap.theory
        assert again.flavours == fmap.flavours and again.electroweak == fmap.electroweak
        assert np.array_equal(again.predict(start), fmap.predict(start))
        assert again.points.place == fmap.points.place


def test_a_damaged_map_is_named(fmap, tmp_path):
    path = tmp_path / "map.h5"
    fmap.save(path)
    data = bytearray(path.read_bytes())
    data[len(data) // 2] ^= 1
    path.write_bytes(data)
    with pytest.raises(sw.StoreError, match=r"map\.h5"):
        sw.ForwardMap.load(path)


def test_memory_does_not_grow_with_the_number_of_scales(grid):
    peaks = []
    for count in (600, 1200):
        rows = SimpleNamespace(
            x=np.full(count, 0.1), q2=np.geomspace(3, 1e4, count), measure="F2", exchange="photon"
        )
        tracemalloc.start()
        fmap = sw.forward_map(sw.Theory(), grid, start_q2=1.5, start_nf=3, points=rows)
        peaks.append(tracemalloc.get_traced_memory()[1] - fmap.matrix.nbytes)
        tracemalloc.stop()
    # besides the matrix itself and columns of the points: rows of 512 points at a time
    assert peaks[1] < 1.2 * peaks[0]


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"x": [0.1, 1.5]}, r"point 1: x = 1.5: x must lie in \(0, 1\]"),
        ({"q2": [10.0, -2.0]}, r"point 1: q2 = -2: q2 must lie in \(0, inf\) GeV\^2"),
        ({"measure": "F4"}, "point 0: measure = 'F4': measure must be one of \"F2\""),
        ({"current": "weak"}, 'point 0: current = \'weak\': current must be one of "neutral", "charged"'),
        ({"exchange": "W"}, 'point 0: exchange = \'W\': exchange must be one of "photon", "photon\\+Z"'),
        ({"exchange": None, "beam": "nu"}, 'point 0: beam = \'nu\': beam must be one of "e-", "e\\+"'),
        ({"exchange": None}, "point 0: beam = None: beam must be one of"),
        ({"target": "lead"}, "point 0: target = 'lead': target must be one of \"proton\""),
        ({"tagged": "top"}, 'point 0: tagged = \'top\': tagged must be one of "charm", "bottom"'),
        ({"polarisation": 1.5}, r"point 0: polarisation = 1.5: polarisation must lie in \[-1, 1\]"),
        ({"measure": "reduced_cross_section", "beam": "e-"}, "point 0: reduced_cross_section needs y, or s"),
        (
            {"measure": "reduced_cross_section", "beam": "e-", "s": 50.0},
            r"point 0: y = .*must lie in \(0, 1\]",
        ),
        (
            {"measure": "reduced_cross_section", "beam": "e-", "s": 1e4, "y": 0.02},
            "point 0: y = 0.02: x, q2 and s say 0.01: y must agree within 5 per cent",
        ),
        ({"beam": ["e+"]}, "points.beam: there are 1 entries for 2 points"),
    ],
)
def test_bad_points_are_refused_by_place_and_column(grid, change, message):
    rows = {"x": [0.1, 0.2], "q2": [10.0, 20.0], "measure": "F2", "exchange": "photon"} | change
    with pytest.raises(sw.InputError, match=message):
        sw.forward_map(sw.Theory(), grid, start_q2=2.0, points=SimpleNamespace(**rows))


def test_points_below_the_grid_are_refused_by_name(grid):
    rows = SimpleNamespace(
        x=[0.1, 1e-6], q2=[10.0, 10.0], measure="F2", exchange="photon", place=("a", "run.csv, line 3")
    )
    with pytest.raises(sw.RangeError, match=r"run.csv, line 3: x = 1e-06: x must lie in \[1e-05, 1\]"):
        sw.forward_map(sw.Theory(), grid, start_q2=2.0, points=rows)


@pytest.mark.parametrize(
    ("argument", "message"),
    [
        ({"theory": "NLO"}, "theory = 'NLO': theory must be a Theory, not str"),
        ({"grid": 3}, "grid = 3: grid must be a ChebyshevGrid, not int"),
        ({"electroweak": 3}, "electroweak = 3: electroweak must be a Electroweak, not int"),
        ({"target_mass": 1}, "target_mass = 1: target_mass must be True or False"),
        ({"subtraction": "none"}, "subtraction = 'none': subtraction must be one of"),
        ({"points": SimpleNamespace(x=[0.1])}, "point 0: measure = None: measure must be one of"),
        ({"points": 3}, "points: no attribute x: make them with Measurements"),
    ],
)
def test_bad_arguments_are_refused(grid, argument, message):
    rows = SimpleNamespace(x=[0.1], q2=[10.0], measure="F2", exchange="photon")
    given = {"theory": sw.Theory(), "grid": grid, "points": rows} | argument
    with pytest.raises(sw.InputError, match=message):
        sw.forward_map(given.pop("theory"), given.pop("grid"), start_q2=2.0, **given)


def test_densities_that_do_not_fit_are_refused(fmap, grid, start):
    other = sw.ChebyshevGrid(x_min=1e-4)
    values = np.ones((7, other.nodes))
    cases = [
        (sw.Densities(other, q2=1.5, nf=3, flavours=start.flavours, values=values), "densities.grid"),
        (sw.Densities(grid, q2=2.0, nf=3, flavours=start.flavours, values=start.values), "densities.q2 = 2"),
        (sw.Densities(grid, q2=1.5, nf=4, flavours=start.flavours, values=start.values), "densities.nf = 4"),
        (sw.Densities(grid, q2=1.5, nf=3, flavours=(21,), values=start.values[:, :1]), "have no flavour"),
        (np.ones((3, grid.nodes)), "densities = array"),
    ]
    for densities, message in cases:
        with pytest.raises(sw.InputError, match=message):
            fmap.predict(densities)


def test_densities_at_another_scale_or_nf_are_refused(grid, start):
    theory = sw.Theory(order="NLO")
    evolved = sw.evolve(theory, start, [10.0])
    common = {"x": 0.1, "theory": theory, "exchange": "photon"}
    with pytest.raises(
        sw.InputError, match=r"densities.q2 = 10: the points need mu_f\^2 = 20 GeV\^2: evolve them to it"
    ):
        sw.structure_function("F2", q2=20.0, densities=evolved, **common)
    three = sw.evolve(replace(theory, flavours=3), start, [10.0])
    with pytest.raises(sw.InputError, match=r"densities at 10 GeV\^2 have nf = 3: the points need nf = 4"):
        sw.structure_function("F2", q2=10.0, densities=three, **common)
