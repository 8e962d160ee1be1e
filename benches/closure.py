"""Does a fit find back a known law: the fit of the demo, on the points of its campaign, NNLO, alpha_s free.

Levels 0, 1 and 2 of R. Ball et al., arXiv:1410.8849; the law is that of the campaign, which the shape of the
demo contains. Intervals by second derivatives of chi-square in many sets, by replicas in fewer.

    python benches/closure.py
"""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
import scalewright as sw
from figures import Figure, check, show
from scalewright.cli import campaign
from scalewright.cli.demo import job_text
from scalewright.cli.fit_job import read_fit_job
from scalewright.closure import Closure, closure_test
from scalewright.fitting.functionals import default_functionals

SETS, WITH_REPLICAS, REPLICAS, SEED = 100, 12, 20, 1
#: Worst of eight functionals in binomial errors: 4 is passed by chance once in two thousand runs.
MOST = 4.0


def tested(sets: int, replicas: int, levels: tuple[int, ...], small: bool) -> Closure:
    """Run the closure test; a small one takes every third datum."""
    with tempfile.TemporaryDirectory() as folder:
        place = Path(folder) / "fit.toml"
        place.write_text(job_text(2), encoding="utf-8")
        job = read_fit_job(place)
    keep = np.arange(len(job.measured)) % (3 if small else 1) == 0
    measured = job.measured.cut(keep=keep)
    fmap = campaign.carried(measured, job.grid)
    return closure_test(
        fmap, sw.ChiSquare(measured), job.shape, campaign.law(job.grid),
        functionals=[one.text for one in default_functionals(job.free, job.grid.x_min)], sets=sets,
        seed=SEED, levels=levels, replicas=replicas, workers=1, theory=job.free,
    )  # fmt: skip


def worst(found: Closure, of_replicas: bool) -> tuple[float, str]:
    """Return the furthest coverage in binomial errors, and which."""
    ask = found.replica_coverage if of_replicas else found.coverage
    off = {name: ask(name) for name in found.functionals}
    name = max(off, key=lambda key: abs(off[key].inside - off[key].expected) / off[key].error)
    one = off[name]
    return abs(one.inside - one.expected) / one.error, name


def inside(found: Closure, of_replicas: bool) -> str:
    """Return the parts of sets with the truth inside, in the order of functionals."""
    ask = found.replica_coverage if of_replicas else found.coverage
    return ", ".join(f"{name} {100 * ask(name).inside:.0f} %" for name in found.functionals)


def measure(small: bool) -> list[Figure]:
    """Return the figures."""
    found = tested(6 if small else SETS, 0, (0, 1, 2), small)
    assert found.level_0 is not None and found.level_1 is not None
    off = float(abs(found.level_0.off).max())
    check("level 0, in uncertainties", off, 1e-3)  # a minimum is one to a thousandth of an uncertainty
    # a start may end in another minimum, and then its chi-square tells: those of the lowest must agree
    lowest = found.level_1.chi2 < found.level_1.chi2.min() + 1e-3
    apart = float(np.ptp(found.level_1.off[lowest], axis=0).max())
    check("level 1, starts apart in uncertainties", apart, 0.1)
    figures = [
        Figure(
            "level 0: law found from 4 starts, furthest functional", f"{off:.1e} of its uncertainty", "1e-3"
        ),
        Figure(
            "level 1: the same data from 4 starts, furthest apart", f"{apart:.1e} of an uncertainty", "2e-3"
        ),
    ]
    for many, of_replicas in ((found, False), (_with_replicas(small), True)):
        furthest, name = worst(many, of_replicas)
        check(f"coverage of {name} in binomial errors", furthest, MOST)
        one = many.replica_coverage(name) if of_replicas else many.coverage(name)
        what = f"{many.replicas} replicas each" if of_replicas else "second derivatives"
        figures.append(
            Figure(
                f"level 2: truth inside, {many.sets} sets, {what}: {inside(many, of_replicas)}",
                f"worst {furthest:.1f} binomial errors from {100 * one.expected:.1f} %",
                "3",
            )
        )
    return figures


def _with_replicas(small: bool) -> Closure:
    return tested(3 if small else WITH_REPLICAS, 3 if small else REPLICAS, (2,), small)


if __name__ == "__main__":
    show(measure, __doc__ or "")
