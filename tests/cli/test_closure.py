"""`scalewright closure`: the law is found back, mistakes are named; and the statistics behind it."""

import csv
from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from cli.fit_case import GRID, THEORY, law, shape, write_case
from scalewright.closure import closure_test
from scalewright.fitting.functionals import Functional, default_functionals
from scipy.stats import kstest

FUNCTIONALS = ("alpha_s", "momentum(g)", "u_v(0.3)", "sea(0.05)")
CLOSURE = """
[closure]
sets = 8
seed = 1
starts = 3
functionals = ["alpha_s", "momentum(g)", "u_v(0.3)"]
[output]
sets = "sets.csv"
"""


@pytest.fixture
def write(tmp_path):
    def written(*changes):
        write_case(tmp_path)
        text = (tmp_path / "job.toml").read_text()
        text = text[: text.index("[replicas]")] + CLOSURE
        for old, new in (("ubar.power = { prior = [0.1, 0.05] }", ""), *changes):
            text = text.replace(old, new)
        (tmp_path / "job.toml").write_text(text)

    return written


@pytest.fixture
def run(tmp_path, capsys, monkeypatch):
    """Run in this process, which has loaded everything already, in the folder of the job."""
    from scalewright.cli.main import main

    monkeypatch.chdir(tmp_path)

    def runner(*arguments):
        found = main(list(arguments))
        out, said = capsys.readouterr()
        assert found == 0, (out, said)
        return SimpleNamespace(stdout=out, stderr=said)

    return runner


@pytest.fixture(scope="module")
def many(tmp_path_factory):
    """Fit 40 sets of pseudo-data from a law that the shape contains, and 4 replicas of each."""
    folder = tmp_path_factory.mktemp("closure")
    write_case(folder)
    table = sw.Measurements.read(folder / "run1.toml")
    fmap = sw.forward_map(THEORY, GRID, start_q2=2.0, points=table)
    small = shape().restricted(
        fixed=["g.power", "g.fall", "d_v.fall", "ubar.fall"], tied={"d_v.power": "u_v.power"}
    )
    return closure_test(
        fmap, sw.ChiSquare(table), small, law(), functionals=FUNCTIONALS, sets=40, seed=4,
        replicas=4, starts=3, theory=["alpha_s"],
    )  # fmt: skip


def test_data_without_errors_give_the_law_back(many):
    # the shape contains the law: what is left is rounding, far below any uncertainty
    assert many.level_0.failed == 0 and (many.level_0.chi2 < 1e-12).all()
    assert abs(many.level_0.off).max() < 1e-5


def test_different_starts_end_at_one_minimum(many):
    # converged means within a thousandth of an uncertainty, twice
    assert many.level_1.failed == 0
    assert np.ptp(many.level_1.off, axis=0).max() < 2e-3
    assert np.ptp(many.level_1.chi2) < 2e-6


@pytest.mark.parametrize("name", FUNCTIONALS)
def test_the_truth_lies_inside_as_often_as_it_should(many, name):
    assert not many.failed and many.sets == 40
    covered, of_replicas = many.coverage(name), many.replica_coverage(name)
    assert covered.is_fair, covered  # three binomial errors
    assert of_replicas.is_fair, of_replicas
    # mean and deviation of four normal numbers, and a fifth: by simulation, to four standard errors
    drawn = np.random.default_rng(1).normal(size=(100_000, 5))
    inside = abs(drawn[:, :4].mean(axis=1) - drawn[:, 4]) < drawn[:, :4].std(axis=1, ddof=1)
    assert of_replicas.expected == pytest.approx(inside.mean(), abs=4 * 0.5 / np.sqrt(100_000))


def test_pulls_are_normal(many):
    for place in range(len(FUNCTIONALS)):
        # one in a thousand of honest samples would be refused; the sample is fixed by its seed
        assert kstest(many.pulls[:, place], "norm").pvalue > 1e-3


def test_chi_square_has_the_degrees_of_freedom_that_are_left(many):
    left = many.data - 5  # u_v.power, u_v.fall, ubar.power, ubar.c0, alpha_s
    # the mean of 40 chi-squares: sqrt(2 n / 40); four of them
    assert abs(many.chi2.mean() - left) < 4 * np.sqrt(2 * left / 40)


def test_a_wrong_uncertainty_is_found_out(many):
    from dataclasses import replace

    halved = replace(many, errors=0.5 * many.errors)
    assert not any(halved.coverage(name).is_fair for name in FUNCTIONALS)


def test_the_command_says_what_python_says(run, tmp_path, write):
    write()
    done = run("closure", "job.toml")
    with (tmp_path / "sets.csv").open(newline="") as file:
        rows = list(csv.DictReader(file))
    assert len(rows) == 8 * 3 and rows[0]["functional"] == "alpha_s"
    table = sw.Measurements.read(tmp_path / "run1.toml")
    fmap = sw.forward_map(THEORY, GRID, start_q2=2.0, points=table)
    fitted = shape().restricted(
        fixed={"g.power": 0.1, "g.fall": 5.0, "d_v.fall": 4.0}, tied={"d_v.power": "u_v.power"},
        bounds={"u_v.fall": (1, 10)}, start={"u_v.fall": 3.4},
    )  # fmt: skip
    start = fitted.densities(fitted.start, q2=2.0, nf=3)
    found = closure_test(
        fmap, sw.ChiSquare(table), fitted, start, functionals=["alpha_s", "momentum(g)", "u_v(0.3)"],
        sets=8, seed=1, starts=3, theory=["alpha_s"],
    )  # fmt: skip
    np.testing.assert_array_equal([float(row["value"]) for row in rows], found.values.ravel())
    inside = found.coverage("alpha_s").inside
    assert f"{100 * inside:.0f} %" in next(line for line in done.stdout.splitlines() if "  alpha_s" in line)
    assert "level 0: 3 starts, chi-square " in done.stdout and "level 1: 3 starts" in done.stdout
    assert done.stderr == ""


def test_a_law_of_a_file(run, tmp_path, write):
    write(("sets = 8", 'sets = 2\nlaw = "law.h5"\nlevels = [0]'))
    law().save(tmp_path / "law.h5")
    assert "level 0" in run("closure", "job.toml").stdout


WRONG = {
    "no closure": ([("[closure]", "[closures]")], 'closures: unknown key; did you mean "closure"?'),
    "no seed": ([("seed = 1", "")], "job.toml: [closure] seed: missing"),
    "one set": ([("sets = 8", "sets = 1")], "job.toml: [closure]: sets = 1: sets must be from 2"),
    "level 3": ([("seed = 1", "seed = 1\nlevels = [3]")], "job.toml: [closure]: levels = 3"),
    "no levels": (
        [("seed = 1", "seed = 1\nlevels = []")],
        "[closure] levels = []: must be a list of 0, 1 and 2",
    ),
    "unknown functional": ([("momentum(g)", "weight(g)")], "job.toml: [closure]:"),
    "unknown flavour": ([("u_v(0.3)", "u_w(0.3)")], "job.toml: [closure]:"),
    "x that is none": ([("u_v(0.3)", "u_v(high)")], "functional = 'u_v(high)': 'high' is no number"),
    "x below the grid": ([("u_v(0.3)", "u_v(0.001)")], "job.toml: [closure]: u_v(0.001) = 0.001"),
    "a coupling that is fixed": ([('theory = ["alpha_s"]', "")], "functionals = 'alpha_s': is not fitted"),
    "another ending": ([('"sets.csv"', '"sets.h5"')], "job.toml: [output]: sets = "),
}


@pytest.mark.parametrize("case", WRONG)
def test_what_is_asked_wrongly_is_named(tmp_path, write, capsys, case):
    from scalewright.cli.main import main

    changes, says = WRONG[case]
    write(*changes)
    assert main(["closure", str(tmp_path / "job.toml")]) == 2
    out, said = capsys.readouterr()
    assert says in said, said
    assert said.startswith("scalewright: ") and said.count("\n") == 1 and out == ""


def test_a_law_of_another_grid_is_refused(tmp_path, write, capsys):
    from scalewright.cli.main import main

    write(("sets = 8", 'sets = 8\nlaw = "law.h5"'))
    grid = sw.ChebyshevGrid(x_min=1e-3)
    sw.Densities.sample(grid, q2=2.0, nf=3, functions={21: lambda x: 1 - x}).save(tmp_path / "law.h5")
    assert main(["closure", str(tmp_path / "job.toml")]) == 2
    assert "its grid must be that of the job" in capsys.readouterr().err


def test_functionals_are_what_they_say():
    start = law()
    assert Functional("momentum(g)").of_law(start, THEORY) == start.moment("g", 2)[0]
    assert Functional("dbar - ubar(0.1)").of_law(start, THEORY) == 0.0
    assert Functional("alpha_s").of_law(start, THEORY) == 0.3
    names = [one.text for one in default_functionals(("alpha_s",), 0.05)]
    assert names == ["alpha_s", "momentum(g)", "momentum(sea)", "u_v(0.3)", "d_v(0.3)", "g(0.1)"]
    for text in (3, "", "g", "g(0)", "g(1.2)", "beta(3)", "momentum(w)"):
        with pytest.raises(sw.InputError):
            Functional(text)
