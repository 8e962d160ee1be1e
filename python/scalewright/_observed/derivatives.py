"""The derivative of the matrix of a table: rows and operators by the product rule.

Thresholds stay where they are, so that masses enter by logarithms and coefficient functions alone, and
everything is smooth.
"""

from __future__ import annotations

from functools import partial

from .. import _check
from .._carry import thread_count
from .._check import Floats, Integers
from .carried import built, carried, live
from .point_rows import point_rows
from .problem import Problem
from .row_slopes import RATIOS, row_slopes

__all__ = ["PARAMETERS", "carried_derivative"]

PARAMETERS = ("alpha_s", "charm", "bottom", "top", *RATIOS)


def carried_derivative(
    problem: Problem,
    parameter: str,
    *,
    start_q2: float,
    start_nf: int,
    tolerance: float | None = None,
    threads: int | None = None,
) -> Floats:
    """Return the derivative of `carried_matrix`, (row, flavour, node).

    Parameters
    ----------
    problem : Problem
    parameter : str
        One of `PARAMETERS`: alpha_s at the scale where it is given, a mass in GeV, a ratio of scales.
    start_q2, start_nf, tolerance, threads
        As for `build_operators`.

    Raises
    ------
    InputError
        If the parameter is unknown, or a ratio of scales whose logarithms are not known.
    """
    _check.choice("parameter", parameter, PARAMETERS)
    if parameter in RATIOS:
        problem.refuse_unknown_logarithms(f"there is no derivative by {parameter}")
    operators = built(problem, start_q2=start_q2, start_nf=start_nf, tolerance=tolerance, threads=threads)
    source, flavours = live(operators), operators._route.active

    def slopes(chosen: Integers, nf: int, out: Floats) -> Floats:
        return row_slopes(problem, chosen, nf, parameter)

    matrix = carried(problem, source, flavours, slopes, threads)
    if parameter == "hard_mur2_ratio":
        return matrix
    # mu_f^2 is where the operators end: d/d ratio = 1/ratio d/d ln mu_f^2
    ratio = problem.theory.hard_muf2_ratio
    name, factor = ("ln_q2", 1.0 / ratio) if parameter == "hard_muf2_ratio" else (parameter, 1.0)
    moving = source.derivative(name, thread_count(threads))
    matrix += factor * carried(problem, moving, flavours, partial(point_rows, problem), threads)
    return matrix
