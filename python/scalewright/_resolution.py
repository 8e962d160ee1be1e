"""How well a grid resolves densities: estimated from coefficients, measured where a function is at hand.

Errors are in parts of the largest value of the density in the panel.
"""

from __future__ import annotations

import warnings
from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING

import numpy as np

from ._check import Floats
from .errors import ResolutionWarning
from .flavours import flavour_name
from .grid import ChebyshevGrid

if TYPE_CHECKING:
    from ._questions import Questions

#: Interpolation error that standard resolution stays within at x <= 0.9 for densities of the common shape
#: x^a (1-x)^b (1 + c sqrt x + d x).
PROMISED = 1e-6
_PROMISED_TO = 0.9

#: The estimate is the size of the last coefficients kept, the error that of the first ones left out: on 400
#: random densities of that shape the estimate was 10 to 40 times the error in the median of each panel.
_ESTIMATED_LIMIT = 100 * PROMISED


def estimated(of: Questions) -> Floats:
    """Return estimated errors from Chebyshev coefficients, (scale, replica, flavour, panel)."""
    absolute = of._grid.handle().tails(of._values.reshape(-1, of._grid.nodes))
    largest = _largest(of._grid, of._values)
    return _ratio(absolute.reshape(largest.shape), largest)


def measured(
    grid: ChebyshevGrid, functions: Mapping[int, Callable[[Floats], Floats]], values: Floats
) -> Floats:
    """Return errors at x <= 0.9 half-way between nodes, (flavour, panel); `values` are those at the nodes."""
    u = np.concatenate([[0.0], grid.u])
    middle = 0.5 * (u[1:] + u[:-1])
    middle = middle[middle >= -np.log(_PROMISED_TO)]
    x = np.exp(-middle)
    exact = np.stack([function(x) for function in functions.values()])
    errors = abs(grid.interpolate(values, x) - exact)
    panel = np.searchsorted(grid.edges, middle, side="left") - 1
    worst = np.zeros((len(values), grid.degrees.size))
    for p in np.unique(panel):
        worst[:, p] = errors[:, panel == p].max(axis=1)
    return _ratio(worst, _largest(grid, values))


def warn_where_estimated(of: Questions, depth: int) -> None:
    """Warn where the estimate says that densities are resolved worse than promised."""
    _warn(of, estimated(of), _ESTIMATED_LIMIT, depth + 1)


def warn_where_measured(of: Questions, errors: Floats, depth: int) -> None:
    """Warn where measured errors, (scale, replica, flavour, panel), are above the promise.

    `depth` is how many calls below the user's line the caller stands.
    """
    _warn(of, errors, PROMISED, depth + 1)


def _warn(of: Questions, errors: Floats, limit: float, depth: int) -> None:
    """Name the worst flavour and panel, if they are beyond `limit`."""
    worst = np.unravel_index(int(np.argmax(errors)), errors.shape)
    if errors[worst] <= limit:
        return
    _, _, flavour, panel = (int(i) for i in worst)
    low, high = np.exp(-of._grid.edges[panel + 1]), np.exp(-of._grid.edges[panel])
    text = (
        f"{flavour_name(of._flavours[flavour])} is resolved to {errors[worst]:.1e} of its largest value in "
        f"x = {low:.3g} to {high:.3g}, not to {limit:.0e}: "
        'take resolution="fine", or a function that is smooth there'
    )
    warnings.warn(text, ResolutionWarning, stacklevel=depth + 2)


def _largest(grid: ChebyshevGrid, values: Floats) -> Floats:
    """Return the largest value in each panel, (..., panel); a shared node counts for the panel it ends."""
    starts = [int(np.searchsorted(grid.u, edge, side="right")) for edge in grid.edges[:-1]]
    largest: Floats = np.maximum.reduceat(abs(values), starts, axis=-1)
    return largest


def _ratio(errors: Floats, largest: Floats) -> Floats:
    """Divide, 0 where a density vanishes."""
    return np.divide(errors, largest, out=np.zeros_like(errors), where=largest > 0.0)
