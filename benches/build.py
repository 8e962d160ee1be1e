"""How long operators take: the first NNLO set with thresholds in a process, and the next one.

50 scales from 2 to 1e5 GeV^2 at standard resolution; all kernels are computed for the first set and kept for
the next, which has another coupling and other masses. Each trial is a fresh process, with the unit beside it.

    python benches/build.py
"""

from __future__ import annotations

import json
import subprocess
import sys
import time
from statistics import median

import job
import scalewright as sw
import unit
from figures import Figure, show

SCALES = 50
TRIALS = 5


def one_process(x_min: float, count: int) -> dict[str, float]:
    """Build two sets in this process; return seconds of both and how far the answers are off."""
    q2 = job.scales(count)
    begin = time.perf_counter()
    grid = sw.ChebyshevGrid(x_min=x_min)
    first = job.build(job.first_theory(), grid, q2)
    middle = time.perf_counter()
    following = job.build(job.next_theory(), grid, q2)
    end = time.perf_counter()
    densities = job.start(grid)
    return {
        "first": middle - begin,
        "next": end - middle,
        "published": job.check_published(first.apply(densities)) if x_min <= job.X_MIN else 0.0,
        "momentum": job.check_momentum(following.apply(densities)),
    }


def trial(x_min: float = job.X_MIN, count: int = SCALES) -> dict[str, float]:
    """Run `one_process` in a fresh process."""
    command = [sys.executable, __file__, "--process", repr(x_min), str(count)]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    if done.returncode:
        raise SystemExit(done.stderr)
    result: dict[str, float] = json.loads(done.stdout)
    return result


def measure(small: bool) -> list[Figure]:
    """Return both times in units."""
    trials = []
    for _ in range(1 if small else TRIALS):
        one = unit.seconds(products=3 if small else 11)
        trials.append(trial(count=3 if small else SCALES) | {"unit": one})
    rows = []
    for name, what, goal in [
        ("first", "first set of operators in a process", 6),
        ("next", "the next one", 2),
    ]:
        ratios = sorted(one[name] / one["unit"] for one in trials)
        rows.append(
            Figure(
                f"{what}, {SCALES} scales",
                f"{median(ratios):.1f} units (least {ratios[0]:.1f})",
                f"{goal} units",
            )
        )
    published, momentum = (max(one[name] for one in trials) for name in ("published", "momentum"))
    rows.append(Figure("its answer against the published table", f"{published:.2f} of the last digit", "1"))
    rows.append(Figure("momentum sum after the next one", f"kept to {momentum:.0e}", "3e-07"))
    return rows


if __name__ == "__main__":
    if sys.argv[1:2] == ["--process"]:
        print(json.dumps(one_process(float(sys.argv[2]), int(sys.argv[3]))))
    else:
        show(measure, __doc__)
