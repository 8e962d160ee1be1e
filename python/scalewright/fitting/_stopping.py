"""Early stopping: fit one part of the residuals, and stop where the other part is described best.

Whitened residuals of different data are independent of one another, correlations or not, so that a part of
them drawn at random is as good as data of its own. Priors are always fitted.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from .. import _check
from .._check import Floats
from ._problem import Problem
from ._solve import solve

__all__ = ["Stopping"]


@dataclass(frozen=True)
class Stopping:
    """When to stop.

    Parameters
    ----------
    validation : float
        Part of the residuals that is not fitted, in (0, 0.9].
    patience : int
        Steps without a better validation.
    """

    validation: float
    patience: int

    @classmethod
    def of(cls, validation: object, patience: object) -> Stopping | None:
        """Return checked options, or None where all is fitted."""
        part = _check.real("validation", validation, least=0.0, most=0.9)
        steps = _check.whole("patience", patience, least=1)
        return cls(part, steps) if part > 0.0 else None

    def described(self) -> list[float]:
        """Return the options as numbers."""
        return [self.validation, float(self.patience)]

    def fitted(
        self,
        problem: Problem,
        begin: Floats,
        shift: Floats,
        rng: np.random.Generator,
        evaluations: int | None,
    ) -> tuple[Floats, int, str]:
        """Return the parameters that describe the validation best, steps, and why it failed ("")."""
        kept = rng.random(problem.count) < self.validation
        if not kept.any() or kept.all():
            return begin, 0, "the validation is empty or all there is: take more data or another part"
        train = np.concatenate([~kept, np.ones(shift.size - problem.count, dtype=bool)])
        watched = _Watched(self.patience)

        def watch(step: int, value: float, parameters: Floats) -> None:
            residuals = problem.residuals(parameters, shift)[: problem.count][kept]
            watched.saw(float(residuals @ residuals), parameters)

        part: Any = _Part(problem, train)
        found = solve(part, begin, shift=shift[train], evaluations=evaluations, callback=watch)
        last = problem.residuals(found.parameters, shift)[: problem.count][kept]
        if float(last @ last) < watched.best:
            watched.best, watched.parameters = float(last @ last), found.parameters
        if watched.parameters is None:
            return begin, found.jacobian_calls, "chi-square is not finite"
        # cut off by the evaluations it was allowed, not by its patience: the validation might still improve
        cut_off = bool(found.stopped) and not watched.ended and not found.converged
        reason = f"not converged: {found.stopped}, the validation might still improve" if cut_off else ""
        return watched.parameters, found.jacobian_calls, reason


class _Watched:
    """The best validation so far, and for how long it has been the best."""

    def __init__(self, patience: int) -> None:
        self._patience, self._since, self.ended = patience, 0, False
        self.best: float = np.inf
        self.parameters: Floats | None = None

    def saw(self, value: float, parameters: Floats) -> None:
        """Take note; raise StopIteration where patience ends."""
        if value < self.best:
            self.best, self.parameters, self._since = value, parameters, 0
            return
        self._since += 1
        if self._since >= self._patience:
            self.ended = True
            raise StopIteration


class _Part:
    """Some of the residuals of a problem, as `solve` takes them."""

    def __init__(self, problem: Problem, keep: Any) -> None:
        self._problem, self._keep = problem, keep
        self.low, self.high = problem.low, problem.high

    def residuals(self, parameters: Floats, shift: Floats | None = None) -> Floats:
        part: Floats = self._problem.residuals(parameters)[self._keep]
        return part if shift is None else part + shift

    def jacobian(self, parameters: Floats) -> Floats:
        part: Floats = self._problem.jacobian(parameters)[self._keep]
        return part
