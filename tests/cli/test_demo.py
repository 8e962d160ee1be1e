"""`scalewright demo` from end to end, and the published tables that ship with the package."""

import csv
import os
import re
import subprocess
from pathlib import Path

import numpy as np
import pytest
import scalewright as sw
from cli.conftest import COMMAND
from scalewright.cli import benchmark, campaign
from scalewright.cli.fit_job import read_fit_job
from scalewright.fitting.least_squares import FitResult

# Published numbers were recalled from memory and confirmed to one unit of their last digit (see the README
# beside them); rounding adds one half.
WORST = 1.5
ENTRIES = {"LO": (77, 88), "NLO": (72, 81), "NNLO": (26, 84)}


@pytest.fixture(scope="module")
def shown(tmp_path_factory):
    """Run the demo once, with few replicas, and without pictures, which take half of the time."""
    folder = tmp_path_factory.mktemp("demo")
    (folder / "sitecustomize.py").write_text(
        "import importlib.util as u; f = u.find_spec\n"
        "u.find_spec = lambda name, *a: None if name == 'matplotlib' else f(name, *a)"
    )
    path = os.pathsep.join([str(folder), os.environ.get("PYTHONPATH", "")])
    command = [*COMMAND, "demo", "--out", "out", "--replicas", "4"]
    options = {"cwd": folder, "env": os.environ | {"PYTHONPATH": path}, "timeout": 115}
    done = subprocess.run(command, capture_output=True, text=True, check=False, **options)
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    return folder / "out", done.stdout


def test_every_published_digit_is_met(shown):
    rows = re.findall(r"^  (N*LO), .*?flavours +(\d+) +([\d.]+) ", shown[1], re.MULTILINE)
    assert [(order, int(n)) for order, n, _ in rows] == [
        (order, ENTRIES[order][scheme]) for scheme in (0, 1) for order in ("LO", "NLO", "NNLO")
    ]
    assert all(float(worst) <= WORST for _, _, worst in rows), rows


def test_the_screen_is_one_page(shown):
    assert len(shown[1].splitlines()) <= 48
    assert max(map(len, shown[1].splitlines())) <= 100


def test_the_campaign_is_fitted(shown):
    total = float(re.search(r"^  all +590 +([\d.]+)$", shown[1], re.MULTILINE)[1])
    assert abs(total - (590 - 11)) < 4 * np.sqrt(2 * 590)  # four standard deviations, 11 parameters
    result = FitResult.load(shown[0] / "fit.h5")
    assert result.converged and result.chi2 == pytest.approx(total, abs=0.05)
    assert result.names[-1] == "alpha_s" and result.data == 590


def test_the_fit_is_compared_with_the_law_behind_the_campaign(shown):
    found = re.findall(
        r"^  (\S+) +[\d.]+ +[\d.]+ +[\d.]+ +([+-][\d.]+) +([+-][\d.]+)$", shown[1], re.MULTILINE
    )
    assert [name for name, *_ in found][:2] == ["alpha_s", "momentum(g)"] and len(found) == 8
    # correlated pulls of one draw: four standard deviations each
    assert all(abs(float(pull)) < 4.0 for _, pull, _ in found), found
    result, law = FitResult.load(shown[0] / "fit.h5"), campaign.law(sw.ChebyshevGrid(x_min=1e-5))
    exact = law.at(None, 0.3, "u_v")[0]
    pull = (result.densities.at(None, 0.3, "u_v")[0] - exact) / result.error_of(0.3, "u_v")
    assert dict((name, p) for name, p, _ in found)["u_v(0.3)"] == f"{pull:+.2f}"


def test_what_it_leaves_behind(shown):
    folder, said = shown
    names = {path.name for path in folder.iterdir()}
    assert names == {
        "fit.toml", "fit.h5", "replicas.h5", "densities.csv", "parameters.csv", "predictions.csv", "fit.html",
    }  # fmt: skip
    assert all(f"{name}: " in said for name in names)
    page = (folder / "fit.html").read_text("utf-8")
    assert "Against the law behind the data" in page
    assert "No pictures: matplotlib was not installed" in page
    job = read_fit_job(folder / "fit.toml")
    assert job.replicas.number == 4 and len(job.measured) == 590


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


def test_a_folder_that_cannot_be_made_is_named(run, tmp_path):
    (tmp_path / "file").write_text("")
    done = run("demo", "--out", "file/demo", status=1)
    assert "--out = file/demo: the folder cannot be made: not a directory" in done.stderr


def test_a_job_that_was_changed_is_not_written_over(tmp_path, capsys):
    from scalewright.cli.demo import _refuse_changed, job_text
    from scalewright.cli.main import main

    place = tmp_path / "fit.toml"
    place.write_text(job_text(17).replace("campaign.toml", "elsewhere.toml"))
    _refuse_changed(str(place))  # its own, of another number and from another place
    mine = job_text(17).replace("fall = 5.0", "fall = 4.0")
    place.write_text(mine)
    assert main(["demo", "--out", str(tmp_path)]) == 2
    assert "fit.toml: is there already, and not as the demo writes it" in capsys.readouterr().err
    assert place.read_text() == mine and [path.name for path in tmp_path.iterdir()] == ["fit.toml"]
