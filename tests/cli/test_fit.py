"""`scalewright fit`: a job gives what Python gives, and everything asked for is written."""

import csv
import signal
import subprocess
import time

import numpy as np
import pytest
import scalewright as sw
from cli.conftest import COMMAND
from cli.fit_case import GRID, THEORY, shape, write_case
from scalewright.fitting.least_squares import FitResult
from scalewright.fitting.maps import Maps
from scalewright.fitting.reference import settle_reference


@pytest.fixture(scope="module")
def finished(tmp_path_factory):
    """Run the job once; its tests look at what it left."""
    folder = tmp_path_factory.mktemp("fit")
    write_case(folder)
    done = subprocess.run(
        [*COMMAND, "fit", "job.toml"], cwd=folder, capture_output=True, text=True, timeout=110, check=False
    )
    assert done.returncode == 0, done.stderr
    return folder, done


def rows(path):
    with path.open(newline="") as file:
        return list(csv.DictReader(file))


def by_hand(folder):
    """Return the fit of the job by Python alone."""
    table = sw.Measurements.read(folder / "run1.toml")
    restricted = shape().restricted(
        fixed={"g.power": 0.1, "g.fall": 5.0, "d_v.fall": 4.0}, tied={"d_v.power": "u_v.power"},
        bounds={"u_v.fall": (1, 10)}, start={"u_v.fall": 3.4}, priors={"ubar.power": (0.1, 0.05)},
    )  # fmt: skip
    maps = Maps(THEORY, GRID, start_q2=2.0, points=table)
    found = []

    def once(chi2):
        start = found[-1].parameters if found else None
        at = maps(found[-1].map_at if found else None)
        rebuild = maps if found else None
        found.append(sw.fit(at, chi2, restricted, theory=["alpha_s"], start=start, rebuild=rebuild))
        return found[-1].prediction

    settle_reference(sw.ChiSquare(table), once)
    return found[-1]


def test_a_job_gives_what_python_gives(finished):
    folder, done = finished
    result, own = FitResult.load(folder / "fit.h5"), by_hand(folder)
    np.testing.assert_array_equal(result.parameters, own.parameters)
    np.testing.assert_array_equal(result.covariance, own.covariance)
    assert result.names == own.names and result.theory == own.theory
    assert f"  all                 24          {own.chi2:.1f}\n" in done.stdout
    assert done.stderr == ""
    assert len(done.stdout.splitlines()) <= 40


def test_the_law_is_found_again(finished):
    result = FitResult.load(finished[0] / "fit.h5")
    free = [0.7, 3.5, 0.1, 7.0, 0.3, 0.3]
    pulls = (result.parameters - free) / result.errors
    # one draw of seven correlated parameters: 4 standard deviations of each
    assert (abs(pulls) < 4.0).all(), pulls
    assert result.chi2 < 24 + 4 * np.sqrt(2 * 24)


def test_everything_that_is_asked_for_is_written(finished):
    folder, done = finished
    for name in ("fit.h5", "replicas.h5", "densities.csv", "parameters.csv", "predictions.csv", "fit.html"):
        assert f"{name}: " in done.stdout
        assert (folder / name).stat().st_size > 0
    ensemble = sw.Ensemble.load(folder / "replicas.h5")
    assert ensemble.replicas == 6 and ensemble.seed == 3
    lattice = rows(folder / "densities.csv")
    assert {row["q2"] for row in lattice} == {"10.0", "50.0"}
    assert {float(row["x"]) for row in lattice} == {0.01, 0.1, 0.5}
    assert len(lattice) == 2 * 3 * 7 * 6
    predictions = rows(folder / "predictions.csv")
    result = FitResult.load(folder / "fit.h5")
    np.testing.assert_array_equal([float(row["prediction"]) for row in predictions], result.prediction)


def test_parameters_are_listed_with_what_the_sum_rules_determine(finished):
    folder, _ = finished
    listed = {row["name"]: row for row in rows(folder / "parameters.csv")}
    result, ensemble = FitResult.load(folder / "fit.h5"), sw.Ensemble.load(folder / "replicas.h5")
    assert list(listed)[: len(result.names)] == list(result.names)
    assert {name for name, row in listed.items() if row["state"] == "sum rule"} == {
        "u_v.c0",
        "d_v.c0",
        "g.c0",
    }
    assert float(listed["alpha_s"]["uncertainty"]) == result.error("alpha_s")
    assert float(listed["alpha_s"]["replica mean"]) == ensemble.parameter("alpha_s").mean()
    mean, low = ensemble.mean("alpha_s"), ensemble.interval("alpha_s")[0]
    # sums over one parameter or over all: the same to rounding
    np.testing.assert_allclose(float(listed["alpha_s"]["sampling error of mean"]), mean.error, rtol=1e-9)
    np.testing.assert_allclose(float(listed["alpha_s"]["68 per cent from"]), low.value, rtol=1e-9)
    assert listed["alpha_s"]["95 per cent to"] == ""  # six replicas know nothing of it


def test_each_replica_is_evolved_by_its_own_coupling(finished):
    folder, _ = finished
    ensemble = sw.Ensemble.load(folder / "replicas.h5")
    lattice = rows(folder / "densities.csv")
    for replica in (0, 5):
        theory = sw.Theory(
            order="LO",
            coupling=sw.Coupling(float(ensemble.parameter("alpha_s")[replica]), q2=2.0, nf=3),
            flavours=3,
        )
        start = ensemble.densities
        one = sw.Densities(
            GRID, q2=2.0, nf=3, flavours=start.flavours, values=start.values[replica : replica + 1]
        )
        ops = sw.build_operators(theory, GRID, start_q2=2.0, q2=[10.0, 50.0])
        expected = ops.apply(one).at(50.0, [0.01, 0.1, 0.5], "u")[0]
        found = {
            float(row["x"]): float(row["value"])
            for row in lattice
            if (row["q2"], row["flavour"], row["replica"]) == ("50.0", "2", str(replica))
        }
        # the same operations in another order
        np.testing.assert_allclose([found[0.01], found[0.1], found[0.5]], expected, rtol=1e-12)


def test_a_finished_run_goes_on_from_its_journal(run_here, tmp_path, write_fit):
    write_fit(("number = 6", "number = 3"))
    run_here("fit", "job.toml")
    size = (tmp_path / "fit.journal").stat().st_size
    few = sw.Ensemble.load(tmp_path / "replicas.h5")
    write_fit()
    run_here("fit", "job.toml")
    many = sw.Ensemble.load(tmp_path / "replicas.h5")
    assert (tmp_path / "fit.journal").stat().st_size > size
    np.testing.assert_array_equal(many.parameters[:3], few.parameters)
    write_fit(("percent", "value"))
    done = run_here("fit", "job.toml", status=1)
    assert "this journal is of another fit: its " in done.stderr
    assert "the same command goes on" not in done.stderr


def test_an_interrupt_keeps_what_was_computed(tmp_path):
    write_case(tmp_path)
    text = (tmp_path / "job.toml").read_text().replace("number = 6", "number = 100000")
    (tmp_path / "job.toml").write_text(text)
    journal = tmp_path / "fit.journal"
    with subprocess.Popen(
        [*COMMAND, "fit", "job.toml"], cwd=tmp_path, stdout=subprocess.PIPE, stderr=subprocess.PIPE,
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.default_int_handler),
    ) as child:  # fmt: skip
        for _ in range(1000):  # at most 100 s
            if journal.exists() and journal.stat().st_size > 10_000:
                break
            time.sleep(0.1)
        child.send_signal(signal.SIGINT)
        out, said = child.communicate(timeout=60)
    assert child.returncode == 1, (out, said)
    lines = said.decode().splitlines()
    assert "the same command goes on from there" in lines[0]
    assert lines[1:] == ["scalewright: interrupted"]
    assert not (tmp_path / "fit.h5").exists()


def test_a_fit_to_the_data_alone_needs_no_replicas(run_here, tmp_path, write_fit):
    text = '[replicas]\nnumber = 6\nseed = 3\nworkers = 1\njournal = "fit.journal"\n'
    write_fit((text, ""), ('ensemble = "replicas.h5"', ""), ('theory = ["alpha_s"]', ""))
    done = run_here("fit", "job.toml")
    assert FitResult.load(tmp_path / "fit.h5").names[-1] == "ubar.c0"
    assert "replicas" not in done.stdout
    assert len(rows(tmp_path / "densities.csv")) == 2 * 3 * 7


def test_higher_twist_is_fitted_where_the_job_asks_for_it(run_here, tmp_path, write_fit):
    twist = '[[correction]]\nkind = "higher twist"\ntarget = "proton"\npolynomial = { degree = 0 }\n[output]'
    write_fit(("[output]", twist), ("number = 6", "number = 2"))
    run_here("fit", "job.toml")
    result = FitResult.load(tmp_path / "fit.h5")
    assert result.names[-2:] == ("h_proton.c0", "alpha_s")
    # the law has none; four standard deviations
    assert abs(result.value("h_proton.c0")) < 4.0 * result.error("h_proton.c0")
    listed = {row["name"]: row for row in rows(tmp_path / "parameters.csv")}
    assert float(listed["h_proton.c0"]["value"]) == result.value("h_proton.c0")
    written = rows(tmp_path / "predictions.csv")
    assert [float(row["prediction"]) for row in written] == result.prediction.tolist()
    assert all(float(row["spread"]) > 0.0 < float(row["numerical error"]) for row in written)


def test_a_network_is_fitted_with_validation(run_here, tmp_path, write_fit):
    text = (tmp_path / "job.toml").read_text() if (tmp_path / "job.toml").exists() else ""
    write_fit()
    text = (tmp_path / "job.toml").read_text()
    head, rest = text.split("[shape]")
    _, tail = rest.split("[fit]")
    shaped = """[shape]
kind = "network"
start_q2 = 2.0
hidden = [2]
seed = 1
relations = ["dbar = ubar", "s = sbar", "s = 0.5*ubar"]
momentum = "g"
numbers = { u_v = 2, d_v = 1 }
[shape.terms]
g = { power = 0.1, fall = 5 }
u_v = { power = 0.7, fall = 3.5 }
d_v = { power = 0.7, fall = 4 }
ubar = { power = 0.1, fall = 7 }
[fit]
evaluations = 30
"""
    tail = tail.replace('theory = ["alpha_s"]', "").replace(
        "seed = 3", "seed = 3\nvalidation = 0.3\npatience = 2"
    )
    (tmp_path / "job.toml").write_text(head + shaped + tail)
    done = run_here("fit", "job.toml")
    assert sw.Ensemble.load(tmp_path / "replicas.h5").names[0].startswith("weight[")
    assert "replicas of 6" in done.stdout


def test_more_starts_are_told(run_here, tmp_path, write_fit):
    text = '[replicas]\nnumber = 6\nseed = 3\nworkers = 1\njournal = "fit.journal"\n'
    data = '[chi_square]\nreference = "data"\n[fit]\nstarts = 3'
    write_fit((text, ""), ('ensemble = "replicas.h5"', ""), ("[fit]", data))
    said = run_here("fit", "job.toml").stdout
    assert "  from 3 starts: 3 end at this minimum\n" in said
    assert "from 3 starts: 3 end at this minimum" in FitResult.load(tmp_path / "fit.h5").status


def test_the_example_of_the_help_is_a_job_that_is_understood(run_here, tmp_path, write_fit):
    from scalewright.cli.fit_job import read_fit_job

    text = run_here("fit", "--help").stdout.split("with job.toml:\n")[1]
    write_fit()
    (tmp_path / "job.toml").write_text("\n".join(line.strip() for line in text.splitlines()))
    job = read_fit_job(tmp_path / "job.toml")
    assert job.free == ("alpha_s",) and job.replicas.number == 100
    assert set(job.files) == {"result", "ensemble", "densities", "parameters", "predictions", "report"}
    assert job.shape.full(job.shape.start).size == len(job.shape.shape.names)
