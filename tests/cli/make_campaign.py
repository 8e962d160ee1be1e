"""Writes the made-up measurement campaign anew:  python tests/cli/make_campaign.py [FOLDER]

Points, uncertainties and pseudo-data of `python/scalewright/data/campaign/`, from the law in
`scalewright.cli.campaign` and one seed. Numbers are printed before pseudo-data are drawn, so that the data
follow the very uncertainties that a reader of the files sees.
"""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import scalewright as sw
from scalewright.cli import campaign
from scalewright.files.toml_text import toml_text
from scalewright.files.whole import write_whole

SEED = 20_000_101

# Inverse picobarn a table; a bin is 40 per cent wide in Q^2 and 50 in x, half of what falls into it is kept.
BIN, KEPT = 0.4 * 0.5, 0.5
PB = 0.3893794e9  # pb GeV^2: (hbar c)^2, Particle Data Group
LEAST_STAT = 0.3  # per cent: counting is never the whole of an error
FEWEST = 12  # events; a bin with fewer is not published


@dataclass(frozen=True)
class Run:
    """One table: what was run, and for how long."""

    name: str
    title: str
    current: str
    beam: str
    s: float
    luminosity: float  # per pb

    @property
    def uncertainties(self) -> list[dict[str, object]]:
        """The description of the errors."""
        energy = "high" if self.s > 6e4 else "low"
        parts: list[dict[str, object]] = [
            {"column": "stat", "given_in": "value", "scales_with": "nothing"},
            {"column": "uncorrelated", "given_in": "percent", "scales_with": "value"},
            _shared("hadron energy", "hadron energy scale"),
        ]
        if self.current == "neutral":
            parts += [_shared("lepton energy", "lepton energy scale"), _background()]
        size = 1.2 if energy == "high" else 1.6
        parts.append(_normalisation(size, f"luminosity, {energy} energy"))
        return parts


def _shared(column: str, source: str) -> dict[str, object]:
    return {"column": column, "given_in": "percent", "scales_with": "value", "shared_as": source}


def _background() -> dict[str, object]:
    column = {"column": "background", "given_in": "value", "scales_with": "nothing"}
    return column | {"shared_as": "background at high y"}


def _normalisation(size: float, source: str) -> dict[str, object]:
    given = {"name": "luminosity", "size": size, "given_in": "percent", "scales_with": "value"}
    return given | {"shared_as": source}


RUNS = (
    Run("nc_positron_high", "NC e+, high energy", "neutral", "e+", 1.0e5, 200.0),
    Run("nc_electron_high", "NC e-, high energy", "neutral", "e-", 1.0e5, 120.0),
    Run("nc_positron_low", "NC e+, low energy", "neutral", "e+", 4.0e4, 40.0),
    Run("cc_positron_high", "CC e+, high energy", "charged", "e+", 1.0e5, 200.0),
    Run("cc_electron_high", "CC e-, high energy", "charged", "e-", 1.0e5, 120.0),
)


def points(run: Run) -> tuple[np.ndarray, np.ndarray]:
    """Return x and Q^2 of the bins, y between 0.01 and 0.85."""
    steps = (1.0, 1.5, 2.0, 3.0, 5.0, 7.0) if run.current == "neutral" else (1.0, 2.0, 5.0)
    least = 4.0 if run.current == "neutral" else 200.0
    q2 = [step * 10.0**power for power in range(5) for step in steps if step * 10.0**power >= least]
    x = [step * 10.0**power for power in (-4, -3, -2, -1) for step in (1.3, 2.0, 3.2, 5.0, 8.0)]
    x = [value for value in x if value < 0.7]
    m2 = 0.938**2  # y to three digits decides, no more
    kept = [(b, a) for a in q2 for b in x if 0.01 < a / (b * (run.s - m2)) < 0.85]
    return np.array([b for b, _ in kept]), np.array([a for _, a in kept])


def events(run: Run, x: np.ndarray, q2: np.ndarray, y: np.ndarray, reduced: np.ndarray) -> np.ndarray:
    """Return the events of each bin: Born cross section from the reduced one, times bin and luminosity."""
    ew = sw.Electroweak.effective()
    if run.current == "neutral":
        factor = 2.0 * np.pi * ew.alpha**2 * (1.0 + (1.0 - y) ** 2) / (x * q2**2)
    else:
        mass2 = ew.w_mass**2
        factor = ew.g_fermi**2 / (2.0 * np.pi * x) * (mass2 / (mass2 + q2)) ** 2
    counts: np.ndarray = PB * factor * reduced * (BIN * x * q2) * run.luminosity * KEPT
    return counts


def table(run: Run) -> sw.Measurements:
    """Return one table with the law itself as its values, errors as they will be printed."""
    x, q2 = points(run)
    blank = dict.fromkeys(("stat", "uncorrelated", "hadron energy", "lepton energy", "background"), 0 * x + 1)
    description = _description(run)
    empty = sw.Measurements.from_columns(description, {"x": x, "Q2": q2, "sigma": 0 * x + 1, **blank})
    grid = sw.ChebyshevGrid(x_min=1e-5)
    truth = campaign.carried(empty, grid).predict(campaign.law(grid))[0]
    counts = events(run, x, q2, empty.y, truth)
    seen = counts >= FEWEST
    x, q2, y, truth, counts = (values[seen] for values in (x, q2, empty.y, truth, counts))
    stat = np.hypot(100.0 / np.sqrt(counts), LEAST_STAT) / 100.0 * truth
    is_neutral = run.current == "neutral"
    columns = {
        "x": [f"{value:g}" for value in x],
        "Q2": [f"{value:g}" for value in q2],
        "sigma": [repr(value) for value in truth.tolist()],
        "stat": [f"{value:.3g}" for value in stat],
        "uncorrelated": [f"{value:.2f}" for value in (0.6 if is_neutral else 1.8) + 0.8 * y**2],
        "hadron energy": [f"{value:.2f}" for value in (0.3 if is_neutral else 1.5) * (1.0 - 2.5 * x)],
    }
    if is_neutral:
        # The energy of a scattered lepton says little of x where y is small: the error grows, and turns sign.
        columns["lepton energy"] = [f"{value:.2f}" for value in 0.9 * (1.0 - 4.0 * (1.0 - y) ** 8)]
        columns["background"] = [f"{value:.3g}" for value in 0.02 * truth * np.maximum(y - 0.4, 0.0) / 0.45]
    return sw.Measurements.from_columns(description, columns)


def _description(run: Run) -> dict[str, object]:
    return {
        "title": run.title, "measures": "reduced_cross_section", "current": run.current, "beam": run.beam,
        "target": "proton", "s": run.s, "unit": "1",
        "columns": {"x": "x", "q2": "Q2", "value": "sigma"}, "uncertainty": run.uncertainties,
    }  # fmt: skip


def write(folder: Path) -> None:
    """Draw the pseudo-data of all tables at once, since they share sources, and write them."""
    tables = [table(run) for run in RUNS]
    everything = sw.Measurements.join(tables)
    drawn = everything.pseudo_data(np.random.default_rng(SEED), everything.value).values
    start = 0
    for run, one in zip(RUNS, tables, strict=True):
        # five digits: a tenth of the smallest error, or less
        values = [float(f"{value:.5g}") for value in drawn[start : start + len(one)]]
        one.with_values(values).write(folder / f"{run.name}.toml")
        start += len(one)
    write_whole(folder / "campaign.toml", toml_text({"tables": [f"{r.name}.toml" for r in RUNS]}).encode())


if __name__ == "__main__":
    write(Path(sys.argv[1]) if len(sys.argv) > 1 else campaign.folder())
