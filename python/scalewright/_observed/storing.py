"""A forward map as arrays and text, and back."""

from __future__ import annotations

import json
from dataclasses import asdict, fields
from typing import Any

import numpy as np

from .._check import Floats
from .._measured.combination import Combination, Weights
from ..electroweak import Electroweak
from ..errors import InputError, StoreError
from ..files import hdf5
from ..files.whole import PathLike, shown
from ..grid import ChebyshevGrid
from ..theory import Theory
from .points import Points
from .problem import Problem

__all__ = ["load", "save"]

KIND = "forward map"


def save(
    path: PathLike,
    problem: Problem,
    start: tuple[float, int],
    flavours: tuple[int, ...],
    matrix: Floats,
    data: Combination,
    steps_error: float,
) -> None:
    """Store a map, whole or not at all.

    Parameters
    ----------
    path : path-like
    problem, start, flavours, matrix, data, steps_error
        As `ForwardMap` holds them; `start` is (start_q2, start_nf).

    Raises
    ------
    StoreError
        If it cannot be written.
    InputError
        If coefficient functions of the user are in it: a function cannot be stored.
    """
    if any(problem.further.values()):
        raise InputError("further: a map with coefficient functions of your own cannot be stored")
    arrays: dict[str, Any] = {
        "/matrix": matrix,
        "/flavours": np.asarray(flavours),
        "/grid/edges": problem.grid.edges,
        "/grid/degrees": problem.grid.degrees,
        "/theory": np.asarray(problem.theory.to_json()),
        "/electroweak": np.asarray(json.dumps(asdict(problem.electroweak), sort_keys=True)),
    }
    for field in fields(Points):
        column = np.asarray(getattr(problem.points, field.name))
        arrays[f"/points/{field.name}"] = column.astype(np.int64) if column.dtype == bool else column
    for name in ("numerator", "denominator"):
        weights: Weights = getattr(data, name)
        for field in fields(Weights):
            arrays[f"/data/{name}/{field.name}"] = getattr(weights, field.name)
    attributes: dict[str, str | int | float] = {
        "start_q2": start[0],
        "start_nf": start[1],
        "target_mass": int(problem.target_mass),
        "subtraction": problem.subtraction,
        "data": data.data,
        "steps_error": steps_error,
    }
    hdf5.write(path, KIND, arrays, attributes)


def load(path: PathLike, copy: bool) -> dict[str, Any]:
    """Read a map that `save` wrote, as the arguments of `ForwardMap`.

    Raises
    ------
    StoreError
        If the file is not ours, damaged, or does not hold a forward map.
    """
    arrays, attributes = hdf5.read(path, KIND, copy)
    try:
        return _rebuilt(arrays, attributes)
    except (KeyError, TypeError, ValueError, InputError) as error:
        raise StoreError(
            f"{shown(path)}: not a forward map that this release understands: {error}"
        ) from error


def _rebuilt(arrays: dict[str, Any], attributes: dict[str, Any]) -> dict[str, Any]:
    grid = ChebyshevGrid.from_panels(np.array(arrays["/grid/edges"]), np.array(arrays["/grid/degrees"]))
    theory = Theory.from_json(str(arrays["/theory"][()]))
    electroweak = Electroweak(**json.loads(str(arrays["/electroweak"][()])))
    columns: dict[str, Any] = {}
    for field in fields(Points):
        column = np.array(arrays[f"/points/{field.name}"])
        if field.name.startswith("is_"):
            column = column.astype(bool)
        columns[field.name] = tuple(map(str, column)) if column.dtype.kind == "U" else column
    points = Points(**columns)
    target_mass, subtraction = bool(attributes["target_mass"]), str(attributes["subtraction"])
    count = int(attributes["data"])
    lists = [
        Weights(*(np.array(arrays[f"/data/{name}/{field.name}"]) for field in fields(Weights))).lists(
            count, 0
        )
        for name in ("numerator", "denominator")
    ]
    return {
        "problem": Problem(theory, grid, electroweak, points, target_mass, subtraction),
        "start_q2": float(attributes["start_q2"]),
        "start_nf": int(attributes["start_nf"]),
        "flavours": tuple(int(f) for f in arrays["/flavours"]),
        "matrix": np.asarray(arrays["/matrix"]),
        "data": Combination(lists[0], lists[1], len(points)),
        "steps_error": float(attributes["steps_error"]),
    }
