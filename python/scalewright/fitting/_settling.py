"""Theory parameters at which a map is exact and the fit with it ends: a fixed point.

A map of first order around one value sends the fit to another, and the map of that one may send it back:
where predictions bend and data pull, turns swing for ever. Anderson's mixing of the last two (D. Anderson,
J. ACM 12 (1965) 547), for one parameter the secant method, ends that. Only swings are mixed: beyond what fits
have reached a map may not exist.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from .._check import Floats
from ..errors import InputError

if TYPE_CHECKING:
    from ._result import FitResult

__all__ = ["NotSettledError", "Settling"]

#: How far the mixing goes back towards the last value, in parts of the distance.
_BACK = 0.9


class NotSettledError(InputError):
    """A fit whose maps could not be built anew until theory parameters settled.

    Attributes
    ----------
    result : FitResult
        The last fit, with the map of first order around the theory parameters that its `status` names.
    """

    def __init__(self, reason: str, result: FitResult) -> None:
        super().__init__(f"{reason}; the last fit is the attribute `result` of this error")
        self.reason, self.result = reason, result

    def __reduce__(self) -> tuple[type[NotSettledError], tuple[str, FitResult]]:
        """Let it cross to other processes."""
        return type(self), (self.reason, self.result)


class Settling:
    """Where the next map is to be built."""

    def __init__(self) -> None:
        self._last: tuple[Floats, Floats] | None = None

    def next(self, at: Floats, found: Floats, errors: Floats) -> Floats:
        """Return values for the next map.

        Parameters
        ----------
        at, found : ndarray, (parameter,)
            Where the last map is exact, and where the fit with it ended.
        errors : ndarray, (parameter,)
            Uncertainties, in units of which steps are compared.

        Returns
        -------
        ndarray, (parameter,)
        """
        step = (found - at) / errors
        last, self._last = self._last, (step, found)
        if last is None:
            return found
        change = step - last[0]
        size = float(change @ change)
        part = float(step @ change) / size if size > 0.0 else 0.0
        return np.asarray(found - min(max(part, 0.0), _BACK) * (found - last[1]))
