"""Covariance and correlation matrices that come from files: checked, repaired on request, taken apart.

A matrix printed with few digits may have negative eigenvalues. Those within rounding of zero are zero; others
are refused with the rows they live on, or repaired by a method that the description names, which reports how
far it moved the eigenvalues. Nothing is repaired silently.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from .._check import Floats, show
from ..errors import InputError

__all__ = ["REPAIRS", "Correlated", "correlations", "repaired"]

#: "clip": negative eigenvalues of the correlation matrix become 0, then its diagonal is brought back to 1.
#: "nearest": the nearest correlation matrix in the Frobenius norm (N. Higham, IMA J. Numer. Anal. 22 (2002)
#: 329, alternating projections with Dykstra's correction).
REPAIRS = ("clip", "nearest")

#: An eigenvalue is zero within rounding below this many units of n eps times the largest one; LAPACK's
#: symmetric solvers are good to a few units.
_ROUNDING = 16.0

#: Two entries that mirror each other may differ by this part of the diagonal: more is no rounding of print.
_MIRRORED = 1e-6

#: The alternating projections end when a step moves no entry by more than this: far below what is printed.
#: After so many steps they are given up; they converge linearly, mostly in tens of steps.
_STEP, _STEPS = 1e-10, 2_000


@dataclass(frozen=True, eq=False)
class Correlated:
    """Errors that are correlated by a matrix: covariance = size R size.

    Parameters
    ----------
    name : str
        Where it is from.
    size : ndarray, (datum,)
        Standard deviations, as in `Uncertainty`.
    matrix : ndarray, (datum, datum)
        Correlation matrix R, positive semi-definite.
    multiplicative : bool
        Whether the sizes scale with the value.
    moved : float
        The largest move of an eigenvalue by a repair; 0 if there was none.
    """

    name: str
    size: Floats
    matrix: Floats
    multiplicative: bool
    moved: float = 0.0

    def at(self, reference: Floats) -> Floats:
        """Return the standard deviations in units of the datum, (datum,)."""
        return self.size * reference if self.multiplicative else self.size

    def covariance(self, reference: Floats) -> Floats:
        """Return the covariance, (datum, datum)."""
        size = self.at(reference)
        return size[:, None] * self.matrix * size

    @cached_property
    def _parts(self) -> tuple[float, Floats, Floats]:
        """Return c and A (datum, source) with R = c + A A^T, each datum for itself and the rest; and |A|.

        The last is the symmetric root of A A^T: unlike A it does not depend on the choice of eigenvectors,
        which is another on every machine where eigenvalues are equal.
        """
        values, vectors = np.linalg.eigh(self.matrix)
        # Half of the smallest eigenvalue: the larger c, the better both forms of chi-square agree, but the
        # rest must stay safely positive.
        own = 0.5 * max(float(values[0]), 0.0)
        own = own if own > _rounding(values) else 0.0
        shifts = vectors * np.sqrt(np.clip(values - own, 0.0, None))
        return own, shifts, shifts @ vectors.T

    def nuisance(self, reference: Floats) -> tuple[Floats, Floats]:
        """Return variances of independent errors (datum,) and shifts (datum, source) of equal covariance."""
        own, shifts, _ = self._parts
        size = self.at(reference)
        return own * size**2, size[:, None] * shifts

    def draw(self, rng: np.random.Generator, shape: tuple[int, int]) -> Floats:
        """Return normal numbers of unit variance with these correlations, (replica, datum)."""
        own, _, root = self._parts
        drawn: Floats = np.sqrt(own) * rng.standard_normal(shape) + rng.standard_normal(shape) @ root
        return drawn


def _rounding(values: Floats) -> float:
    return float(_ROUNDING * values.size * np.finfo(float).eps * max(float(values[-1]), 0.0))


def correlations(
    matrix: Floats, place: Callable[[int], str], *, repair: str | None = None
) -> tuple[Floats, Floats]:
    """Take a covariance matrix apart into standard deviations and correlations.

    Parameters
    ----------
    matrix : ndarray, (datum, datum)
        As it was read.
    place : callable
        Number of a row -> where it stands, for messages.
    repair : str, optional
        What will be done with it; without, correlations must lie in [-1, 1].

    Returns
    -------
    size : ndarray, (datum,)
    correlation : ndarray, (datum, datum)
        Of unit diagonal, symmetric to the bit. A datum without variance has no correlations.

    Raises
    ------
    InputError
        If a variance is negative, or the matrix is not symmetric.
    """
    variance = np.diagonal(matrix)
    for row in np.flatnonzero(variance < 0.0)[:1]:
        raise InputError(f"{place(row)}: variance {show(variance[row])}: a variance must not be negative")
    size = np.sqrt(variance)
    scale = np.where(size > 0.0, size, 1.0)
    scaled = matrix / scale[:, None] / scale
    empty = size == 0.0
    for row, column in np.argwhere(empty[:, None] & (scaled != 0.0))[:1]:
        what = f"covariance {show(matrix[row, column])} with row {column + 1}, but no variance"
        raise InputError(f"{place(row)}: {what}")
    for row, column in np.argwhere(np.abs(scaled - scaled.T) > _MIRRORED)[:1]:
        what = f"{show(matrix[row, column])} and {show(matrix[column, row])}: must be symmetric"
        raise InputError(f"{place(row)}, column {column + 1}: {what}")
    result = 0.5 * (scaled + scaled.T)
    np.fill_diagonal(result, 1.0)
    # covariances of few digits may say 1.01 where the correlation is 0.999: a repair mends that, too
    beyond = np.abs(result) > 1.0 + _MIRRORED
    for row, column in np.argwhere(beyond)[: 1 if repair is None else 0]:
        what = f"correlation {show(result[row, column])} with row {column + 1}: must lie in [-1, 1]"
        raise InputError(f"{place(row)}: {what}")
    return size, result


def repaired(matrix: Floats, repair: str | None, name: str) -> tuple[Floats, float]:
    """Return a positive semi-definite correlation matrix and the largest move of an eigenvalue.

    Parameters
    ----------
    matrix : ndarray, (datum, datum)
        Symmetric, of unit diagonal.
    repair : str or None
        One of `REPAIRS`, or None.
    name : str
        Where it is from, for the message.

    Raises
    ------
    InputError
        If it has a negative eigenvalue beyond rounding and no repair is named: the rows are named.
    """
    values, vectors = np.linalg.eigh(matrix)
    if values[0] >= -_rounding(values):
        return matrix, 0.0
    if repair is None:
        raise InputError(
            f"{name}: not positive semi-definite: the smallest eigenvalue of the correlations is "
            f'{values[0]:.3g}, mostly of {heaviest(vectors[:, 0])}; repair = "clip" or "nearest" mends it'
        )
    better = _clipped(values, vectors) if repair == "clip" else _nearest(matrix, name)
    return better, float(np.abs(np.linalg.eigvalsh(better) - values).max())


def heaviest(vector: Floats, most: int = 4) -> str:
    """Name the rows that carry an eigenvector: at least half as large as the largest, four at most."""
    size = np.abs(vector)
    order = np.argsort(-size, kind="stable")
    rows = sorted(int(row) + 1 for row in order[:most] if size[row] >= 0.5 * size[order[0]])
    return ("row " if len(rows) == 1 else "rows ") + ", ".join(map(str, rows))


def _clipped(values: Floats, vectors: Floats) -> Floats:
    """Set negative eigenvalues to zero and scale the diagonal back to 1."""
    matrix = (vectors * np.clip(values, 0.0, None)) @ vectors.T
    scale = np.sqrt(np.diagonal(matrix))
    return _unit(matrix / scale[:, None] / scale)


def _nearest(matrix: Floats, name: str) -> Floats:
    """Project in turn on positive matrices and on those of unit diagonal."""
    unit, correction = matrix, np.zeros_like(matrix)
    for _ in range(_STEPS):
        values, vectors = np.linalg.eigh(unit - correction)
        positive = (vectors * np.clip(values, 0.0, None)) @ vectors.T
        correction = positive - (unit - correction)
        following = _unit(positive)
        step = float(np.abs(following - unit).max())
        unit = following
        if step <= _STEP:  # what is left of negative eigenvalues is as small as the last step
            return _clipped(*np.linalg.eigh(unit))
    raise InputError(
        f'{name}: no nearest correlation matrix after {_STEPS} steps; repair = "clip" has no steps'
    )


def _unit(matrix: Floats) -> Floats:
    """Make symmetric to the bit, with unit diagonal."""
    result: Floats = 0.5 * (matrix + matrix.T)
    np.fill_diagonal(result, 1.0)
    return result
