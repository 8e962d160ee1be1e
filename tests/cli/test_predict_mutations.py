"""Jobs of `predict` and their tables changed at random: status 0, 1 or 2, one line that names a file."""

import random

import pytest
import scalewright as sw
from cli.test_mutations import CHANGES, swap
from scalewright.cli.main import main

FILES = {
    "job.toml": """[theory]
order = "LO"
flavours = [3, 5]
coupling = { alpha_s = 0.118, q2 = 8315.18, nf = 5 }
[electroweak]
inputs = "effective"
sin2 = 0.2315
[input]
file = "start.h5"
missing = "zero"
[data]
file = ["run.toml"]
cut = { x = [0.02, 1.0], q2 = [5.0, inf] }
[prediction]
target_mass = false
[chi_square]
form = "covariance"
reference = "data"
[output]
file = "out.csv"
""",
    "run.toml": """title = "Run 1"
points = "run.csv"
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
""",
    "run.csv": "x,q2,value,stat\n0.1,120,0.4,0.02\n0.2,300,0.3,0.02\n0.3,900,0.2,0.03\n",
}


@pytest.fixture
def outcome(tmp_path, capsys):
    """Run with one of the files changed, in this process, so that nothing but a status may come out."""
    shape = {21: lambda x: 2.0 * x**-0.1 * (1 - x) ** 5, 2: lambda x: 2.0 * x**0.5 * (1 - x) ** 3}
    grid = sw.ChebyshevGrid(x_min=1e-2)
    sw.Densities.sample(grid, q2=1.5, nf=3, functions=shape).save(tmp_path / "start.h5")

    def ran(**changed):
        texts = FILES | {name.replace("_", "."): text for name, text in changed.items()}
        for name, text in texts.items():
            (tmp_path / name).write_text(text, encoding="utf-8")
        status = main(["predict", str(tmp_path / "job.toml"), "--quiet"])
        out, said = capsys.readouterr()
        assert out == ""
        errors = [line for line in said.splitlines() if not line.startswith("scalewright: warning: ")]
        assert status in (0, 1, 2)
        assert len(errors) == (status != 0), said
        for line in errors:
            assert line.startswith("scalewright: ")
            # a name may be what was changed: the folder still stands before it
            assert any(name in line for name in (*FILES, str(tmp_path))), line
        return status

    return ran


def test_the_job_itself_is_good(outcome):
    assert outcome() == 0


@pytest.mark.filterwarnings("ignore::scalewright.InputWarning")
@pytest.mark.parametrize("file", FILES)
@pytest.mark.parametrize("change", CHANGES, ids=lambda change: change.__name__)
def test_what_is_changed_ends_in_one_line(outcome, change, file):
    rng = random.Random(change.__name__ + file)
    found = [outcome(**{file.replace(".", "_"): change(rng, FILES[file])}) for _ in range(40)]
    # the lines of a table of points may go, come twice or change places
    assert 2 in found or (file == "run.csv" and change is not swap) or change is swap
