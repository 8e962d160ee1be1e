"""Runs every bench in a process of its own and writes `tables.md`.

python benches/run.py            (a quiet machine, a few minutes)
python benches/run.py build apply
"""

from __future__ import annotations

import argparse
import json
import os
import platform
import subprocess
import sys
from pathlib import Path

from figures import Figure, table

HERE = Path(__file__).resolve().parent
BENCHES = {
    "unit": "The unit",
    "build": "Building operators",
    "apply": "Applying them",
    "evolve": "One density without operators",
    "forward": "The map from input to predictions",
    "fit": "Fits",
    "ensemble": "Ensembles",
    "plain": "Against plain numpy",
    "plain_forward": "Predictions in plain numpy",
    "memory": "Memory",
    "quoted_error": "The numerical error that is quoted",
    "closure": "Closure test",
    "world_fit": "F2 of the world",
    "accuracy": "Accuracy",
}


def run(name: str) -> list[Figure]:
    """Return the figures of one bench."""
    command = [sys.executable, str(HERE / f"{name}.py"), "--json"]
    done = subprocess.run(command, stdout=subprocess.PIPE, text=True, check=False)
    if done.returncode:
        raise SystemExit(f"{name}.py failed")
    return [Figure(**figure) for figure in json.loads(done.stdout)]


def commit() -> str:
    """Return the commit, and whether the tree differs from it."""

    def git(*words: str) -> str:
        return subprocess.run(
            ["git", *words], cwd=HERE, capture_output=True, text=True, check=True
        ).stdout.strip()

    changed = " with changes" if git("status", "--porcelain", "--untracked-files=no") else ""
    return git("rev-parse", "--short=12", "HEAD") + changed


def computer() -> str:
    """Describe the machine in words, and how busy it was."""
    load = f"{os.getloadavg()[0]:.1f}" if hasattr(os, "getloadavg") else "unknown"
    return (
        f"{os.cpu_count()} processors ({platform.machine()}), {platform.system()}, "
        f"Python {platform.python_version()}; other work at the start: {load} processors"
    )


def main() -> None:
    """Run what is asked for, everything by default, and write the tables."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("bench", nargs="*", choices=[*BENCHES, []], help="which (default: all)")
    names = parser.parse_args().bench or list(BENCHES)
    about = f"Commit {commit()}; {computer()}."
    parts = [
        "# Measured",
        "",
        "Written by `python benches/run.py`. Times are given in units: see the first table.",
        about,
    ]
    for name in names:
        print(f"{name} ...", file=sys.stderr, flush=True)
        parts += ["", f"## {BENCHES[name]}", "", f"`python benches/{name}.py`", "", table(run(name))]
    text = "\n".join(parts) + "\n"
    if len(names) == len(BENCHES):
        (HERE / "tables.md").write_text(text, encoding="utf-8")
    print(text)


if __name__ == "__main__":
    main()
