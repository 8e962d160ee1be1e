"""`scalewright demo` from end to end, and the published tables that ship with the package."""

import csv
import re
from pathlib import Path

import numpy as np
import pytest
import scalewright as sw
from scalewright.cli import benchmark, demo

# Published numbers were recalled from memory and confirmed to one unit of their last digit (see the README
# beside them); rounding adds one half.
WORST = 1.5
ENTRIES = {"LO": (77, 88), "NLO": (72, 81), "NNLO": (26, 84)}


def test_every_published_digit_is_met(run, tmp_path):
    done = run("demo", "--out", "out", "--replicas", "20")
    rows = re.findall(r"^  (N*LO), .*?flavours +(\d+) +([\d.]+) ", done.stdout, re.MULTILINE)
    assert [(order, int(n)) for order, n, _ in rows] == [
        (order, ENTRIES[order][scheme]) for scheme in (0, 1) for order in ("LO", "NLO", "NNLO")
    ]
    assert all(float(worst) <= WORST for _, _, worst in rows), rows
    assert done.stderr == ""
    assert len(done.stdout.splitlines()) <= 40
    total = float(re.search(r"^  all +590 +([\d.]+)$", done.stdout, re.MULTILINE)[1])
    assert abs(total - 590) < 4 * np.sqrt(2 * 590)  # four standard deviations of a chi-square of 590
    assert (tmp_path / "out" / "campaign.png").read_bytes().startswith(b"\x89PNG")
    evolved = sw.Densities.load(tmp_path / "out" / "demo.h5")
    assert evolved.values.shape[:3] == (3, 20, 11)
    assert (tmp_path / "out" / "demo.png").read_bytes().startswith(b"\x89PNG")
    again = run("demo", "--out", "out", "--replicas", "20")
    assert table(again.stdout) == table(done.stdout)


def table(text):
    return [line for line in text.splitlines() if not re.search(r" in \d+\.\d+ s", line)]


@pytest.mark.parametrize("scheme", benchmark.SCHEMES)
@pytest.mark.parametrize("order", benchmark.ORDERS)
def test_tables_are_whole(order, scheme):
    entries = benchmark.read(order, scheme)
    assert len(entries) == ENTRIES[order][list(benchmark.SCHEMES).index(scheme)]
    assert {entry.quantity for entry in entries} <= set(benchmark.QUANTITIES)
    assert all(re.fullmatch(r"-?\d\.\d{4}e[+-]\d\d", entry.text) for entry in entries)
    assert len({(entry.x, entry.quantity) for entry in entries}) == len(entries)


def test_tables_are_those_of_the_tests():
    """Where the tests have the tables as well, both are the same."""
    folder = Path(__file__).parents[1] / "reference"
    found = sorted(folder.rglob("*_fixed4.csv")) + sorted(folder.rglob("*_variable.csv"))
    if not found:
        pytest.skip("tests/reference has no tables")
    for path in found:
        order, scheme = path.stem.split("_")
        with path.open(newline="") as file:
            rows = [(float(row["x"]), row["quantity"], row["published"]) for row in csv.DictReader(file)]
        assert rows == [
            (entry.x, entry.quantity, entry.text) for entry in benchmark.read(order.upper(), scheme)
        ]


def test_unit_of_the_last_digit():
    assert benchmark.Entry(0.1, "x*g", "5.7722e-05").unit == pytest.approx(1e-9, rel=1e-12)
    assert benchmark.Entry(0.1, "x*g", "1.3162e+03").unit == pytest.approx(0.1, rel=1e-12)


def test_replica_i_is_the_same_whatever_the_number():
    grid = sw.ChebyshevGrid(x_min=1e-3)
    few, many = demo.replicas(grid, 3), demo.replicas(grid, 8)
    np.testing.assert_array_equal(few.values, many.values[:3])
    assert few.flavours == (21, 1, -1, 2, -2, 3, -3)


def test_replicas_spread_around_the_published_input():
    grid = sw.ChebyshevGrid(x_min=1e-3)
    published = sw.Densities.sample(grid, q2=2.0, nf=3, functions=benchmark.toy())
    many = demo.replicas(grid, 400)
    center, spread = many.at(2.0, 0.1, "u_v").mean(), many.at(2.0, 0.1, "u_v").std()
    exact = published.at(2.0, 0.1, "u_v")[0]
    # 5 per cent spread by construction; mean within 4 standard errors
    assert abs(center - exact) < 4 * 0.05 * exact / np.sqrt(400)
    assert spread == pytest.approx(
        0.05 * exact, rel=0.15
    )  # the standard deviation of 400 is known to 3.5 per cent


def test_a_folder_that_cannot_be_made_is_named(run, tmp_path):
    (tmp_path / "file").write_text("")
    done = run("demo", "--out", "file/demo", status=1)
    assert "--out = file/demo: the folder cannot be made: not a directory" in done.stderr


def test_without_a_picture_the_demo_says_so(run, tmp_path):
    (tmp_path / "matplotlib.py").write_text("raise ImportError('not here')")
    (tmp_path / "sitecustomize.py").write_text(
        "import importlib.util as u; f = u.find_spec\n"
        "u.find_spec = lambda name, *a: None if name == 'matplotlib' else f(name, *a)"
    )
    import os

    path = os.pathsep.join([str(tmp_path), os.environ.get("PYTHONPATH", "")])
    done = run("demo", "--replicas", "2", env=os.environ | {"PYTHONPATH": path})
    assert "no picture: matplotlib is not installed (pip install 'scalewright[plot]')" in done.stdout
    assert not list(tmp_path.glob("*.png"))
