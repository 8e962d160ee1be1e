"""`scalewright evolve`: jobs that work give what Python gives, jobs that do not are named by file and key."""

import numpy as np
import pytest
import scalewright as sw

JOB = """
[theory]
order = "NLO"
flavours = [3, 5]
coupling = { alpha_s = 0.118, q2 = 8315.18, nf = 5 }

[grid]
x_min = 1e-4

[input]
file = "start.csv"

[output]
q2 = [10.0, 1e4]
file = "out.h5"
"""


def write(folder, *changes):
    text = JOB
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    (folder / "job.toml").write_text(text)


@pytest.fixture
def expected(start):
    theory = sw.Theory(order="NLO", coupling=sw.Coupling(0.118, q2=8315.18, nf=5))
    return sw.build_operators(theory, start.grid, start_q2=1.5, start_nf=3, q2=[10.0, 1e4]).apply(start)


def test_a_job_gives_what_python_gives(run, tmp_path, expected):
    write(tmp_path)
    done = run("evolve", "job.toml")
    found = sw.Densities.load(tmp_path / "out.h5")
    np.testing.assert_array_equal(found.values, expected.values)
    np.testing.assert_array_equal(found.q2, [10.0, 1e4])
    assert "out.h5: Densities(1 replica, 11 flavours, 2 scales" in done.stdout
    assert done.stderr == ""
    assert len(done.stdout.splitlines()) < 24


def test_stored_densities_bring_their_grid(run, tmp_path, expected):
    write(tmp_path, ("start.csv", "start.h5"), ("[grid]\nx_min = 1e-4\n", ""))
    run("evolve", "job.toml")
    found = sw.Densities.load(tmp_path / "out.h5")
    # the table keeps every bit, and so does the file
    np.testing.assert_array_equal(found.values, expected.values)
    np.testing.assert_allclose(found.momentum(), expected.momentum(), rtol=1e-13)


def test_a_table_may_have_points_of_ones_own(run, tmp_path, expected):
    write(tmp_path, ("out.h5", "out.csv"), ("[output]", "[output]\nx = [0.1, 1e-4, 0.5, 0.1]"))
    run("evolve", "job.toml")
    rows = np.genfromtxt(tmp_path / "out.csv", delimiter=",", names=True)
    assert set(rows["x"]) == {1e-4, 0.1, 0.5}
    assert rows.size == 2 * 11 * 3
    for row in rows[::7]:
        value = expected.at(row["q2"], row["x"], int(row["flavour"]))[0]
        np.testing.assert_allclose(row["value"], value, rtol=1e-13)


def test_a_job_may_stand_in_another_folder(run, tmp_path, expected):
    write(tmp_path)
    (tmp_path / "elsewhere").mkdir()
    run("evolve", tmp_path / "job.toml", "--quiet")
    assert (tmp_path / "out.h5").exists()


def test_quiet_says_nothing(run, tmp_path, start):
    write(tmp_path)
    done = run("evolve", "--quiet", "job.toml")
    assert done.stdout == done.stderr == ""


WRONG = {
    "unknown table": ([("[grid]", "[grids]")], r'job.toml: grids: unknown key; did you mean "grid"?'),
    "unknown key": (
        [('file = "start.csv"', 'fill = "start.csv"')],
        '[input] fill: unknown key; did you mean "file"?',
    ),
    "unknown option": ([("order", "ordre")], "job.toml: [theory]: unknown option 'ordre': known are"),
    "wrong order": ([('"NLO"', '"NLLO"')], "job.toml: [theory].order = 'NLLO': order must be one of"),
    "wrong coupling": (
        [("0.118", "-1")],
        "job.toml: [theory].coupling.alpha_s = -1: alpha_s must lie in (0, 1]",
    ),
    "unknown mass": ([("[grid]", "masses = { up = 1.0 }\n[grid]")], "[theory].masses: unknown option 'up'"),
    "no theory": ([("[theory]", "[theorem]")], 'job.toml: theorem: unknown key; did you mean "theory"?'),
    "negative scale": (
        [("[10.0,", "[-10.0,")],
        "job.toml: [output]: q2 = -10 at index 0: q2 must lie in (0, inf)",
    ),
    "text for a scale": ([("[10.0,", '["10",')], "job.toml: [output]"),
    "a date": ([("[10.0, 1e4]", "2020-01-01")], "job.toml: [output]: q2 = "),
    "no scales": ([("[10.0, 1e4]", "[]")], "job.toml: [output]: q2"),
    "no output": ([('file = "out.h5"', "")], "job.toml: [output] file: missing"),
    "unknown ending": ([("out.h5", "out.root")], "must end in .h5, .hdf5 or .csv"),
    "points for a stored file": ([("[output]", "[output]\nx = [0.1]")], "x is for a .csv file"),
    "a point outside": (
        [("out.h5", "out.csv"), ("[output]", "[output]\nx = [1e-6]")],
        "job.toml: [output]: x = 1e-06 at index 0: x must lie in [0.0001",
    ),
    "other nodes": ([("x_min = 1e-4", "x_min = 1e-3")], "are not the"),
    "x_min": ([("x_min = 1e-4", "x_min = 2")], "job.toml: [grid]: x_min = 2: x_min must lie in"),
    "grid is no table": (
        [("[grid]\nx_min = 1e-4\n", ""), ("[theory]", "grid = 3\n[theory]")],
        "grid = 3: must be a table",
    ),
    "two grids": ([("start.csv", "start.h5")], "brings its own grid; leave the table out"),
    "interpolate": (
        [("[input]", '[input]\ninterpolate = "yes"')],
        "[input] interpolate = 'yes': must be true or false",
    ),
    "missing": (
        [("[input]", '[input]\nmissing = "none"')],
        "[input]: missing = 'none': missing must be one of",
    ),
    "intrinsic": ([("[input]", "[input]\nintrinsic = [2]")], "job.toml: intrinsic = 2 at index 0"),
    "another scale": (
        [("[input]", "[input]\nq2 = 9.0")],
        "job.toml: [input]: q2 = 9: not among the scales at hand",
    ),
    "flavour number": (
        [("[output]", "[output]\nnf = 6")],
        "job.toml: nf = 6 at index 0: the theory has 3 to 5",
    ),
    "not toml": ([("[grid]", "[grid")], "job.toml: not TOML"),
}


@pytest.mark.parametrize("case", WRONG)
def test_what_is_asked_wrongly_is_named(run, tmp_path, start, case):
    changes, says = WRONG[case]
    write(tmp_path, *changes)
    done = run("evolve", "job.toml", status=2)
    assert says in done.stderr
    assert done.stderr.startswith("scalewright: ")
    assert done.stderr.count("\n") == 1
    assert not (tmp_path / "out.h5").exists()


def test_what_cannot_be_done_is_named(run, tmp_path, start):
    assert "none.toml: cannot be read: no such file" in run("evolve", "none.toml", status=1).stderr
    write(tmp_path, ("start.csv", "none.csv"))
    assert "none.csv: cannot be read: no such file" in run("evolve", "job.toml", status=1).stderr
    write(tmp_path, ("out.h5", "none/out.h5"))
    assert "the folder does not exist" in run("evolve", "job.toml", status=1).stderr
    (tmp_path / "taken.h5").mkdir()
    write(tmp_path, ("out.h5", "taken.h5"))
    assert "taken.h5: cannot be written: not a plain file" in run("evolve", "job.toml", status=1).stderr
    data = bytearray((tmp_path / "start.h5").read_bytes())
    data[-5] ^= 1
    (tmp_path / "start.h5").write_bytes(data)
    write(tmp_path, ("start.csv", "start.h5"), ("[grid]\nx_min = 1e-4\n", ""))
    assert "damaged" in run("evolve", "job.toml", status=1).stderr


def test_a_wrong_row_of_the_table_is_named(run, tmp_path, start):
    write(tmp_path)
    table = (tmp_path / "start.csv").read_text().splitlines()
    table[7] = table[7].rsplit(",", 1)[0] + ",abc"
    (tmp_path / "start.csv").write_text("\n".join(table))
    done = run("evolve", "job.toml", status=2)
    assert "start.csv: line 8, column value: 'abc' is not a number" in done.stderr


def test_the_example_of_the_help_is_a_job_that_runs(run, tmp_path, start):
    text = run("evolve", "--help").stdout.split("with job.toml:\n")[1]
    text = text.replace("x_min = 1e-7", "x_min = 1e-4")
    (tmp_path / "job.toml").write_text("\n".join(line.strip() for line in text.splitlines()))
    run("evolve", "job.toml")
    assert sw.Densities.load(tmp_path / "evolved.h5").scales == 3
