"""What the fit to the data themselves says of replicas: whether there is a minimum, what is blind."""

from __future__ import annotations

from ._problem import Problem
from ._result import FitResult
from ._solve import Solution

__all__ = ["of_data"]

_MEANING = "along it replicas spread as priors say, or as their searches happen to end"
#: Directions that are named; the others are counted.
_NAMED = 3


def of_data(problem: Problem, solution: Solution) -> tuple[str, ...]:
    """Say what makes the spread of replicas something else than an uncertainty.

    Parameters
    ----------
    problem : Problem
    solution : Solution
        Of the fit to the data.

    Returns
    -------
    tuple of str
        One sentence each; none where all is well.
    """
    central = FitResult(problem, solution, 1.0, 0, None)
    lines = [] if central.converged else [f"WARNING: the fit to the data themselves has {central.status[0]}"]
    blind = central.blind
    for direction in blind[:_NAMED]:
        lines.append(f"WARNING: the data do not see {direction}: {_MEANING}")
    if len(blind) > _NAMED:
        lines.append(f"WARNING: nor do they see {len(blind) - _NAMED} more directions")
    return tuple(lines)
