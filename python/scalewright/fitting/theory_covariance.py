"""Covariance of the theory from scale variations: which ratios vary, and what is common to which data.

R. Abdul Khalek et al., arXiv:1906.10698, section 4. One ratio, that of the evolution, is common to all data;
the other, that of the hard process, is common to the data of one process and independent between processes.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .. import _check
from .._check import Floats, show_all
from ..errors import InputError

__all__ = ["ScaleCovariance", "scale_covariance"]

Point = tuple[int, int]

#: Normalisation and points (common, own), each -1, 0, +1 for down, central, up, in groups. The normalisation
#: is scale parameters over points. Inside a group the own ratio of one process is independent of that of
#: another, so that between processes the average over the group stands in place of each point. Equations for
#: one and for two processes in section 4.2 of the paper (recalled from memory) follow from these groups.
PRESCRIPTIONS: dict[str, tuple[float, tuple[tuple[Point, ...], ...]]] = {
    "3": (1 / 2, (((1, 1), (-1, -1)),)),
    "5": (1 / 2, (((1, 0),), ((-1, 0),), ((0, 1), (0, -1)))),
    "5bar": (1 / 2, (((1, 1), (1, -1)), ((-1, 1), (-1, -1)))),
    "7": (1 / 3, (((1, 0),), ((-1, 0),), ((0, 1), (0, -1)), ((1, 1), (-1, -1)))),
    "9": (1 / 4, (((1, 0), (1, 1), (1, -1)), ((-1, 0), (-1, 1), (-1, -1)), ((0, 1), (0, -1)))),
}


@dataclass(frozen=True, eq=False)
class ScaleCovariance:
    """Covariance of a theory, and what it assumes; numpy takes it for the matrix.

    Parameters
    ----------
    matrix : ndarray, (datum, datum)
        Positive semi-definite.
    prescription : str
        Number of points.
    common, own : str
        Which ratio is common to all data, and which to each process only.
    processes : tuple
        Names of the processes.
    """

    matrix: Floats
    prescription: str
    common: str
    own: str
    processes: tuple[Any, ...]

    def __array__(self, dtype: Any = None, copy: bool | None = None) -> NDArray[Any]:
        return np.array(self.matrix, dtype=dtype, copy=bool(copy) or dtype is not None)

    def describe(self) -> str:
        """Return what varies and what is common to what, in words."""
        return (
            f"scale variations, {self.prescription} points: {self.common} varies for all data at once, "
            f"{self.own} for each of {show_all(self.processes)} by itself"
        )


def scale_covariance(
    predictions: Mapping[tuple[float, float], ArrayLike],
    prescription: str = "9",
    processes: Sequence[Any] | None = None,
    *,
    common: str = "hard_muf2_ratio",
    own: str = "hard_mur2_ratio",
) -> ScaleCovariance:
    """Covariance of a theory from predictions at other scales.

    Parameters
    ----------
    predictions : mapping
        (common ratio, own ratio) -> prediction (datum,); the ratios are of squared scales, (1, 1) is central,
        and each takes one value above 1 and one below, such as 4 and 1/4.
    prescription : {"9", "7", "5", "5bar", "3"}
        The points of arXiv:1906.10698: all eight; all but the two opposite corners; one ratio at a time; the
        four corners; both ratios together.
    processes : sequence, (datum,), optional
        The process of each datum, by any name, as ``measurements.table_of``; one process by default.
    common, own : str
        What the two ratios are, for `describe`.

    Returns
    -------
    ScaleCovariance

    Raises
    ------
    InputError
        If a point is missing, or a prediction does not fit the others.

    Examples
    --------
    >>> moved = {(1, 1): [1.0, 2.0], (4, 4): [1.1, 2.1], (0.25, 0.25): [0.95, 1.8]}
    >>> scale_covariance(moved, "3").matrix.round(6)
    array([[0.00625, 0.01   ],
           [0.01   , 0.025  ]])
    >>> scale_covariance(moved, "3", ["NC", "CC"]).matrix.round(6)
    array([[ 0.00625, -0.00125],
           [-0.00125,  0.025  ]])
    """
    _check.choice("prescription", prescription, tuple(PRESCRIPTIONS))
    norm, groups = PRESCRIPTIONS[prescription]
    shifts = _shifts(predictions, {point for group in groups for point in group})
    data = next(iter(shifts.values())).size
    names = ["all data"] * data if processes is None else list(processes)
    if len(names) != data:
        raise InputError(f"processes: {len(names)} of them: there must be {data}, one a datum")
    different = tuple(dict.fromkeys(names))
    member = np.asarray([different.index(name) for name in names])
    columns = np.concatenate(list(_columns(groups, shifts, member)), axis=1)
    return ScaleCovariance(norm * columns @ columns.T, prescription, common, own, different)


def _columns(
    groups: Sequence[Sequence[Point]], shifts: Mapping[Point, Floats], member: NDArray[Any]
) -> Iterator[Floats]:
    """Yield factors A (datum, column) of the covariance A A^T: positive by construction."""
    for group in groups:
        moved = np.stack([shifts[point] for point in group], axis=1)
        average = moved.mean(axis=1, keepdims=True)
        yield average * np.sqrt(len(group))  # what all processes have in common
        for process in range(int(member.max(initial=0)) + 1):
            yield (moved - average) * (member == process)[:, None]  # what each has for itself


def _shifts(predictions: Mapping[tuple[float, float], ArrayLike], wanted: set[Point]) -> dict[Point, Floats]:
    """Return prediction minus central prediction at the wanted points."""
    if not isinstance(predictions, Mapping):
        _check.refuse("predictions", predictions, "predictions must map pairs of ratios to predictions")
    found: dict[Point, Floats] = {}
    ratios: dict[tuple[int, int], float] = {}
    for key, given in predictions.items():
        if not isinstance(key, tuple) or len(key) != 2:
            _check.refuse("predictions", key, "a key must be (common ratio, own ratio)")
        pair = [_check.real("ratio", ratio, above=0.0) for ratio in key]
        point = (int(np.sign(np.log(pair[0]))), int(np.sign(np.log(pair[1]))))
        for place in (0, 1):
            if ratios.setdefault((place, point[place]), pair[place]) != pair[place]:
                allowed = "each ratio must have one value above 1 and one below"
                _check.refuse("predictions", key, allowed)
        found[point] = _check.real_array(f"predictions[{_check.show(key)}]", given, ndim=1)
    words = {-1: "down", 0: "central", 1: "up"}
    missing = sorted(f"({words[a]}, {words[b]})" for a, b in ({(0, 0)} | wanted) - set(found))
    if missing:
        raise InputError(f"predictions: missing {', '.join(missing)}")
    centre = found[0, 0]
    for point, values in found.items():
        if values.shape != centre.shape:
            where = ", ".join(words[side] for side in point)
            raise InputError(
                f"predictions: {values.size} data at ({where}), {centre.size} at (central, central)"
            )
    return {point: found[point] - centre for point in wanted}
