"""Downward crossings of a threshold: said aloud where their exact inverse enlarges a heavy density.

From nf + 1 to nf the exact inverse of the upward matching is applied. It contains (1 + a A_HH)^-1, which is
harmless for a heavy density that an upward crossing made, and has no bound for any other: A_HH grows with
the moment like a logarithm of it. Nothing is cut off here; who asks for such densities is told.
"""

from __future__ import annotations

import sys
import warnings
from collections.abc import Callable

import numpy as np

from ._check import Floats, Integers, show
from .errors import ResolutionWarning
from .flavours import flavour_name

_QUARKS = {4: "charm", 5: "bottom", 6: "top"}

#: Said where a heavy density is larger than this times the largest input value of its replica. The evolution
#: itself changes the largest value by factors of a few.
_LIMIT = 10.0


def remaining(start_nf: int, nf: Integers) -> tuple[int, ...]:
    """Return the heavy quarks whose threshold is crossed downwards on the way to one of `nf`."""
    return tuple(range(int(nf.min()) + 1, start_nf + 1))


def warn_where_enlarged(
    given: Floats,
    start_nf: int,
    q2: Floats,
    nf: Integers,
    x: Floats,
    pair: Callable[[int, list[int]], Floats],
) -> None:
    """Warn about each heavy quark that a downward crossing has enlarged, where it is largest.

    Parameters
    ----------
    given : ndarray, (replica, flavour, node)
        The input.
    start_nf : int
        Its number of flavours.
    q2, nf : ndarray, (scale,)
        Where it was carried to.
    x : ndarray, (node,)
        Nodes of the grid.
    pair : callable
        ``pair(quark, scales)`` returns h + hbar there, (scale, replica, node), for positions in `q2`.
    """
    for quark in remaining(start_nf, nf):
        scales = np.flatnonzero(nf < quark).tolist()
        values = abs(pair(quark, scales))
        largest = abs(given).max(axis=(1, 2))
        excess = np.where(values > _LIMIT * largest[:, np.newaxis], values, 0.0)
        if not excess.any():
            continue
        scale, replica, node = (int(i) for i in np.unravel_index(int(np.argmax(excess)), excess.shape))
        place, name = scales[scale], flavour_name(quark)
        threshold = _QUARKS[quark]
        warnings.warn(
            f"{name} + {name}bar = {values[scale, replica, node]:.2g} in size at x = {x[node]:.3g}, "
            f"q2 = {show(q2[place])} GeV^2 (nf = {nf[place]}), replica {replica}: no input value is larger "
            f"than {largest[replica]:.2g}. Below the {threshold} threshold the exact inverse of the matching "
            f"enlarges, without bound, a {threshold} density that no upward crossing has made: "
            f"ask for nf = {quark} there, or start below the threshold",
            ResolutionWarning,
            stacklevel=_levels(),
        )


def _levels() -> int:
    """Return how many calls the user's line stands above `warn_where_enlarged`."""
    package = __name__.partition(".")[0]
    level, frame = 1, sys._getframe(1)
    while frame.f_back is not None and str(frame.f_globals.get("__name__")).partition(".")[0] == package:
        level, frame = level + 1, frame.f_back
    return level
