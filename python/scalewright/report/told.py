"""What a report of a fit is made of: its sections read it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from .._check import Floats
from ..densities import Densities
from ..fitting.chi_square import ChiSquare
from ..fitting.ensemble import Ensemble
from ..fitting.functionals import Functional
from ..fitting.least_squares import FitResult

__all__ = ["Told"]


@dataclass(frozen=True)
class Told:
    """What is told.

    Attributes
    ----------
    result, chi_square, ensemble
        The fit, what it minimised, and its replicas or None.
    evolved
        Densities of the replicas, or of the best fit, at other scales, or None.
    truth
        Functional -> value, where the law behind the data is known.
    history
        Chi-squares while the reference settled.
    notes
        What else was assumed: name -> words.
    job
        Text of the job file, or empty.
    pictures
        Whether there can be any.
    """

    result: FitResult
    chi_square: ChiSquare
    ensemble: Ensemble | None
    evolved: Densities | None
    truth: Mapping[Functional, float]
    history: Sequence[float]
    notes: Mapping[str, str]
    job: str
    pictures: bool = field(default=True)

    @property
    def prediction(self) -> Floats:
        """What the best fit predicts, (datum,)."""
        return self.result.prediction
