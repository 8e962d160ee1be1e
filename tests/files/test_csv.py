"""The plain table of densities: round trips, a converter of twenty lines, and every mistake named."""

import csv as plain_csv

import numpy as np
import pytest
from densities.inputs import FUNCTIONS, PUBLISHED_FLAVOURS, published
from scalewright import ChebyshevGrid, Densities, InputError, RangeError, ResolutionWarning, StoreError
from scalewright.files.csv import read_lattice
from scipy.interpolate import CubicSpline

HEAD = "q2,nf,x,flavour,replica,value"
GOOD = ["2,3,0.1,21,0,1.5", "2,3,0.2,21,0,2.5", "2,3,0.1,-2,0,3.5", "2,3,0.2,-2,0,4.5"]


@pytest.fixture(scope="module")
def grid():
    return ChebyshevGrid(x_min=1e-4)


@pytest.fixture
def table(tmp_path):
    def write(*lines, head=HEAD, encoding="utf-8", newline="\n"):
        path = tmp_path / "table.csv"
        path.write_bytes(newline.join([head, *lines, ""]).encode(encoding))
        return path

    return write


def test_every_bit_goes_out_and_comes_back(tmp_path, grid):
    values = (
        np.random.default_rng(2).normal(size=(3, 2, 3, grid.nodes))
        * 10.0 ** np.arange(-200, 100, 100)[:, None, None, None]
    )
    made = Densities(grid, q2=[2.0, 20.25, 20.25], nf=[3, 3, 4], flavours=(21, 1, -1), values=values)
    made.to_csv(tmp_path / "out.csv")
    with pytest.warns(ResolutionWarning, match="resolved") as caught:  # random values are not smooth
        again = Densities.from_csv(tmp_path / "out.csv", grid)
    assert caught[0].filename == __file__
    assert again == made


def test_a_single_scale_has_no_axis_of_scales(tmp_path, grid):
    one = Densities.sample(grid, 2.0, 3, FUNCTIONS)
    one.to_csv(tmp_path / "out.csv")
    again = Densities.from_csv(str(tmp_path / "out.csv"), grid=grid)
    assert again.q2 == 2.0 and (again.values == one.values).all() and again.flavours == one.flavours
    assert again.below is None


def test_a_converter_needs_no_more_than_the_csv_module(tmp_path, grid):
    path = tmp_path / "converted.csv"
    with path.open("w", newline="") as file:
        writer = plain_csv.writer(file)
        writer.writerow(["x", "flavour", "value", "q2", "nf", "replica"])  # any order of columns
        for x in sorted(grid.x):  # any order of rows
            for flavour in PUBLISHED_FLAVOURS:
                writer.writerow([x, flavour, published(flavour, x), 2.0, 3, 0])
    made = Densities.from_csv(path, grid)
    # powers of one number and of an array may differ by an ulp
    np.testing.assert_allclose(made.values[0, 0], published(21, grid.x), rtol=4 * 2.0**-52)


def test_other_x_are_interpolated_only_when_allowed(tmp_path, grid):
    x = np.geomspace(1e-4, 1.0, 400)
    x[-1] = 1.0
    lines = [f"2,3,{a!r},21,0,{published(21, a)!r}" for a in x.tolist()]
    path = tmp_path / "lattice.csv"
    path.write_text("\n".join([HEAD, *lines]))
    match = f"its 399 x below 1 are not the {grid.nodes} nodes of the grid.*interpolate=True"
    with pytest.raises(InputError, match=match):
        Densities.from_csv(path, grid)
    made = Densities.from_csv(path, grid, interpolate=True)
    spline = CubicSpline(np.log(x), published(21, x), bc_type="natural")
    inside = grid.x > 1.01e-4
    # the same spline in another variable: rounding
    np.testing.assert_allclose(
        made.values[0, 0, inside], spline(np.log(grid.x[inside])), rtol=1e-11, atol=1e-14
    )
    # h = 0.023 in ln x, error ~ h^2 of the second derivative at the natural ends, h^4/384 of the fourth in
    middle = (grid.x > 2e-4) & (grid.x < 0.5)
    np.testing.assert_allclose(made.values[0, 0, middle], published(21, grid.x[middle]), rtol=1e-6)
    with pytest.raises(RangeError, match=r"its smallest x is 0\.0001: the grid reaches down to 1e-05"):
        Densities.from_csv(path, ChebyshevGrid(1e-5), interpolate=True)


def test_a_value_at_one_must_be_zero(table, grid):
    path = table(*(f"2,3,{x},21,0,1" for x in (0.001, 0.01, 0.1, 1)))
    with pytest.raises(InputError, match=r"a value at x = 1 is not 0: every density must vanish there"):
        Densities.from_csv(path, grid, interpolate=True)


def test_too_few_points_make_no_spline(table, grid):
    with pytest.raises(InputError, match="2 x below 1: a cubic spline needs at least 4"):
        Densities.from_csv(table(*GOOD), grid, interpolate=True)


@pytest.mark.parametrize("newline", ["\n", "\r\n", "\n\n"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig"])
def test_line_ends_empty_lines_and_a_byte_order_mark_do_not_matter(table, newline, encoding):
    lattice = read_lattice(table(*GOOD, newline=newline, encoding=encoding))
    assert lattice.values.tolist() == [[[[2.5, 1.5], [4.5, 3.5]]]]
    assert lattice.flavours == (21, -2) and lattice.x.tolist() == [0.2, 0.1]


@pytest.mark.parametrize(
    ("line", "match"),
    [
        ("2,3,1.3,21,0,1", r"line 6, column x: 1.3: x must lie in \(0, 1\]"),
        ("2,3,0,21,0,1", r"line 6, column x: 0: x must lie in \(0, 1\]"),
        ("-2,3,0.1,21,0,1", r"line 6, column q2: -2: q2 must lie in \(0, inf\) GeV\^2"),
        ("2,2,0.1,21,0,1", "line 6, column nf: 2: nf must be from 3 to 6"),
        ("2,3.5,0.1,21,0,1", "line 6, column nf: 3.5: nf must be a whole number"),
        ("2,3,0.1,22,0,1", r"line 6, column flavour: 22: a PDG number must be 21 \(gluon\)"),
        ("2,3,0.1,g,0,1", "line 6, column flavour: 'g' is not a number"),
        ("2,3,0.1,21,-1,1", "line 6, column replica: -1: replica must be from 0"),
        ("2,3,0.1,21,0,nan", "line 6, column value: nan: value must be finite"),
        ("2,3,0.1,21,0,inf", "line 6, column value: inf: value must be finite"),
        ("2,3,0.1,21,0,1_000", "line 6, column value: '1_000' is not a number"),
        ("2,3,0.1,21,0,", "line 6, column value: '' is not a number"),
        ("2,3,0,1,21,0,1", "line 6: 7 entries: there must be 6"),
        ("2,3", "line 6: 2 entries: there must be 6"),
        (GOOD[0], "line 6: the same scale, replica, flavour and x stand in line 2 already"),
        (
            "2,3,0.1,21,1,1",
            "no row for q2 = 2, nf = 3, x = 0.2, flavour = 21, replica = 1: the lattice .* full",
        ),
    ],
)
def test_a_wrong_entry_is_named_with_line_and_column(table, line, match):
    with pytest.raises(InputError, match=r"table\.csv.*: " + match):
        read_lattice(table(*GOOD, line))


@pytest.mark.parametrize(
    ("head", "match"),
    [
        (HEAD.replace("flavour", "flavor"), "unknown column 'flavor': .*did you mean \"flavour\"?"),
        (HEAD.replace(",replica", ""), "line 1: missing column replica"),
        (HEAD.replace("nf", "q2"), "line 1, column q2: stands there twice"),
        (HEAD.replace(",", ";"), "unknown column 'q2;nf;x"),
    ],
)
def test_a_wrong_head_is_named(table, head, match):
    with pytest.raises(InputError, match=match):
        read_lattice(table(*GOOD, head=head))


def test_other_bytes_and_empty_files_are_refused(tmp_path):
    path = tmp_path / "table.csv"
    path.write_bytes(HEAD.encode() + b"\n\xff\xfe")
    with pytest.raises(InputError, match="not UTF-8 text at byte 30"):
        read_lattice(path)
    path.write_bytes(b"")
    with pytest.raises(InputError, match="no rows: the first line must be q2,nf,x,flavour,replica,value"):
        read_lattice(path)
    path.write_text(HEAD + '\n2,3,0.1,21,0,"1\n')
    with pytest.raises(InputError, match="line 2"):
        read_lattice(path)


def test_a_file_that_is_not_there_is_a_store_error(tmp_path):
    with pytest.raises(StoreError, match=r"missing\.csv"):
        read_lattice(tmp_path / "missing.csv")
