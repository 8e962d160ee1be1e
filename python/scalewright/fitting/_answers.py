"""What a fit can say besides numbers: blind directions; what follows from its covariance."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, show
from ..densities import Densities
from ..flavours import combination
from ._solve import BLIND, scaled

if TYPE_CHECKING:
    from ._problem import Problem

__all__ = ["BlindDirection", "blind_directions", "ends", "propagated", "weights_of"]

#: Parts of a direction that are shown.
_SHOWN = 0.1


@dataclass(frozen=True, eq=False)
class BlindDirection:
    """A direction of the parameters along which the data do not change.

    Parameters
    ----------
    singular_value : float
        In parts of the largest, parameters in units of their own effect.
    parameters : dict
        Name -> part, the largest 1.
    values : ndarray, (flavour, node)
        How x f(x) changes along it, in the order of the shape, the largest change 1 (or all 0).
    """

    singular_value: float
    parameters: dict[str, float]
    values: Floats

    @classmethod
    def of(
        cls, problem: Problem, parameters: Floats, free: Any, along: Floats, singular: float
    ) -> BlindDirection:
        """Return a direction of the free parameters (free,) at a fit."""
        whole = np.zeros(len(problem.names))
        whole[free] = along / along[np.argmax(abs(along))]
        count = len(problem.shape.names)
        change = np.tensordot(whole[:count], problem.shape.jacobian(parameters[:count]), axes=(0, 0))
        largest = abs(change).max()
        parts = {name: float(part) for name, part in zip(problem.names, whole, strict=True) if part != 0.0}
        return cls(singular, parts, change / largest if largest > 0.0 else change)

    def __str__(self) -> str:
        parts = [f"{part:+.3g} {name}" for name, part in self.parameters.items() if abs(part) >= _SHOWN]
        return f"{' '.join(parts)} (singular value {self.singular_value:.1e})"


def weights_of(problem: Problem, flavour: int | str) -> dict[int, float]:
    """Return the weights of a combination in the flavours of the shape, or refuse it."""
    shape = problem.shape
    active = range(1, max(problem.nf, *map(abs, set(shape.flavours) - {21}), 1) + 1)
    weights = combination(flavour, active)
    for number in weights:
        if number not in shape.flavours:
            _check.refuse("flavour", flavour, f"the shape has no flavour {number}")
    return weights


def propagated(best: Densities, along: Floats, function: Callable[[Densities], ArrayLike]) -> Floats:
    """Return the uncertainty of a function of densities, which change `along` (direction, flavour, node)."""
    sides = [
        Densities(
            best.grid, q2=best.q2, nf=best.nf, flavours=best.flavours, values=best.values + sign * along
        )
        for sign in (1.0, -1.0)
    ]
    up, down = (np.asarray(_check.raised("function", function, side), dtype=np.float64) for side in sides)
    result: Floats = np.linalg.norm(0.5 * (up - down), axis=0)[()]
    return result


def blind_directions(
    problem: Problem, parameters: Floats, free: Any, jacobian: Floats
) -> tuple[BlindDirection, ...]:
    """Return directions of the free parameters along which residuals do not change, the blindest first."""
    if not free.size:
        return ()
    part = jacobian[:, free]
    part = np.concatenate([part, np.zeros((max(0, free.size - len(part)), free.size))])
    _, values, right, size = scaled(part)
    top = values[0] if values[0] > 0.0 else 1.0
    found = [
        BlindDirection.of(problem, parameters, free, right[j] / size, float(values[j] / top))
        for j in np.flatnonzero(values <= BLIND * top)
    ]
    return tuple(found[::-1])


def ends(problem: Problem, parameters: Floats, root: Floats) -> Densities:
    """Return the best fit and the ends of the axes, plus and minus of each in turn."""
    found = [parameters, *(parameters + sign * r for r in root.T for sign in (1.0, -1.0))]
    for place, name in enumerate(problem.names):
        low, high = float(problem.low[place]), float(problem.high[place])
        for end in found:
            if not low <= end[place] <= high:
                limits = f"an end of the ellipsoid lies beyond [{show(low)}, {show(high)}]"
                _check.refuse(name, float(end[place]), limits)
    sets = np.stack([end[: len(problem.shape.names)] for end in found])
    return problem.shape.densities(sets, q2=problem.q2, nf=problem.nf)
