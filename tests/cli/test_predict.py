"""`scalewright predict`: jobs that work give what Python gives, the others are named by file, key and row."""

import csv
import os

import numpy as np
import pytest
import scalewright as sw
from scalewright.cli import campaign

JOB = """
[theory]
order = "NLO"
flavours = [3, 5]
coupling = { alpha_s = 0.118, q2 = 8315.18, nf = 5 }

[grid]
x_min = 1e-4

[input]
file = "start.csv"

[data]
file = "run1.toml"

[output]
file = "out.csv"
"""
TABLE = """
title = "Run 1, positrons"
points = "run1.csv"
measures = "reduced_cross_section"
beam = "e+"
s = 1e5

[[uncertainty]]
column = "stat"
given_in = "value"
scales_with = "nothing"

[[uncertainty]]
name = "luminosity"
size = 2.0
given_in = "percent"
scales_with = "value"
shared_as = "luminosity"
"""
POINTS = "x,q2,value,stat\n0.001,12,1.0,0.02\n0.01,12,0.7,0.01\n0.1,120,0.4,0.02\n0.3,900,0.2,0.03\n"


@pytest.fixture
def write(tmp_path, start):
    """Write a job and its table, both changed as a test asks."""

    def written(*changes):
        texts = {"job.toml": JOB, "run1.toml": TABLE, "run1.csv": POINTS}
        for old, new in changes:
            assert any(old in text for text in texts.values())
            texts = {name: text.replace(old, new) for name, text in texts.items()}
        for name, text in texts.items():
            (tmp_path / name).write_text(text)

    return written


def result(path):
    with path.open(newline="") as file:
        return list(csv.DictReader(file))


def column(rows, name):
    return np.array([float(row[name]) for row in rows])


def expected(folder, start, order="NLO", **options):
    """Return measurements and predictions by Python alone."""
    table = sw.Measurements.read(folder / "run1.toml")
    theory = sw.Theory(order=order, coupling=sw.Coupling(0.118, q2=8315.18, nf=5))
    fmap = sw.forward_map(theory, start.grid, start_q2=1.5, start_nf=3, points=table, **options)
    return table, fmap.predict(start)


def test_a_job_gives_what_python_gives(run, tmp_path, start, write):
    write()
    done = run("predict", "job.toml")
    table, predicted = expected(tmp_path, start)
    rows = result(tmp_path / "out.csv")
    np.testing.assert_array_equal(column(rows, "prediction"), predicted[0])
    for name in ("x", "q2", "y", "value"):
        np.testing.assert_array_equal(column(rows, name), getattr(table, name))
    assert {row["table"] for row in rows} == {"Run 1, positrons"}
    chi_square = sw.ChiSquare(table)
    np.testing.assert_array_equal(column(rows, "pull"), chi_square.pulls(predicted[0]))
    total = next(line for line in done.stdout.splitlines() if line.startswith("  all"))
    assert total.split() == ["all", "4", f"{chi_square.value(predicted[0]):.1f}"]
    assert done.stderr == ""
    assert len(done.stdout.splitlines()) < 24


def test_the_numerical_error_stands_beside_the_prediction(run, tmp_path, start, write):
    write()
    done = run("predict", "job.toml")
    table = sw.Measurements.read(tmp_path / "run1.toml")
    theory = sw.Theory(order="NLO", coupling=sw.Coupling(0.118, q2=8315.18, nf=5))
    fine = sw.ChebyshevGrid(x_min=1e-4, resolution="fine")
    fmap = sw.forward_map(theory, fine, start_q2=1.5, start_nf=3, points=table)
    functions = {flavour: lambda x: 0.1 * x**-0.1 * (1 - x) ** 6 for flavour in (1, -1, -2, 3, -3)}
    functions |= {21: lambda x: 2.0 * x**-0.1 * (1 - x) ** 5, 2: lambda x: 2.0 * x**0.5 * (1 - x) ** 3}
    better = fmap.predict(sw.Densities.sample(fine, q2=1.5, nf=3, functions=functions))[0]
    rows = result(tmp_path / "out.csv")
    error = column(rows, "numerical error")
    # the same input on the fine grid, taken for exact
    assert (abs(column(rows, "prediction") - better) <= error).all()
    assert (error < 1e-6 * column(rows, "prediction")).all()
    assert "numerical errors at most" in done.stdout


def test_pulls_are_differences_over_uncertainties(run, tmp_path, write):
    write()
    run("predict", "job.toml", "--quiet")
    rows = result(tmp_path / "out.csv")
    # the sum of squares of the two errors, by hand; a few roundings
    sigma = np.hypot([0.02, 0.01, 0.02, 0.03], 0.02 * column(rows, "value"))
    np.testing.assert_allclose(column(rows, "uncertainty"), sigma, rtol=1e-14)
    pulls = (column(rows, "value") - column(rows, "prediction")) / sigma
    np.testing.assert_allclose(column(rows, "pull"), pulls, rtol=1e-12)


def test_orders_regimes_and_what_is_not_corrected_are_said(run, tmp_path, write):
    write(
        ('beam = "e+"', 'beam = "e+"\ntarget = "deuteron"'), ("[output]", "[regimes]\nlow_x = 0.02\n[output]")
    )
    done = run("predict", "job.toml")
    rows = result(tmp_path / "out.csv")
    assert [row["order of light F2"] for row in rows] == ["NLO"] * 4
    heavy = [row["order of heavy F2"] for row in rows]
    assert heavy == ["charm massless NLO, bottom absent"] * 2 + ["massless NLO"] * 2
    assert {row["order of FL"] for row in rows} == {"a^1"}
    assert [row["regime"] for row in rows] == ["low x"] * 2 + ["inclusive"] * 2
    for words in (
        "no correction for the deuteron (4 rows)",
        "no higher twist",
        "regimes      2 low x, 2 inclus",
    ):
        assert words in done.stdout, words


def test_known_factors_multiply_and_their_uncertainty_is_common(run, tmp_path, start, write):
    factor = '[[correction]]\nkind = "known factor"\ntarget = "deuteron"\nfile = "factor.csv"\n'
    write(('beam = "e+"', 'beam = "e+"\ntarget = "deuteron"'), ("[output]", factor + "[output]"))
    (tmp_path / "factor.csv").write_text("x,factor,model\n0.001,1.0,0.0\n0.3,0.9,0.02\n")
    done = run("predict", "job.toml")
    table, plain = expected(tmp_path, start)
    slope = (table.x - 0.001) / 0.299
    rows = result(tmp_path / "out.csv")
    np.testing.assert_allclose(column(rows, "prediction"), plain[0] * (1 - 0.1 * slope), rtol=1e-12)
    shift = plain[0] * 0.02 * slope
    chi_square = sw.ChiSquare(table, theory=np.outer(shift, shift))
    np.testing.assert_allclose(
        column(rows, "uncertainty"), np.sqrt(np.diagonal(chi_square.covariance)), rtol=1e-12
    )
    assert f"{chi_square.value(plain[0] * (1 - 0.1 * slope)):.1f}" in done.stdout
    assert "R_deuteron: KnownFactor for deuteron, 1 parameter" in done.stdout
    assert "no correction for the deuteron" not in done.stdout


def test_the_reference_may_be_the_prediction(run, tmp_path, start, write):
    write(("[output]", '[chi_square]\nreference = "prediction"\nform = "nuisance"\n[output]'))
    done = run("predict", "job.toml")
    table, predicted = expected(tmp_path, start)
    value = sw.ChiSquare(table, reference=predicted[0]).value(predicted[0])
    assert f"  {value:.1f}\n" in done.stdout
    sigma = np.hypot([0.02, 0.01, 0.02, 0.03], 0.02 * predicted[0])
    np.testing.assert_allclose(column(result(tmp_path / "out.csv"), "uncertainty"), sigma, rtol=1e-14)


def test_replicas_have_a_mean_and_a_spread(run, tmp_path, start, write):
    values = start.values * np.array([0.9, 1.0, 1.1])[:, None, None]
    sw.Densities(start.grid, q2=1.5, nf=3, flavours=start.flavours, values=values).save(tmp_path / "start.h5")
    write(("start.csv", "start.h5"), ("[grid]\nx_min = 1e-4\n", ""))
    done = run("predict", "job.toml")
    rows = result(tmp_path / "out.csv")
    _, predicted = expected(tmp_path, start)
    # linear in the densities: the mean is that of 1, the standard deviation of 0.9, 1, 1.1 is 0.1; roundings
    np.testing.assert_allclose(column(rows, "prediction"), predicted[0], rtol=1e-12)
    np.testing.assert_allclose(column(rows, "spread"), 0.1 * predicted[0], rtol=1e-10)
    assert "chi-square is that of the mean of 3 replicas" in done.stdout


def test_options_of_the_prediction_reach_it(run, tmp_path, start, write):
    weak = '[electroweak]\ninputs = "on shell"\n[prediction]\ntarget_mass = true\n[output]'
    write(("[output]", weak), ("0.3,900", "0.3,2"))
    run("predict", "job.toml")
    _, plain = expected(tmp_path, start)
    on_shell = sw.Electroweak.on_shell()
    _, predicted = expected(tmp_path, start, target_mass=True, electroweak=on_shell)
    found = column(result(tmp_path / "out.csv"), "prediction")
    np.testing.assert_array_equal(found, predicted[0])
    assert abs(found[3] / plain[0, 3] - 1.0) > 1e-2  # x = 0.3 at 2 GeV^2: x^2 M^2/Q^2 is 4 per cent


def test_cuts_and_several_tables(run, tmp_path, write):
    write(
        ('file = "run1.toml"', 'file = ["run1.toml", "run2.toml"]\ncut = { q2 = [20.0, inf], x = [5e-3, 1] }')
    )
    (tmp_path / "run2.toml").write_text(TABLE.replace("Run 1, positrons", "Run 2"))
    done = run("predict", "job.toml")
    rows = result(tmp_path / "out.csv")
    assert [row["table"] for row in rows] == ["Run 1, positrons"] * 2 + ["Run 2"] * 2
    assert min(column(rows, "q2")) == 120.0
    assert "cut 0.005 <= x <= 1: removed 2 (1 of Run 1, positrons, 1 of Run 2)" in done.stdout
    assert "cut 20 <= q2: removed 2 (1 of Run 1, positrons, 1 of Run 2)" in done.stdout


def test_missing_flavours_may_be_zero(run, tmp_path, start, write):
    light = tuple(flavour for flavour in start.flavours if abs(flavour) != 3)
    values = start.values[:, [start.flavours.index(flavour) for flavour in light]]
    sw.Densities(start.grid, q2=1.5, nf=3, flavours=light, values=values).save(tmp_path / "start.h5")
    stored = (("start.csv", "start.h5"), ("[grid]\nx_min = 1e-4\n", ""))
    write(*stored)
    assert "densities have no flavour" in run("predict", "job.toml", status=2).stderr
    write(*stored, ("[input]", '[input]\nmissing = "zero"'))
    run("predict", "job.toml")
    whole = start.values.copy()
    whole[:, [start.flavours.index(3), start.flavours.index(-3)]] = 0.0
    full = sw.Densities(start.grid, q2=1.5, nf=3, flavours=start.flavours, values=whole)
    found = column(result(tmp_path / "out.csv"), "prediction")
    np.testing.assert_allclose(found, expected(tmp_path, full)[1][0], rtol=1e-13)  # another order of sums


def test_a_picture_is_drawn_where_it_is_asked_for(run, tmp_path, write):
    pytest.importorskip("matplotlib")
    write(('file = "out.csv"', 'file = "out.csv"\npicture = "out.png"'))
    done = run("predict", "job.toml")
    assert (tmp_path / "out.png").read_bytes().startswith(b"\x89PNG")
    assert "out.png" in done.stdout


def test_without_matplotlib_a_picture_is_refused_before_any_work(run, tmp_path, write):
    (tmp_path / "sitecustomize.py").write_text(
        "import importlib.util as u; f = u.find_spec\n"
        "u.find_spec = lambda name, *a: None if name == 'matplotlib' else f(name, *a)"
    )
    write(('file = "out.csv"', 'file = "out.csv"\npicture = "out.png"'))
    path = os.pathsep.join([str(tmp_path), os.environ.get("PYTHONPATH", "")])
    done = run("predict", "job.toml", status=1, env=os.environ | {"PYTHONPATH": path})
    assert "job.toml: [output] picture: matplotlib is not installed (pip install" in done.stderr
    assert not (tmp_path / "out.csv").exists()


WRONG = {
    "unknown table": ([("[data]", "[date]")], 'job.toml: date: unknown key; did you mean "data"?'),
    "unknown key": (
        [('file = "run1.toml"', 'flie = "run1.toml"')],
        '[data] flie: unknown key; did you mean "file"?',
    ),
    "no data": ([('file = "run1.toml"', "")], "job.toml: [data] file: missing"),
    "data is a number": (
        [('file = "run1.toml"', "file = 3")],
        "job.toml: [data] file = 3: must be the name of",
    ),
    "one table twice": (
        [('"run1.toml"', '["run1.toml", "run1.toml"]')],
        "job.toml: [data] file: table 'Run 1, positrons' stands there twice",
    ),
    "a cut that is none": (
        [("[output]", "cut = { x = 3 }\n[output]")],
        "job.toml: [data.cut]: x = 3: x must be",
    ),
    "an unknown cut": ([("[output]", "cut = { q = [1, 2] }\n[output]")], "[data.cut] q: unknown key"),
    "a cut of nan": ([("[output]", "cut = { x = [nan, 1] }\n[output]")], "[data.cut]: x = nan"),
    "nothing left": (
        [("[output]", "cut = { q2 = [1e6, inf] }\n[output]")],
        "job.toml: [data.cut]: nothing left after cuts: 1000000 <= q2: removed 4",
    ),
    "no uncertainty": (
        [(TABLE[TABLE.index("[[uncertainty]]") :], "")],
        "run1.csv: line 2: the datum has no uncertainty at all",
    ),
    "unknown measure": (
        [("reduced_cross", "reduce_cross")],
        "run1.toml: measures = 'reduce_cross_section': must be",
    ),
    "unknown beam": ([('"e+"', '"p+"')], "run1.toml: beam = 'p+': must be one of"),
    "a wrong cell": ([("0.1,120,0.4", "0.1,12o,0.4")], "run1.csv: line 4, column q2: '12o' is not a number"),
    "y above 1": ([("0.001,12", "0.0001,12")], "run1.csv: line 2: y = 1.2"),
    "a point below the grid": (
        [("0.001,12", "0.00005,4")],
        "job.toml: run1.csv: line 2: x = 5e-05: x must lie in [0.0001",
    ),
    "a scale below all couplings": ([("0.1,120", "0.1,0.01")], "run1.csv: line 4"),
    "electroweak inputs": (
        [("[output]", '[electroweak]\ninputs = "on-shell"\n[output]')],
        "job.toml: [electroweak]: inputs = 'on-shell': inputs must be one of",
    ),
    "an input that is derived": (
        [("[output]", '[electroweak]\ninputs = "on shell"\nsin2 = 0.23\n[output]')],
        "job.toml: [electroweak] sin2: unknown key",
    ),
    "a wrong input": (
        [("[output]", "[electroweak]\nsin2 = 2.3\n[output]")],
        "job.toml: [electroweak]: sin2 = 2.3: sin2 must lie in (0, 1)",
    ),
    "target mass": (
        [("[output]", "[prediction]\ntarget_mass = 1\n[output]")],
        "job.toml: [prediction] target_mass = 1: must be true or false",
    ),
    "subtraction": (
        [("[output]", '[prediction]\nsubtraction = "dampened"\n[output]')],
        "job.toml: [prediction]: subtraction = 'dampened': subtraction must be one of",
    ),
    "a correction of no kind": (
        [("[output]", '[[correction]]\nkind = "higher twists"\n[output]')],
        'job.toml: [correction 1]: kind = \'higher twists\': kind must be one of "known factor", "higher',
    ),
    "an unknown boundary": (
        [("[output]", "[regimes]\nlow_q = 2\n[output]")],
        "job.toml: [regimes] low_q: unknown key",
    ),
    "form": (
        [("[output]", '[chi_square]\nform = "matrix"\n[output]')],
        "job.toml: [chi_square]: form = 'matrix': form must be one of",
    ),
    "reference": (
        [("[output]", '[chi_square]\nreference = "truth"\n[output]')],
        "job.toml: [chi_square]: reference = 'truth': reference must be one of",
    ),
    "ending": ([("out.csv", "out.h5")], "job.toml: [output]: file = "),
    "another scale": ([("[input]", "[input]\nq2 = 9.0")], "job.toml: [input]: q2 = 9: not among the scales"),
    "flavours of the theory": ([("[3, 5]", "4")], "job.toml: "),
}


@pytest.mark.parametrize("case", WRONG)
def test_what_is_asked_wrongly_is_named(run, tmp_path, write, case):
    changes, says = WRONG[case]
    write(*changes)
    done = run("predict", "job.toml", status=2)
    assert says in done.stderr
    assert done.stderr.startswith("scalewright: ")
    assert done.stderr.count("\n") == 1
    assert not (tmp_path / "out.csv").exists()


def test_what_cannot_be_done_is_named(run, tmp_path, write):
    write(("run1.toml", "none.toml"))
    assert "none.toml: cannot be read: no such file" in run("predict", "job.toml", status=1).stderr
    write(("run1.csv", "none.csv"))
    assert "none.csv: cannot be read: no such file" in run("predict", "job.toml", status=1).stderr
    write(("out.csv", "none/out.csv"))
    assert (
        "[output] file = 'none/out.csv': the folder does not exist"
        in run("predict", "job.toml", status=1).stderr
    )
    (tmp_path / "taken.csv").mkdir()
    write(("out.csv", "taken.csv"))
    assert "taken.csv: cannot be written: not a plain file" in run("predict", "job.toml", status=1).stderr


def test_the_example_of_the_help_is_a_job_that_runs(run, tmp_path, write):
    text = run("predict", "--help").stdout.split("with job.toml:\n")[1]
    write()
    text = text.replace("x_min = 1e-5", "x_min = 1e-4")
    (tmp_path / "job.toml").write_text("\n".join(line.strip() for line in text.splitlines()))
    run("predict", "job.toml")
    assert len(result(tmp_path / "predictions.csv")) == 4


def test_the_campaign_is_predicted_from_its_law(run, tmp_path):
    campaign.law(sw.ChebyshevGrid(x_min=1e-5)).save(tmp_path / "law.h5")
    (tmp_path / "job.toml").write_text(
        f"""
        theory = {{ order = "NNLO", coupling = {{ alpha_s = 0.118, q2 = {91.1876**2!r}, nf = 5 }} }}
        input = {{ file = "law.h5" }}
        data = {{ file = '{campaign.folder() / "campaign.toml"}' }}
        chi_square = {{ reference = "prediction" }}
        output = {{ file = "out.csv" }}
        """
    )
    done = run("predict", "job.toml")
    total = float(done.stdout.split("  all ")[1].split()[1])
    assert len(result(tmp_path / "out.csv")) == 590
    assert abs(total - 590) < 4 * np.sqrt(2 * 590)  # four standard deviations of a chi-square of 590
