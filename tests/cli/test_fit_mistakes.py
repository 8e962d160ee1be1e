"""`scalewright fit`: mistakes are named, and what cannot be finished is said and kept."""

import os

import pytest
from scalewright.fitting.least_squares import FitResult

WRONG = {
    "no shape": ([("[shape]", "[shap]")], 'job.toml: shap: unknown key; did you mean "shape"?'),
    "unknown kind": (
        [("start_q2 = 2.0", 'start_q2 = 2.0\nkind = "spline"')],
        "[shape]: kind = 'spline': kind must be",
    ),
    "no start": ([("start_q2 = 2.0", "")], "job.toml: [shape] start_q2: missing"),
    "negative start": ([("start_q2 = 2.0", "start_q2 = -2.0")], "job.toml: [shape]: start_q2 = -2"),
    "a network's key": ([("start_q2 = 2.0", "start_q2 = 2.0\nhidden = [3]")], "[shape] hidden: unknown key"),
    "unknown flavour": ([("u_v = { power", "u_w = { power")], "job.toml: [shape]"),
    "a term without power": (
        [("g = { power = 0.1, fall = 5 }", "g = { fall = 5 }")],
        "[shape.terms.g] power: missing",
    ),
    "a word for a power": (
        [("g = { power = 0.1, fall", 'g = { power = "low", fall')],
        "job.toml: [shape.terms.g]: power = 'low'",
    ),
    "a flavour undetermined": (
        [('"dbar = ubar", ', "")],
        "job.toml: [shape]: terms: 7 flavours need as many",
    ),
    "an impossible sum rule": (
        [("numbers = { u_v = 2", "numbers = { g = 2")],
        "job.toml: [shape]: numbers = 'g': only differences",
    ),
    "momentum of no term": (
        [('momentum = "g"', 'momentum = "q"')],
        "job.toml: [shape]: momentum = 'q': must be a term",
    ),
    "relations that are text": (
        [('["dbar = ubar", "s = sbar", "s = 0.5*ubar"]', '"s = sbar"')],
        "[shape] relations = 's = sbar': must be a list",
    ),
    "unknown parameter": (
        [("d_v.fall = { fixed", "d_v.fal = { fixed")],
        "job.toml: [parameters]: fixed = 'd_v.fal': no parameter of this name",
    ),
    "unknown restriction": (
        [("{ start = 3.4, bounds", "{ begin = 3.4, bounds")],
        "job.toml: [parameters.u_v.fall] begin: unknown key",
    ),
    "bounds that cross": (
        [("bounds = [1, 10]", "bounds = [10, 1]")],
        "job.toml: [parameters]: bounds[u_v.fall]",
    ),
    "start outside": (
        [("bounds = [1, 10]", "bounds = [4, 10]")],
        "job.toml: [parameters]: start[u_v.fall] = 3.4",
    ),
    "bounds of one": (
        [("bounds = [1, 10]", "bounds = 10")],
        "[parameters.u_v.fall] bounds = 10: must be two numbers",
    ),
    "a prior of no width": (
        [("prior = [0.1, 0.05]", "prior = [0.1, 0]")],
        "job.toml: [parameters]: priors[ubar.power]",
    ),
    "tied to nothing": (
        [('tied = "u_v.power"', 'tied = "u_v.pow"')],
        "job.toml: [parameters]: tied = 'u_v.pow'",
    ),
    "fixed = false": (
        [("d_v.fall = { fixed = true", "d_v.fall = { fixed = false")],
        "[parameters.d_v.fall] fixed = false",
    ),
    "a coupling that is not free": (
        [('theory = ["alpha_s"]', ""), ("[fit]", "alpha_s = { prior = [0.3, 0.1] }\n[fit]")],
        "[parameters.alpha_s]: alpha_s is not free: name it in [fit] theory",
    ),
    "bounds of a coupling": (
        [("[fit]", "alpha_s = { bounds = [0.3, 0.4] }\n[fit]")],
        "[parameters.alpha_s] bounds: unknown key",
    ),
    "unknown theory parameter": (
        [('["alpha_s"]', '["alphas"]')],
        "[fit]: theory = 'alphas': theory must be one of",
    ),
    "theory as text": ([('["alpha_s"]', '"alpha_s"')], "[fit] theory = 'alpha_s': must be a list of"),
    "theory twice": (
        [('["alpha_s"]', '["alpha_s", "alpha_s"]')],
        "[fit]: theory = 'alpha_s': stands there twice",
    ),
    "one replica": (
        [("number = 6", "number = 1")],
        "job.toml: [replicas]: number = 1: number must be from 2",
    ),
    "no seed": ([("seed = 3", "")], "job.toml: [replicas] seed: missing"),
    "workers": ([("workers = 1", "workers = 0")], "[replicas]: workers = 0: workers must be from 1"),
    "nothing to write": (
        [
            (JOB_OUT, "")
            for JOB_OUT in (
                'result = "fit.h5"',
                'ensemble = "replicas.h5"',
                'densities = "densities.csv"',
                "q2 = [10.0, 50.0]",
                "x = [0.01, 0.1, 0.5]",
                'parameters = "parameters.csv"',
                'predictions = "predictions.csv"',
            )
        ],
        "job.toml: [output]: nothing to write: name one of result, ensemble",
    ),
    "one file twice": ([('"predictions.csv"', '"parameters.csv"')], "[output] predictions = "),
    "a wrong ending": ([('"fit.h5"', '"fit.csv"')], "job.toml: [output]: result = "),
    "ensemble of no replicas": (
        [('[replicas]\nnumber = 6\nseed = 3\nworkers = 1\njournal = "fit.journal"\n', "")],
        "[output] ensemble: there are no replicas: add a table [replicas]",
    ),
    "x below the grid": ([("x = [0.01, 0.1", "x = [0.001, 0.1")], "job.toml: [output]: x = 0.001 at index 0"),
    "scales of no densities": (
        [('densities = "densities.csv"', "")],
        "[output] q2: only for the file of densities",
    ),
    "chi-square": (
        [("[shape]", '[chi_square]\nreference = "truth"\n[shape]')],
        "[chi_square]: reference = 'truth': reference must be one of",
    ),
    "more parameters than data": (
        [("[shape]", "[data.cut]\nx = [0.5, 1]\nq2 = [90, inf]\n[shape]")],
        "job.toml: shape: 6 parameters for 1 data and 1 priors",
    ),
    "nothing left": (
        [("[shape]", "[data.cut]\nx = [0.9, 1]\n[shape]")],
        "[data.cut]: nothing left after cuts",
    ),
    "a nan cell": ([("0.02,4,", "0.02,nan,")], "run1.csv: line 2"),
}


@pytest.mark.parametrize("case", WRONG)
def test_what_is_asked_wrongly_is_named(tmp_path, write_fit, capsys, case):
    from scalewright.cli.main import main

    changes, says = WRONG[case]
    write_fit(*changes)
    assert main(["fit", str(tmp_path / "job.toml")]) == 2
    out, said = capsys.readouterr()
    assert says in said.replace(str(tmp_path) + os.sep, ""), said
    assert said.startswith("scalewright: ") and said.count("\n") == 1 and out == ""
    assert not list(tmp_path.glob("*.h5"))


def test_what_cannot_be_done_is_named(run_here, tmp_path, write_fit):
    write_fit(('"fit.h5"', '"none/fit.h5"'))
    assert (
        "[output] result = 'none/fit.h5': the folder does not exist"
        in run_here("fit", "job.toml", status=1).stderr
    )
    write_fit(("[output]", "[output]\npictures = 'run1.toml'"))
    assert (
        "[output] pictures = 'run1.toml': the folder cannot be made"
        in run_here("fit", "job.toml", status=1).stderr
    )


def test_a_fit_that_does_not_converge_ends_with_status_1(run_here, tmp_path, write_fit):
    text = '[replicas]\nnumber = 6\nseed = 3\nworkers = 1\njournal = "fit.journal"\n'
    data = '[chi_square]\nreference = "data"\n[fit]\nevaluations = 1'
    write_fit((text, ""), ('ensemble = "replicas.h5"', ""), ("[fit]", data))
    done = run_here("fit", "job.toml", status=1)
    assert "not converged: stopped after" in done.stderr and "what was found is written" in done.stderr
    assert not FitResult.load(tmp_path / "fit.h5").converged


def test_a_fit_that_does_not_settle_is_written(run_here, tmp_path, write_fit, monkeypatch):
    from scalewright.cli import fitted
    from scalewright.fitting.least_squares import NotSettledError, fit

    def restless(*arguments, **options):
        found = fit(*arguments, **options)
        raise NotSettledError("rebuild: alpha_s has not settled after 10 maps", found)

    monkeypatch.setattr(fitted, "fit", restless)
    write_fit()
    said = run_here("fit", "job.toml", status=2).stderr
    assert "has not settled after 10 maps; the last fit, which is in " in said
    assert "attribute" not in said and "converged: " in said
    assert FitResult.load(tmp_path / "fit.h5").names[-1] == "alpha_s"


def test_a_mass_that_runs_away_is_said_to(run_here, tmp_path, write_fit):
    # data of three light quarks alone, described with charm: it would be pushed beyond bottom
    text = '[replicas]\nnumber = 6\nseed = 3\nworkers = 1\njournal = "fit.journal"\n'
    heavy = 'heavy_quarks = "massive"\nmasses = { charm = 1.3, bottom = 4.18, top = 162.5, kind = "pole" }'
    write_fit(
        (text, ""), ('ensemble = "replicas.h5"', ""), ('"LO"', '"NLO"'),
        ("flavours = 3", f"flavours = 3\n{heavy}"), ('["alpha_s"]', '["alpha_s", "charm"]'),
    )  # fmt: skip
    said = run_here("fit", "job.toml", status=2).stderr
    assert "rebuild" in said and "; the last fit" in said and "this is a study" in said
    assert "attribute" not in said and said.count("\n") == 1
    assert not (tmp_path / "fit.h5").exists()  # charm above bottom is no theory that could be written


def test_a_coupling_that_ends_at_zero_is_named(run_here, tmp_path, write_fit):
    write_fit()
    lines = (tmp_path / "run1.csv").read_text().splitlines()
    cells = [line.split(",") for line in lines[1:]]
    large = [",".join([x, q2, repr(100.0 * float(value)), stat]) for x, q2, value, stat in cells]
    (tmp_path / "run1.csv").write_text("\n".join([lines[0], *large]) + "\n")
    said = run_here("fit", "job.toml", status=2).stderr
    assert "alpha_s = 0: alpha_s must lie in (0, 1]" in said and said.count("\n") == 1
