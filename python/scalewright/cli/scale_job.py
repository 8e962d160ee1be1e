"""Jobs with a covariance of the theory from scale variations: what varies, what is common to which tables."""

from __future__ import annotations

import contextlib
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from .. import _check
from .._check import Floats
from ..corrections import Correction
from ..errors import InputError, RangeError
from ..files.toml import Section
from ..fitting._problem import Problem
from ..fitting.chi_square import ChiSquare
from ..fitting.least_squares import FitResult
from ..fitting.maps import Maps
from ..fitting.theory_covariance import PRESCRIPTIONS, ScaleCovariance, scale_covariance
from ..measurements import Measurements
from ..theory import Theory

__all__ = ["ScaleVariations", "read_variations"]

_RATIOS = ("hard_muf2_ratio", "hard_mur2_ratio", "evolution_mu2_ratio")


@dataclass(frozen=True)
class ScaleVariations:
    """Which ratios of squared scales vary.

    Attributes
    ----------
    points
        The prescription, as for `scale_covariance`.
    factor
        By which ratios are multiplied and divided.
    common, own
        The ratio that varies for all data at once, and that of each process.
    processes
        Title of a table -> its process; empty: all data are of one process.
    """

    points: str
    factor: float
    common: str
    own: str
    processes: Mapping[str, str]

    def covariance(
        self, maps: Maps, found: FitResult, chi_square: ChiSquare, corrections: Sequence[Correction]
    ) -> ScaleCovariance:
        """Return the covariance around a fit: its densities and theory, predicted at the other scales.

        Parameters
        ----------
        maps : Maps
            Those of the fit.
        found : FitResult
        chi_square : ChiSquare
            What it minimised.
        corrections : sequence of Correction
            Those of the fit.

        Raises
        ------
        InputError, RangeError
            If a prediction cannot be made at some of the scales; the ratios are named.
        """
        sides = {0: 1.0, 1: self.factor, -1: 1.0 / self.factor}
        points = {(0, 0), *(point for group in PRESCRIPTIONS[self.points][1] for point in group)}
        at = {name: found.value(name) for name in found.map_at}

        def predicted(a: float, b: float) -> Floats:
            with _at_scales(f"{self.common} times {a:g}, {self.own} times {b:g}"):
                fmap = self._varied(maps, a, b)(at)
                problem = Problem(
                    fmap, chi_square, found._problem.shape, corrections=corrections, compressed=False
                )
                return problem.prediction(found.parameters[: len(problem.names)])

        scales = [(sides[a], sides[b]) for a, b in sorted(points)]
        moved = {point: predicted(*point) for point in scales}
        measured = chi_square.measurements
        titles = [measured.tables[k] for k in measured.table_of]
        names = [self.processes[title] for title in titles] if self.processes else None
        return scale_covariance(moved, self.points, names, common=self.common, own=self.own)

    def _varied(self, maps: Maps, a: float, b: float) -> Maps:
        given: Theory = maps.theory
        changed: Any = {self.common: getattr(given, self.common) * a, self.own: getattr(given, self.own) * b}
        return maps.with_theory(replace(given, **changed))


@contextlib.contextmanager
def _at_scales(words: str) -> Iterator[None]:
    try:
        yield
    except (InputError, RangeError) as error:
        raise type(error)(f"[chi_square.scale_variations] {words}: {error}") from error


def read_variations(section: Section, measured: Measurements) -> ScaleVariations | None:
    """Read [chi_square.scale_variations], or return None where there is none.

    Raises
    ------
    InputError
        If a key is unknown or wrong, or `processes` does not name each table.
    """
    if section.get("scale_variations", None) is None:
        return None
    inside = section.section("scale_variations").only("points", "factor", "common", "own", "processes")
    with inside.blame():
        points = _check.choice("points", inside.get("points", "9"), tuple(PRESCRIPTIONS))
        factor = _check.real("factor", inside.get("factor", 4.0), above=1.0)
        common = _check.choice("common", inside.get("common", _RATIOS[0]), _RATIOS)
        own = _check.choice("own", inside.get("own", _RATIOS[1]), _RATIOS)
        if own == common:
            raise InputError(f'own = "{own}": is common already')
    return ScaleVariations(points, factor, common, own, _processes(inside, measured))


def _processes(inside: Section, measured: Measurements) -> dict[str, str]:
    if inside.get("processes", None) is None:
        return {}
    given = inside.section("processes").only(*measured.tables)
    return {title: str(given.text(title)) for title in measured.tables}
