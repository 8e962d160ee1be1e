"""A fit in a stored file, and what stands for its problem when it is read again.

============================== ==========================================================================
/parameters/names, values      (parameter,)
/parameters/low, high          (parameter,), bounds
/parameters/state              (parameter,): -1 on the lower bound, 1 on the upper, 2 held, 0 free
/residuals, /jacobian          (residual,), (residual, parameter): whitened, those of the priors last
/prediction                    (datum,)
/shape/jacobian                (parameter of the shape, flavour, node)
/solved/names, values          what sum rules determine
/priors/names, values          (prior,), (prior, 2): value and standard deviation
/theory/names, reference       theory parameters, and where the map is exact
/theory/options                the theory at the fitted values as JSON text, empty where unknown
/notes                         what else its status says
/curvature/values, vectors     second derivatives along the axes of the linear ellipsoid; absent where unknown
/axes                          (parameter, direction), their product the covariance; absent where unknown
============================== ==========================================================================

Besides, densities as in `scalewright._stored_densities`: the best fit, then the ends of the axes if known.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any, NoReturn

import numpy as np

from .. import _stored_densities
from .._check import Floats
from ..densities import Densities
from ..errors import InputError, ScalewrightError, StoreError
from ..files.whole import PathLike, shown
from ..theory import Theory
from ._solve import Solution

if TYPE_CHECKING:
    from ._result import FitResult

__all__ = ["KIND", "load", "save"]

KIND = "fit"
_LOW, _HIGH, _HELD = -1, 1, 2


# ---- writing -------------------------------------------------------------------------------------------


def save(path: PathLike, result: FitResult) -> None:
    """Store a fit, whole or not at all."""
    from ..files import hdf5

    densities = _ends(result)
    arrays, notes = _stored_densities.arrays(result.densities if densities is None else densities)
    arrays |= _parameters(result) | _answers(result)
    solution, problem = result._solution, result._problem
    notes |= {
        "delta_chi2": result.delta_chi2, "rebuilt": result.rebuilt, "distance": solution.distance,
        "stopped": solution.stopped, "residual_calls": solution.residual_calls,
        "jacobian_calls": solution.jacobian_calls, "rows": problem.rows, "data": problem.count,
        "exact_jacobian": int(problem.shape.exact_jacobian), "ends": int(densities is not None),
        "unsettled": -1 if result._curvature is None else result._curvature[2],
    }  # fmt: skip
    hdf5.write(path, KIND, arrays, notes)


def _ends(result: FitResult) -> Densities | None:
    """Return the ends of the axes, where there are any."""
    try:
        return result.eigenvectors()
    except InputError:  # no covariance, or an end beyond a bound
        return None


def _parameters(result: FitResult) -> dict[str, Any]:
    problem, solution = result._problem, result._solution
    state = np.where(solution.held, _HELD, np.where(solution.at_low, _LOW, solution.at_high * _HIGH))
    theory = "" if result.theory is None else result.theory.to_json()
    solved = problem.shape.solved(result._of_shape(result.parameters))
    return {
        "/parameters/names": _text(result.names),
        "/parameters/values": result.parameters,
        "/parameters/low": problem.low,
        "/parameters/high": problem.high,
        "/parameters/state": state.astype(np.int64),
        "/solved/names": _text(solved),
        "/solved/values": np.array(list(solved.values()), dtype=np.float64),
        "/priors/names": _text(problem.priors),
        "/priors/values": np.array(list(problem.priors.values()), dtype=np.float64).reshape(-1, 2),
        "/theory/names": _text(problem.reference),
        "/theory/reference": np.array(list(problem.reference.values()), dtype=np.float64),
        "/theory/options": _text([theory]),
        "/notes": _text(getattr(problem, "notes", ())),
    }


def _answers(result: FitResult) -> dict[str, Any]:
    shape = result._problem.shape
    arrays: dict[str, Any] = {
        "/residuals": result._solution.residuals,
        "/jacobian": result._solution.jacobian,
        "/prediction": result.prediction,
        "/shape/jacobian": shape.jacobian(result._of_shape(result.parameters)),
    }
    if result._curvature is not None:
        arrays["/curvature/values"], arrays["/curvature/vectors"] = result._curvature[:2]
    if result.covariance is not None:
        arrays["/axes"] = result._root
    return arrays


def _text(words: Any) -> Any:
    return np.asarray(list(words), dtype=np.str_)


# ---- reading -------------------------------------------------------------------------------------------


def load(path: PathLike, copy: bool) -> tuple[dict[str, Any], dict[str, Any]]:
    """Return the arguments of `FitResult`, and the answers that it need not compute again."""
    from ..files import hdf5

    arrays, notes = hdf5.read(path, KIND, copy=copy)
    try:
        return _made(path, arrays, notes)
    except (KeyError, ValueError, TypeError, IndexError, ScalewrightError) as error:
        raise StoreError(f"{shown(path)}: sealed, but not a fit as we write it: {error}") from error


def _made(
    path: PathLike, arrays: Mapping[str, Any], notes: Mapping[str, Any]
) -> tuple[dict[str, Any], dict[str, Any]]:
    ends = Densities(**_stored_densities.arguments(path, arrays, notes))
    state, values = arrays["/parameters/state"], np.array(arrays["/parameters/values"])
    residuals, jacobian = arrays["/residuals"], arrays["/jacobian"]
    if jacobian.shape != (residuals.size, values.size) or not state.size == values.size:
        raise ValueError(f"/jacobian has the shape {jacobian.shape}, not {(residuals.size, values.size)}")
    solution = Solution(
        values, residuals, jacobian, state == _LOW, state == _HIGH, state == _HELD,
        float(notes["distance"]), str(notes["stopped"]), int(notes["residual_calls"]),
        int(notes["jacobian_calls"]),
    )  # fmt: skip
    arguments = {
        "problem": StoredProblem(arrays, notes, ends),
        "solution": solution,
        "delta_chi2": float(notes["delta_chi2"]),
        "rebuilt": int(notes["rebuilt"]),
    }
    return arguments, _known(arrays, notes, ends)


def _known(arrays: Mapping[str, Any], notes: Mapping[str, Any], ends: Densities) -> dict[str, Any]:
    """Return the answers that the file holds."""
    below = (
        None if ends.below is None else type(ends.below)(ends.below.momentum[:, :1], ends.below.number[:, :1])
    )
    best = Densities(
        ends.grid, q2=float(ends.q2), nf=int(ends.nf), flavours=ends.flavours, values=ends.values[:1],
        below=below,
    )  # fmt: skip
    unsettled = int(notes["unsettled"])
    curved = None
    if unsettled >= 0:
        curved = arrays["/curvature/values"], arrays["/curvature/vectors"], unsettled
    known: dict[str, Any] = {"densities": best, "prediction": arrays["/prediction"], "_curvature": curved}
    if notes["ends"]:
        known["_eigenvectors"] = ends
    if "/axes" in arrays:
        known["_root"] = arrays["/axes"]
    return known


class StoredShape:
    """What is left of the shape of a stored fit: its derivative at the best fit."""

    def __init__(self, arrays: Mapping[str, Any], exact: bool, grid: Any, flavours: tuple[int, ...]) -> None:
        self._jacobian: Floats = arrays["/shape/jacobian"]
        self.names = tuple(arrays["/parameters/names"].tolist()[: len(self._jacobian)])
        self._solved = _pairs(arrays, "/solved")
        self.exact_jacobian, self.grid, self.flavours = exact, grid, flavours

    def jacobian(self, parameters: Floats) -> Floats:
        """Return the derivative at the best fit, (parameter, flavour, node)."""
        return self._jacobian

    def solved(self, parameters: Floats) -> dict[str, float]:
        """Return what sum rules determine at the best fit."""
        return dict(self._solved)

    def densities(self, *_: Any, **__: Any) -> NoReturn:
        """Refuse."""
        refuse()


class StoredProblem:
    """What is left of the problem of a stored fit: names, bounds and numbers, no map."""

    def __init__(self, arrays: Mapping[str, Any], notes: Mapping[str, Any], ends: Densities) -> None:
        self.names = tuple(arrays["/parameters/names"].tolist())
        self.low, self.high = arrays["/parameters/low"], arrays["/parameters/high"]
        self.priors = _pairs(arrays, "/priors")
        self.reference = dict(
            zip(arrays["/theory/names"].tolist(), arrays["/theory/reference"].tolist(), strict=True)
        )
        self.rows, self.count = int(notes["rows"]), int(notes["data"])
        self.q2, self.nf = float(ends.q2), int(ends.nf)
        text = str(arrays["/theory/options"][0])
        self.theory = Theory.from_json(text) if text else None
        self.shape = StoredShape(arrays, bool(notes["exact_jacobian"]), ends.grid, ends.flavours)
        self.notes = tuple(arrays["/notes"].tolist())
        self.first_theory = len(self.names) - len(self.reference)

    def prediction(self, *_: Any, **__: Any) -> NoReturn:
        """Refuse."""
        refuse()

    residuals = jacobian = prediction


def refuse() -> NoReturn:
    """Say that a stored fit answers no new question."""
    raise InputError("a stored fit has no forward map: for this, fit again")


def _pairs(arrays: Mapping[str, Any], place: str) -> dict[str, Any]:
    names, values = arrays[f"{place}/names"].tolist(), arrays[f"{place}/values"].tolist()
    return {name: tuple(v) if isinstance(v, list) else v for name, v in zip(names, values, strict=True)}
