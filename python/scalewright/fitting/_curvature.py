"""Second derivatives of chi-square at a minimum, from differences of its exact gradient.

Where predictions are linear in the parameters half of them is J^T J; elsewhere the curvature of the
predictions adds to it, in proportion to the residuals. Steps are taken along the axes of the linear error
ellipsoid, in parts of its length, so that one step length serves parameters of every size.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from .._check import Floats

__all__ = ["curvature"]

#: Lengths of steps in standard deviations, tried in turn until two agree to a thousandth: the shortest stands
#: a factor of ten above where rounding of a gradient at condition 1e8 would show.
_STEPS = (0.05, 0.05 / 8, 0.05 / 64, 0.05 / 512)
_AGREE = 1e-3


def curvature(
    gradient: Callable[[Floats], Floats], at: Floats, root: Floats, room: Floats
) -> tuple[Floats, int]:
    """Return half the second derivatives along axes, and how many axes did not settle.

    Parameters
    ----------
    gradient : callable
        Parameters (parameter,) -> half the derivative of chi-square.
    at : ndarray, (parameter,)
        The minimum.
    root : ndarray, (parameter, axis)
        Axes, each one standard deviation long.
    room : ndarray, (parameter,)
        Distance to the nearest bound.

    Returns
    -------
    matrix : ndarray, (axis, axis)
        The unit matrix where predictions are linear, and for axes that did not settle.
    unsettled : int
        Axes along which the second derivative changes on the scale of the shortest step, or there is no room.
    """
    columns: list[Floats] = []
    settled: list[bool] = []
    for axis, along in enumerate(root.T):
        column = _column(gradient, at, root, along, room)
        settled.append(column is not None)
        columns.append(np.eye(root.shape[1])[axis] if column is None else column)
    if not columns:
        return np.zeros((0, 0)), 0
    matrix = np.stack(columns, axis=1)
    keep = np.asarray(settled)
    both = np.outer(keep, keep)
    # what is symmetric by its nature is made so exactly; an axis that did not settle stands alone
    matrix = np.where(both, 0.5 * (matrix + matrix.T), np.eye(len(columns)))
    return matrix, int((~keep).sum())


def _column(
    gradient: Callable[[Floats], Floats], at: Floats, root: Floats, along: Floats, room: Floats
) -> Floats | None:
    """Return the change of the gradient along one axis: four-point differences, error h^4."""
    space = np.divide(room, 2.0 * abs(along), out=np.full(along.size, np.inf), where=along != 0.0).min()
    last: Floats | None = None
    for step in _STEPS:
        if step > space:
            continue
        slopes = {k: root.T @ gradient(at + k * step * along) for k in (-2, -1, 1, 2)}
        column = (8.0 * (slopes[1] - slopes[-1]) - (slopes[2] - slopes[-2])) / (12.0 * step)
        if last is not None and abs(column - last).max() <= _AGREE * max(1.0, abs(column).max()):
            return np.asarray(column)
        last = column
    return None
