"""Jobs and tables changed at random: status 0, 1 or 2, one line that names a file, never an exception."""

import random

import pytest
import scalewright as sw
from scalewright.cli.main import main

JOB = """[theory]
order = "LO"
flavours = [3, 5]
coupling = { alpha_s = 0.118, q2 = 8315.18, nf = 5 }
masses = { charm = 1.27, bottom = 4.18, top = 162.5, kind = "msbar" }
[grid]
x_min = 1e-2
resolution = "standard"
[input]
file = "start.csv"
q2 = 1.5
missing = "zero"
[output]
q2 = [10.0, 1e4]
file = "out.csv"
x = [0.1, 0.5]
"""
VALUES = [
    "",
    "-1",
    "0",
    "1e400",
    "nan",
    "inf",
    "1e-320",
    '"x"',
    "[]",
    "[[1]]",
    "{}",
    "true",
    "2020-01-01",
    "'''",
    "9" * 400,
]


def cut(rng, text):
    return text[: rng.randrange(len(text))]


def delete(rng, text):
    lines = text.splitlines(keepends=True)
    del lines[rng.randrange(len(lines))]
    return "".join(lines)


def repeat(rng, text):
    lines = text.splitlines(keepends=True)
    lines.insert(rng.randrange(len(lines)), rng.choice(lines))
    return "".join(lines)


def swap(rng, text):
    lines = text.splitlines(keepends=True)
    i, j = rng.randrange(len(lines)), rng.randrange(len(lines))
    lines[i], lines[j] = lines[j], lines[i]
    return "".join(lines)


def other_value(rng, text):
    lines = text.splitlines(keepends=True)
    places = [i for i, line in enumerate(lines) if "=" in line or "," in line]
    i = rng.choice(places)
    separator = "=" if "=" in lines[i] else ","
    parts = lines[i].rstrip("\n").split(separator)
    parts[rng.randrange(1, len(parts))] = rng.choice(VALUES)
    lines[i] = separator.join(parts) + "\n"
    return "".join(lines)


def other_letter(rng, text):
    place = rng.randrange(len(text))
    return text[:place] + rng.choice("abz09=[]{}\"'.,#\t\r\n\0é€ ;") + text[place + 1 :]


CHANGES = [cut, delete, repeat, swap, other_value, other_letter]
ENCODINGS = ["utf-8", "utf-8-sig", "utf-16", "latin-1"]


@pytest.fixture(scope="module")
def table(tmp_path_factory):
    grid = sw.ChebyshevGrid(x_min=1e-2)
    shape = {21: lambda x: 2.0 * x**-0.1 * (1 - x) ** 5, 2: lambda x: 2.0 * x**0.5 * (1 - x) ** 3}
    path = tmp_path_factory.mktemp("table") / "start.csv"
    sw.Densities.sample(grid, q2=1.5, nf=3, functions=shape).to_csv(path)
    return path.read_text()


def outcome(folder, capsys, job, table, encoding="utf-8"):
    (folder / "job.toml").write_bytes(job.encode(encoding, "replace"))
    (folder / "start.csv").write_bytes(table.encode(encoding, "replace"))
    status = main(["evolve", str(folder / "job.toml"), "--quiet"])
    out, said = capsys.readouterr()
    assert out == ""
    errors = [line for line in said.splitlines() if not line.startswith("scalewright: warning: ")]
    if status == 0:
        assert errors == []
    else:
        assert status in (1, 2)
        assert len(errors) == 1, said
        assert errors[0].startswith("scalewright: ")
        assert "job.toml" in errors[0] or "start.csv" in errors[0] or "out" in errors[0], errors
    return status


def test_the_job_itself_is_good(tmp_path, capsys, table):
    assert outcome(tmp_path, capsys, JOB, table) == 0


@pytest.mark.timeout(120)
@pytest.mark.parametrize("change", CHANGES, ids=lambda change: change.__name__)
def test_changed_jobs_end_in_one_line(tmp_path, capsys, table, change):
    rng = random.Random(change.__name__)
    found = [outcome(tmp_path, capsys, change(rng, JOB), table) for _ in range(60)]
    assert 2 in found


@pytest.mark.timeout(120)
@pytest.mark.parametrize("change", CHANGES, ids=lambda change: change.__name__)
def test_changed_tables_end_in_one_line(tmp_path, capsys, table, change):
    rng = random.Random(change.__name__)
    found = [outcome(tmp_path, capsys, JOB, change(rng, table)) for _ in range(60)]
    assert 2 in found or change is swap  # rows may stand in any order


@pytest.mark.parametrize("encoding", ENCODINGS)
def test_encodings_are_read_or_refused(tmp_path, capsys, table, encoding):
    job = JOB + "# é\n"
    status = outcome(tmp_path, capsys, job, table, encoding)
    assert status == (0 if encoding.startswith("utf-8") else 2)
