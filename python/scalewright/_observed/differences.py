"""Derivatives of a map by central differences in three steps, with the error that they show.

A first form: the map is rebuilt at tight tolerance for six values of the parameter, and the differences at
steps h, 2h, 4h are combined so that the error falls like h^6. Thresholds stay where they are, so that
masses enter by logarithms and coefficient functions alone.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any, NamedTuple

import numpy as np

from .. import _check
from .._check import Floats
from ..parameters import Coupling
from ..theory import Theory

__all__ = ["PARAMETERS", "Derivative", "differentiated"]

PARAMETERS = ("alpha_s", "charm", "bottom", "hard_mur2_ratio", "hard_muf2_ratio")
#: Smallest step, as a part of the parameter: of 1e-3, 2.5e-3, 5e-3 and 1e-2 the one whose error showed
#: smallest on an NNLO map of F2 (the curve is flat: a factor 3 between the middle two).
_STEP = 2.5e-3
#: Relative error of the steps in scale while differences are taken.
TOLERANCE = 1e-12


class Derivative(NamedTuple):
    """A derivative by differences.

    Attributes
    ----------
    matrix : ndarray, (row, flavour, node)
    step : float
        The smallest, in units of the parameter; the others are 2 and 4 times it.
    error : float
        Largest difference from the combination of the two smaller steps alone, relative to the largest entry
        of the same row.
    """

    matrix: Floats
    step: float
    error: float


def differentiated(theory: Theory, parameter: str, build: Callable[[Theory], Floats]) -> Derivative:
    """Return the derivative of a matrix.

    Parameters
    ----------
    theory : Theory
        Where it is taken.
    parameter : str
        One of `PARAMETERS`: alpha_s at the scale where it is given, a mass in GeV, a ratio of scales.
    build : callable
        Theory -> matrix (row, flavour, node), at the tolerance `TOLERANCE`.

    Raises
    ------
    InputError
        If the parameter is unknown, or a step from it leaves what a theory allows.
    """
    _check.choice("parameter", parameter, PARAMETERS)
    centre = _value(theory, parameter)
    step = _STEP * centre
    central = []
    for times in (1.0, 2.0, 4.0):
        h = times * step
        above, below = (build(_moved(theory, parameter, centre + sign * h)) for sign in (1.0, -1.0))
        central.append((above - below) / (2.0 * h))
    # Richardson: the errors are even powers of h
    fourth = [(4.0 * central[i] - central[i + 1]) / 3.0 for i in range(2)]
    best = (16.0 * fourth[0] - fourth[1]) / 15.0
    size = np.abs(best).max(axis=(1, 2))
    miss = np.abs(best - fourth[0]).max(axis=(1, 2))
    error = float(np.max(miss / np.where(size > 0.0, size, 1.0)))
    return Derivative(best, step, error)


def _value(theory: Theory, parameter: str) -> float:
    if parameter == "alpha_s":
        return theory.coupling.alpha_s
    if parameter in ("charm", "bottom"):
        return float(getattr(theory.masses, parameter))
    return float(getattr(theory, parameter))


def _moved(theory: Theory, parameter: str, value: float) -> Theory:
    """Return the theory with another value, thresholds where they were."""
    fixed = replace(theory, threshold_mu2_ratio=1.0, thresholds_q2=theory.threshold_scales)
    if parameter == "alpha_s":
        given: Coupling = theory.coupling
        return replace(fixed, coupling=Coupling(value, q2=given.q2, nf=given.nf))
    if parameter in ("charm", "bottom"):
        masses: Any = {parameter: value}
        return replace(fixed, masses=replace(theory.masses, **masses))
    ratio: Any = {parameter: value}
    return replace(fixed, **ratio)
