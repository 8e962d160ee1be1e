"""How much memory a build takes, and carrying 10,000 replicas to 50 scales one at a time.

Largest resident memory of a fresh process as the system counts it; what the imports take stands beside it.

    python benches/memory.py
"""

from __future__ import annotations

import json
import resource
import subprocess
import sys
from collections.abc import Callable

import job
import scalewright as sw
from figures import Figure, show

SCALES = 50


def peak() -> float:
    """Return the largest resident memory of this process so far, in MB."""
    kilobyte = 1 if sys.platform == "darwin" else 1024
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * kilobyte / 1e6


def build(small: bool) -> None:
    """Build one set."""
    operators = job.build(
        job.first_theory(), sw.ChebyshevGrid(x_min=job.X_MIN), job.scales(3 if small else SCALES)
    )
    job.check_published(operators.apply(job.start(operators.grid)))


def stream(small: bool) -> None:
    """Carry replicas, one scale at a time."""
    operators = job.build(
        job.first_theory(), sw.ChebyshevGrid(x_min=job.X_MIN), job.scales(3 if small else SCALES)
    )
    for part in operators.stream(job.many(operators.grid, 50 if small else job.REPLICAS)):
        if part.q2 == job.benchmark.END_Q2:
            job.check_published(part)


TASKS: dict[str, Callable[[bool], None]] = {"imports": lambda small: None, "build": build, "stream": stream}


def of(task: str, small: bool) -> float:
    """Return the peak of a fresh process that does one task."""
    command = [sys.executable, __file__, "--process", task, *(["--small"] if small else [])]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    if done.returncode:
        raise SystemExit(done.stderr)
    return float(json.loads(done.stdout))


def measure(small: bool) -> list[Figure]:
    """Return the peaks."""
    peaks = {task: of(task, small) for task in TASKS}
    return [
        Figure("imports alone", f"{peaks['imports']:.0f} MB"),
        Figure(f"a build, {SCALES} scales", f"{peaks['build']:.0f} MB", "300 MB"),
        Figure(
            f"{job.REPLICAS} replicas to {SCALES} scales, streamed", f"{peaks['stream']:.0f} MB", "1000 MB"
        ),
    ]


if __name__ == "__main__":
    if sys.argv[1:2] == ["--process"]:
        TASKS[sys.argv[2]]("--small" in sys.argv)
        print(json.dumps(peak()))
    else:
        show(measure, __doc__)
