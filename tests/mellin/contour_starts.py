"""Where the contours of small x leave the real axis.

Right of every singularity of what is inverted, and no further: exp(c u) is what the
integrand exceeds the result by.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from mellin.flavours import GLUON, QUARKS, State
from mellin.inputs import Moments

SINGLET_STARTS = (1.35, 1.7, 2.1, 2.6, 3.1)
"""Right of the kernels' singularity at N = 1."""
NON_SINGLET_STARTS = (0.5, 0.8, 1.1, *SINGLET_STARTS)
"""Right of the kernels' singularity at N = 0."""
_CIRCLE = 2.0 * np.exp(2j * np.pi * (np.arange(512) + 0.5) / 512)


class ContourStarts:
    """Starts for the parts in q + qbar and in q - qbar of given start moments."""

    def __init__(self, moments: Mapping[int, Moments]) -> None:
        self._moments = moments
        self.minus = max(self._first(NON_SINGLET_STARTS, {}, {q: 1.0}) for q in QUARKS)
        self._singlet = max(self._first(SINGLET_STARTS, {q: 1.0}, {}) for q in (*QUARKS, GLUON))

    def plus(self, weights: Mapping[int, float]) -> float:
        """Return the start for a combination of q + qbar and gluon.

        A difference of always active quarks sees neither the gluon nor, often, the
        leading power of the sea.
        """
        if set(weights) <= {1, 2, 3} and abs(sum(weights.values())) < 1e-14:
            return self._first(NON_SINGLET_STARTS, weights, {})
        return self._singlet

    def _first(self, starts: Sequence[float], plus: Mapping[int, float], minus: Mapping[int, float]) -> float:
        """Return the first start with no singularity of the moments to its right.

        The integral around a circle right of it, by the trapezoidal rule, must vanish.
        """
        for start in starts:
            values = State.of(self._moments, start + 2.0 + _CIRCLE).combination(plus, minus)
            if abs(np.sum(values * _CIRCLE)) <= 1e-9 * np.sum(np.abs(values * _CIRCLE)):
                return start
        message = f"the moments are singular right of N = {starts[-1]}"
        raise ValueError(message)
