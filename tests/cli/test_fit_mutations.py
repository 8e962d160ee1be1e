"""Jobs of `fit` changed at random: status 0, 1 or 2, and one line that names a file where it is not 0."""

import random

import pytest
from cli.fit_case import write_case
from cli.test_mutations import CHANGES
from scalewright.cli.main import main


@pytest.fixture
def outcome(tmp_path, capsys):
    """Run with the job changed, in this process, so that nothing but a status may come out."""
    write_case(tmp_path)
    text = (tmp_path / "job.toml").read_text()
    for old in ('report = "fit.html"\n', "number = 6", 'journal = "fit.journal"\n', 'theory = ["alpha_s"]\n'):
        text = text.replace(old, "number = 2" if old == "number = 6" else "")

    def ran(change=None):
        changed = text if change is None else change(text)
        (tmp_path / "job.toml").write_text(changed, encoding="utf-8")
        status = main(["fit", str(tmp_path / "job.toml"), "--quiet"])
        out, said = capsys.readouterr()
        assert out == ""
        errors = [line for line in said.splitlines() if not line.startswith("scalewright: warning: ")]
        assert status in (0, 1, 2)
        assert len(errors) == (status != 0), said
        for line in errors:
            # a name may be what was changed: the folder still stands before it
            assert line.startswith("scalewright: ") and str(tmp_path) in line, line
        return status

    return ran


def test_the_job_itself_is_good(outcome):
    assert outcome() == 0


@pytest.mark.filterwarnings("ignore")
@pytest.mark.parametrize("change", CHANGES, ids=lambda change: change.__name__)
def test_what_is_changed_ends_in_one_line(outcome, change):
    rng = random.Random(change.__name__)
    found = [outcome(lambda text: change(rng, text)) for _ in range(6)]
    assert found.count(2) or change.__name__ == "swap"
