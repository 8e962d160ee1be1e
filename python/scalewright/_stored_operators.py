"""Operators in files: which arrays there are, and how they become operators again.

==================  =====================================================================
/theory             options of the theory as JSON text
/grid/edges         panel edges in u = ln(1/x)
/grid/degrees       degrees of the panels
/grid/x             nodes, for readers that know nothing of panels
/start/intrinsic    heavy flavours above the starting nf whose input is allowed
/scales/q2          scales of the output in GeV^2
/scales/nf          their numbers of flavours
/blocks/names       names of the blocks
/blocks/values      (scale, block, output node, input node)
/flows/names        names of the rows that say what flows below x_min
/flows/values       (scale, row, node)
==================  =====================================================================

Attributes: start_q2, start_nf, light, error, steps, units.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np

from ._route import Held, Route
from .errors import ScalewrightError, StoreError
from .files import hdf5
from .files.whole import PathLike, shown
from .grid import ChebyshevGrid
from .theory import Theory

if TYPE_CHECKING:
    from .operators import Operators

UNITS = "scales in GeV^2; blocks act on x f(x)"


def save(path: PathLike, operators: Operators) -> None:
    """Store operators that are held as arrays."""
    held: Any = operators._source
    arrays = {
        "/theory": np.array(operators.theory.to_json()),
        "/grid/edges": operators.grid.edges,
        "/grid/degrees": operators.grid.degrees,
        "/grid/x": operators.grid.x,
        "/start/intrinsic": np.array(operators.intrinsic, dtype=np.int64),
        "/scales/q2": operators.q2,
        "/scales/nf": operators.nf,
        "/blocks/names": np.array(held.names),
        "/blocks/values": held.values,
        "/flows/names": np.array(held.flow_names),
        "/flows/values": held.flow_values,
    }
    notes = {
        "start_q2": operators.start_q2,
        "start_nf": operators.start_nf,
        "light": held.light,
        "error": float(held.error),
        "steps": int(held.steps),
        "units": UNITS,
    }
    hdf5.write(path, "operators", arrays, notes)


def load(path: PathLike, copy: bool) -> Operators:
    """Read operators; see `Operators.load`."""
    arrays, notes = hdf5.read(path, "operators", copy)
    try:
        return _made(arrays, notes)
    except (KeyError, ValueError, TypeError, ScalewrightError) as error:
        raise StoreError(f"{shown(path)}: sealed, but not operators as we write them: {error}") from error


def _made(arrays: Mapping[str, Any], notes: Mapping[str, Any]) -> Operators:
    """Make operators of arrays, each of its expected shape."""
    from .operators import Operators

    theory = Theory.from_json(str(arrays["/theory"]))
    grid = ChebyshevGrid.from_panels(arrays["/grid/edges"], arrays["/grid/degrees"])
    q2, nf = arrays["/scales/q2"], arrays["/scales/nf"]
    names, rows = (tuple(str(name) for name in arrays[place]) for place in ("/blocks/names", "/flows/names"))
    values, flows = arrays["/blocks/values"], arrays["/flows/values"]
    wanted = {
        "/blocks/values": (values.shape, (q2.size, len(names), grid.nodes, grid.nodes)),
        "/flows/values": (flows.shape, (q2.size, len(rows), grid.nodes)),
        "/scales/nf": (nf.shape, q2.shape),
    }
    for place, (found, want) in wanted.items():
        if found != want:
            raise ValueError(f"{place} has the shape {found}, not {want}")
    intrinsic = tuple(int(flavour) for flavour in arrays["/start/intrinsic"])
    route = Route(float(notes["start_q2"]), int(notes["start_nf"]), intrinsic, q2, nf)
    light, error, steps = int(notes["light"]), float(notes["error"]), int(notes["steps"])
    return Operators(theory, grid, route, Held(route, names, light, values, rows, flows, error, steps))
