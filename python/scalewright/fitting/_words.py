"""The state of a fit in words. Says what is so; decides nothing."""

from __future__ import annotations

from typing import TYPE_CHECKING

from .._check import show

if TYPE_CHECKING:
    from ._problem import Problem
    from ._result import FitResult
    from ._solve import Solution

_MOST_LINES = 40


def status(result: FitResult, problem: Problem, solution: Solution) -> tuple[str, ...]:
    """Return what is to be known about a fit, one sentence a line."""
    lines = [_convergence(result, solution)]
    for name, side in result.at_bounds.items():
        words = "its uncertainty and its correlations are not given"
        lines.append(f"{name} lies on its {side} bound {show(result.value(name))} and presses on it: {words}")
    everything = result._unseen(solution.jacobian)
    for direction in result.blind:
        lines.append(f"the data do not see {direction}")
    if everything:
        count = len(everything)
        what = "one direction" if count == 1 else f"{count} directions"
        lines.append(f"neither data nor priors see {what}: there is no covariance")
    elif result.blind:
        lines.append("what the data do not see is known from the priors alone")
    if not everything and result.converged and result.covariance is None:
        lines.append("chi-square falls in some direction: a saddle point, and there is no covariance")
    if result.covariance is not None and result._curvature is not None and result._curvature[2]:
        count, of = result._curvature[2], len(solution.free)
        lines.append(f"along {count} of {of} directions chi-square is no parabola: uncertainties are linear")
    lines += [*_theory(result, problem), *getattr(problem, "notes", ())]
    if not problem.shape.exact_jacobian:
        lines.append("the derivative of the shape is made of differences")
    return tuple(lines)


def _convergence(result: FitResult, solution: Solution) -> str:
    distance = f"a linear step would lower chi-square by {solution.distance:.1e}"
    if solution.converged and not solution.stopped:
        return f"converged: {distance}"
    if solution.converged:
        return f"{solution.stopped}, at a minimum: {distance}"
    return f"not converged: {solution.stopped or 'steps no longer help'}; {distance}"


def _theory(result: FitResult, problem: Problem) -> list[str]:
    """Say how far theory parameters have moved from where the map is exact, and what a free mass is."""
    lines = []
    for name, reference in problem.reference.items():
        moved = result.value(name) - reference
        where = f"the map is exact at {name} = {show(reference)} and of first order around it"
        lines.append(f"{where}; the fit is {moved:+.2g} away")
    if {"charm", "bottom"} & set(problem.reference):
        lines.append(_study(problem))
    return lines


def _study(problem: Problem) -> str:
    """Warn of a mass that is fitted: what would measure it is known to order a only, or not there."""
    assumed = problem.theory
    if assumed is not None and assumed.heavy_quarks == "massless":
        return (
            "WARNING: a mass is free, but heavy quarks are massless: only matching at thresholds knows of it"
        )
    return "WARNING: a mass is free: with massive coefficients of order a this is a study, no measurement"


def screen(result: FitResult) -> str:
    """Return one screen."""
    size = max([10, *(len(name) for name in result.names)])
    lines = ["FitResult", *(f"  {line}" for line in result.status)]
    lines.append(f"  chi-square {result.chi2:.6g} for {result.data} data, {_freedom(result)}")
    if result._problem.priors:
        lines.append(f"  chi-square of {len(result._problem.priors)} priors {result.chi2_priors:.6g}")
    shown = result.names if len(result.names) <= _MOST_LINES else result.names[:_MOST_LINES]
    for name in shown:
        error = result.error(name)
        at = result.at_bounds.get(name)
        tail = (
            f"on its {at} bound" if at else ("uncertainty unknown" if error != error else f"+- {error:.3g}")
        )
        lines.append(f"  {name:<{size}}  {result.value(name): .6g}  {tail}")
    if len(shown) < len(result.names):
        lines.append(f"  ... and {len(result.names) - len(shown)} more")
    for name, value in result._problem.shape.solved(result._of_shape(result.parameters)).items():
        lines.append(f"  {name:<{size}}  {value: .6g}  by its sum rule")
    return "\n".join(lines)


def _freedom(result: FitResult) -> str:
    return f"{len(result.names) - len(result.at_bounds)} free parameters"
