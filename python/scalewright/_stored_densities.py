"""Densities in a stored file: which array is where.

======================= ===========================================================
name                    content
======================= ===========================================================
/grid/edges, degrees, x panels in u = ln(1/x), and the nodes they make
/scales/q2, nf          (scale,), GeV^2
/flavours               (flavour,), PDG numbers
/values                 (scale, replica, flavour, node), x f(x)
/below/momentum, number (scale, replica[, quark]) below x_min; absent where unknown
======================= ===========================================================
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np

from .below import Below
from .errors import InputError, StoreError
from .files.whole import PathLike, shown
from .grid import ChebyshevGrid

if TYPE_CHECKING:
    from ._questions import Questions

_UNITS = "q2 in GeV^2; values are x f(x)"


def save(path: PathLike, of: Questions) -> None:
    """Store densities, whole or not at all."""
    from .files import hdf5

    hdf5.write(path, "densities", *arrays(of))


def arrays(of: Questions) -> tuple[dict[str, np.ndarray[Any, Any]], dict[str, str | int | float]]:
    """Return densities as named arrays and attributes."""
    found: dict[str, np.ndarray[Any, Any]] = {
        "/grid/edges": of._grid.edges,
        "/grid/degrees": of._grid.degrees,
        "/grid/x": of._grid.x,
        "/scales/q2": of._q2,
        "/scales/nf": of._nf,
        "/flavours": np.asarray(of._flavours, dtype=np.int64),
        "/values": of._values,
    }
    if of._below is not None:
        found["/below/momentum"] = of._below.momentum
        found["/below/number"] = of._below.number
    # A single scale that is not a list is told from a list of one
    return found, {"one_scale": int(of._one), "units": _UNITS}


def load(path: PathLike, copy: bool) -> dict[str, Any]:
    """Return the arguments of `Densities` from a stored file."""
    from .files import hdf5

    return arguments(path, *hdf5.read(path, "densities", copy=copy))


def arguments(
    path: PathLike, arrays: Mapping[str, np.ndarray[Any, Any]], attributes: Mapping[str, str | int | float]
) -> dict[str, Any]:
    """Return the arguments of `Densities` from named arrays and attributes; `path` is for messages."""
    try:
        one = bool(attributes["one_scale"])
        known = None
        if "/below/momentum" in arrays:
            known = Below(arrays["/below/momentum"], arrays["/below/number"])
        return {
            "grid": ChebyshevGrid.from_panels(arrays["/grid/edges"], arrays["/grid/degrees"]),
            "q2": float(arrays["/scales/q2"][0]) if one else arrays["/scales/q2"],
            "nf": int(arrays["/scales/nf"][0]) if one else arrays["/scales/nf"],
            "flavours": arrays["/flavours"],
            "values": arrays["/values"][0] if one else arrays["/values"],
            "below": known,
        }
    except KeyError as error:
        raise StoreError(f"{shown(path)}: holds no {error.args[0]}") from error
    except InputError as error:
        raise StoreError(f"{shown(path)}: {error}") from error
