"""Kinematics of deep-inelastic points: y, W^2, limits, and the regime in which each point lies.

==================== ================================== ==================================================
regime               where, by default                  what it is
==================== ================================== ==================================================
resonance            (1-x)/x < resonance * L^2/Q^2      W near the nucleon mass: no parton picture
endpoint             (1-x)/x < endpoint * L/Q           logarithms of 1 - x beyond fixed order
low Q^2              Q^2 < low_q2                       powers of 1/Q^2 and the coupling are large
low x                x < low_x                          logarithms of 1/x beyond fixed order
inclusive            else                               the operator product expansion, x generic
==================== ================================== ==================================================

L is Lambda, a hadronic scale. The boundaries are common practice, no source: arguments, and never a cut by
themselves. The first line that holds names the regime. W^2 = m_p^2 + Q^2 (1/x - 1) and Q^2 = x y (s -
m_p^2), exact.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from . import _check
from ._check import Floats
from ._measured.rows import NUCLEON_M2

__all__ = ["BOUNDARIES", "REGIMES", "Regimes", "inelasticity", "invariant_mass2", "regimes", "x_limits"]

#: Arguments of `regimes` that say where one ends.
BOUNDARIES = ("hadronic_scale", "resonance", "endpoint", "low_q2", "low_x")
REGIMES = ("resonance", "endpoint", "low Q^2", "low x", "inclusive")


@dataclass(frozen=True, eq=False)
class Regimes:
    """In which regime points lie, and the numbers that decide.

    Attributes
    ----------
    name : ndarray of str
        One of `REGIMES` a point.
    w2 : ndarray
        Squared mass of the final state in GeV^2.
    of_resonance, of_endpoint : ndarray
        (1/x - 1) Q^2/Lambda^2 = (W^2 - m_p^2)/Lambda^2 and (1/x - 1) Q/Lambda; 1/x - 1 and not 1 - x, so that
        points of small x and Q^2, whose W is large, are not taken for resonances.
    """

    name: NDArray[np.str_]
    w2: Floats
    of_resonance: Floats
    of_endpoint: Floats

    def counts(self) -> dict[str, int]:
        """Return how many points lie in each regime."""
        return {name: int((self.name == name).sum()) for name in REGIMES}

    def __str__(self) -> str:
        """One line."""
        return ", ".join(f"{count} {name}" for name, count in self.counts().items() if count)


def invariant_mass2(x: ArrayLike, q2: ArrayLike) -> Floats:
    """Return W^2 = m_p^2 + Q^2 (1/x - 1) in GeV^2.

    Parameters
    ----------
    x, q2 : array_like
        Bjorken x in (0, 1], Q^2 in GeV^2.

    Raises
    ------
    InputError
        If x or q2 lies outside its range.

    Examples
    --------
    >>> round(float(invariant_mass2(0.5, 4.0)), 4)
    4.8804
    """
    points, scales = _pair(x, q2)
    return np.asarray(NUCLEON_M2 + scales * (1.0 - points) / points)[()]


def inelasticity(x: ArrayLike, q2: ArrayLike, s: float) -> Floats:
    """Return y = Q^2/(x (s - m_p^2)).

    Parameters
    ----------
    x, q2 : array_like
        Bjorken x in (0, 1], Q^2 in GeV^2.
    s : float
        Squared centre-of-mass energy in GeV^2.

    Raises
    ------
    InputError
        If an argument lies outside its range, or y would exceed 1: there x must be at least Q^2/(s - m_p^2).

    Examples
    --------
    >>> round(float(inelasticity(0.01, 100.0, 1e5)), 6)
    0.100001
    """
    points, scales = _pair(x, q2)
    energy = _check.real("s", s, above=NUCLEON_M2, unit="GeV^2") - NUCLEON_M2
    y = np.asarray(scales / (points * energy))
    _check.refuse_where("y", y, y > 1.0 + 1e-12, "y = Q^2/(x (s - m_p^2)) must lie in (0, 1]")
    return y[()]


def x_limits(q2: ArrayLike, s: float, *, w2: float = NUCLEON_M2) -> tuple[Floats, Floats]:
    """Return the least and the largest x that can be measured.

    Parameters
    ----------
    q2 : array_like
        Q^2 in GeV^2.
    s : float
        Squared centre-of-mass energy in GeV^2: y <= 1 gives the least x.
    w2 : float
        Least W^2 in GeV^2, m_p^2 or more, which gives the largest x.

    Returns
    -------
    low, high : ndarray
        Q^2/(s - m_p^2) and Q^2/(Q^2 + W^2 - m_p^2); nothing can be measured where low exceeds high.

    Raises
    ------
    InputError
        If an argument lies outside its range.

    Examples
    --------
    >>> low, high = x_limits(100.0, 1e5, w2=10.0)
    >>> round(float(low), 8), round(float(high), 6)
    (0.00100001, 0.916425)
    """
    scales = _check.real_array("q2", q2)
    _check.refuse_where("q2", scales, scales <= 0.0, "q2 must lie in (0, inf) GeV^2")
    energy = _check.real("s", s, above=NUCLEON_M2, unit="GeV^2") - NUCLEON_M2
    mass = _check.real("w2", w2, least=NUCLEON_M2, unit="GeV^2") - NUCLEON_M2
    return np.asarray(scales / energy)[()], np.asarray(scales / (scales + mass))[()]


def regimes(
    x: ArrayLike,
    q2: ArrayLike,
    *,
    hadronic_scale: float = 0.5,
    resonance: float = 10.0,
    endpoint: float = 1.0,
    low_q2: float = 2.0,
    low_x: float = 1e-4,
) -> Regimes:
    """Say in which regime points lie.

    Parameters
    ----------
    x, q2 : array_like
        Bjorken x in (0, 1], Q^2 in GeV^2.
    hadronic_scale : float
        Lambda in GeV.
    resonance, endpoint : float
        How many Lambda^2/Q^2, and Lambda/Q, count as near.
    low_q2, low_x : float
        In GeV^2; below them a point is at low Q^2, at low x.

    Returns
    -------
    Regimes

    Raises
    ------
    InputError
        If an argument lies outside its range.

    Examples
    --------
    >>> print(regimes([0.1, 0.9, 1e-5], [100.0, 3.0, 5.0]))
    1 resonance, 1 low x, 1 inclusive
    """
    points, scales = _pair(x, q2)
    scale = _check.real("hadronic_scale", hadronic_scale, above=0.0, unit="GeV")
    near, close = _check.real("resonance", resonance, least=0.0), _check.real("endpoint", endpoint, least=0.0)
    first = np.asarray((1.0 - points) / points * scales / scale**2)
    second = np.asarray((1.0 - points) / points * np.sqrt(scales) / scale)
    conditions = [first < near, second < close, scales < low_q2, points < low_x]
    name = np.select(conditions, REGIMES[:-1], REGIMES[-1])
    return Regimes(name, np.asarray(invariant_mass2(points, scales)), first, second)


def _pair(x: ArrayLike, q2: ArrayLike) -> tuple[Floats, Floats]:
    points, scales = _check.x_values("x", x), _check.real_array("q2", q2)
    _check.refuse_where("q2", scales, scales <= 0.0, "q2 must lie in (0, inf) GeV^2")
    return points, scales
