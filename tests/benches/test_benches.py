"""Each bench once, small, for its answer: a time is published only beside a checked one."""

from __future__ import annotations

import json
import subprocess
import sys

import pytest
from house.tree import ROOT

BENCHES = (
    "accuracy",
    "apply",
    "build",
    "closure",
    "ensemble",
    "evolve",
    "fit",
    "forward",
    "memory",
    "plain",
    "plain_forward",
    "quoted_error",
    "unit",
    "world_fit",
)


@pytest.mark.parametrize("bench", BENCHES)
def test_the_answer_of_a_bench_is_right(bench: str) -> None:
    command = [sys.executable, str(ROOT / "benches" / f"{bench}.py"), "--small", "--json"]
    done = subprocess.run(command, capture_output=True, text=True, check=False, timeout=110)
    assert done.returncode == 0, done.stderr
    figures = json.loads(done.stdout)
    assert figures
    assert all(figure["what"] and figure["value"] for figure in figures)


def test_every_bench_is_run() -> None:
    there = {path.stem for path in (ROOT / "benches").glob("*.py")}
    assert there - {"by_hand", "figures", "job", "run"} == set(BENCHES)


def test_a_wrong_answer_is_not_published() -> None:
    code = "from figures import check; check('this', float('nan'), 1.0)"
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT / "benches", capture_output=True, text=True, check=False
    )
    assert done.returncode == 1
    assert "wrong answer: this" in done.stderr
