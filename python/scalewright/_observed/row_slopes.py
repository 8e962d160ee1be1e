"""Derivatives of rows at the scales of their points with respect to parameters of the theory.

Rows are linear in powers of a(mu_r) and polynomials in the logarithms of both hard scales: what comes from
there is exact. Massive rows depend on a mass besides: six-point differences of these rows alone, all else
held fixed.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .._check import Floats, Integers
from .point_rows import add_heavy, light_part
from .problem import Problem
from .pullback import CHANNELS

__all__ = ["MASSES", "RATIOS", "row_slopes"]

#: Masses of quarks, by name; ratios of scales, with the names of their logarithms.
MASSES = {"charm": 4, "bottom": 5}
RATIOS = {"hard_mur2_ratio": "mur2_ratio", "hard_muf2_ratio": "muf2_ratio"}
#: Six points: what f(m + k h) - f(m - k h), k = 1, 2, 3, are multiplied with over h, by Taylor series; the
#: error is h^6 f^(7)/140.
_WEIGHTS = (3.0 / 4.0, -3.0 / 20.0, 1.0 / 60.0)
#: h as a part of the mass. Against differences of whole maps, which show 3e-9 of the largest of a row
#: themselves, no more than 1e-9 was seen (x from 1e-3 to 0.3, Q^2 from 8 to 2e4 GeV^2, charm and bottom).
_STEP = 4e-3


def row_slopes(problem: Problem, chosen: Integers, nf: int, parameter: str) -> Floats:
    """Return the derivative of `point_rows`, densities at mu_f and its value held fixed.

    Parameters
    ----------
    problem : Problem
    chosen : ndarray of int, (point,)
        Which points; all with `nf` flavours.
    nf : int
        Number of active flavours.
    parameter : str
        "alpha_s", "charm", "bottom", "top", or a key of `RATIOS`.

    Returns
    -------
    ndarray, (point, 13, node)
    """
    rows = _through_coupling(problem, chosen, nf, parameter)
    if parameter in RATIOS:
        rows += _through_logarithms(problem, chosen, nf, parameter)
    elif parameter in MASSES and problem.theory.heavy_quarks != "massless":
        rows += _through_mass(problem, chosen, nf, MASSES[parameter])
    return rows


def _through_coupling(problem: Problem, chosen: Integers, nf: int, parameter: str) -> Floats:
    """Return what comes from powers of a(mu_r)."""
    setting, a = problem.setting, problem.a[chosen]
    of_a = _coupling_slope(problem, chosen, nf, parameter)
    if not of_a.any():
        return np.zeros((chosen.size, CHANNELS, problem.grid.nodes))
    powers = setting.powers(a)
    slopes = np.zeros_like(powers)
    slopes[:, 1:] = np.arange(1, powers.shape[1]) * powers[:, :-1] * of_a[:, np.newaxis]
    rows = light_part(problem, chosen, nf, setting, slopes)
    add_heavy(rows, problem, chosen, nf, setting, slopes, problem.theory.masses.values)
    return rows


def _coupling_slope(problem: Problem, chosen: Integers, nf: int, parameter: str) -> Floats:
    """Return the derivative of a(mu_r), (point,)."""
    theory = problem.theory
    if parameter == "hard_muf2_ratio":
        return np.zeros(chosen.size)
    mur2 = problem.points.q2[chosen] * theory.hard_mur2_ratio
    name, factor = ("ln_q2", theory.hard_mur2_ratio) if parameter == "hard_mur2_ratio" else (parameter, 1.0)
    slope = theory.handle().alpha_s_derivative(name, mur2, np.full(chosen.size, nf))
    return np.asarray(slope / (4.0 * np.pi * factor))


def _through_logarithms(problem: Problem, chosen: Integers, nf: int, parameter: str) -> Floats:
    """Return what comes from logarithms of a ratio of scales at fixed a(mu_r)."""
    setting, name = problem.setting, RATIOS[parameter]
    powers = setting.powers(problem.a[chosen])
    rows = light_part(problem, chosen, nf, replace(setting, by=name), powers)
    if name == "muf2_ratio":
        # to order a massive rows are linear in ln mu_f^2: the difference over a unit of it is the derivative
        masses = problem.theory.masses.values
        higher = replace(setting, muf2_ratio=setting.muf2_ratio * np.e)
        add_heavy(rows, problem, chosen, nf, higher, powers, masses)
        add_heavy(rows, problem, chosen, nf, setting, -powers, masses)
    rows /= getattr(problem.theory, parameter)
    return rows


def _through_mass(problem: Problem, chosen: Integers, nf: int, quark: int) -> Floats:
    """Return what comes from massive rows and from what damps the rest, by differences in one mass."""
    setting, masses = problem.setting, list(problem.theory.masses.values)
    powers = setting.powers(problem.a[chosen])
    rows = np.zeros((chosen.size, CHANNELS, problem.grid.nodes))
    centre = masses[quark - 4]
    step = _STEP * centre
    for k, weight in enumerate(_WEIGHTS, start=1):
        for sign in (1.0, -1.0):
            masses[quark - 4] = centre + sign * k * step
            scaled = powers * (sign * weight / step)
            add_heavy(rows, problem, chosen, nf, setting, scaled, masses, quarks=(quark,))
    return rows
