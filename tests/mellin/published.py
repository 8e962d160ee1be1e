"""The published benchmark tables of `tests/reference`, as cases to be recomputed."""

from __future__ import annotations

import csv
from collections.abc import Mapping
from dataclasses import dataclass
from math import floor, log10
from pathlib import Path

from mellin import toy_input
from mellin.kernel_moments import Kernels
from mellin.solution import MellinSolution

FOLDER = Path(__file__).parents[1] / "reference"

QUANTITIES: Mapping[str, Mapping[int, float]] = {
    "x*u_v": {2: 1.0, -2: -1.0},
    "x*d_v": {1: 1.0, -1: -1.0},
    "x*(dbar-ubar)": {-1: 1.0, -2: -1.0},
    "2*x*(dbar+ubar)": {-1: 2.0, -2: 2.0},
    "x*(s-sbar)": {3: 1.0, -3: -1.0},
    "x*(s+sbar)": {3: 1.0, -3: 1.0},
    "x*(c+cbar)": {4: 1.0, -4: 1.0},
    "x*(b+bbar)": {5: 1.0, -5: 1.0},
    "x*g": {21: 1.0},
}


@dataclass(frozen=True)
class Table:
    """One published table: its file, order and numbers of flavours."""

    name: str
    order: int
    flavours: tuple[int, int]
    alpha_s_at_end: float

    @property
    def start_nf(self) -> int:
        """Active flavours at the start."""
        return self.flavours[0]

    def rows(self) -> list[tuple[float, str, float]]:
        """Return (x, quantity, published value)."""
        with (FOLDER / f"{self.name}.csv").open(newline="") as file:
            lines = csv.DictReader(file)
            return [(float(r["x"]), r["quantity"], float(r["published"])) for r in lines]

    def solution(self, kernels: Kernels) -> MellinSolution:
        """Return the solution with the benchmark's settings."""
        return MellinSolution(
            kernels,
            order=self.order,
            alpha_s=toy_input.ALPHA_S,
            alpha_s_q2=toy_input.START_Q2,
            alpha_s_nf=self.start_nf,
            masses=toy_input.MASSES,
            kind="pole",
            flavours=self.flavours,
            form="compact",
        )


TABLES = (
    Table("lo_fixed4", 0, (4, 4), 0.117574),
    Table("lo_variable", 0, (3, 6), 0.122306),
    Table("nlo_fixed4", 1, (4, 4), 0.110902),
    Table("nlo_variable", 1, (3, 6), 0.116032),
    Table("nnlo_fixed4", 2, (4, 4), 0.110141),
    Table("nnlo_variable", 2, (3, 6), 0.115605),
)


def last_digit(value: float) -> float:
    """Return one unit of the last of five digits."""
    return 10.0 ** (floor(log10(abs(value))) - 4)
