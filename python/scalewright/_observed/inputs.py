"""Densities as a map takes them: of its grid, start and flavours."""

from __future__ import annotations

from typing import Any

import numpy as np

from .. import _check
from .._check import Floats, show
from .._route import SAME_SCALE
from ..densities import Densities
from ..errors import InputError
from ..grid import ChebyshevGrid
from .problem import INTRINSIC

__all__ = ["input_values"]


def input_values(
    densities: Any, grid: ChebyshevGrid, start: tuple[float, int], flavours: tuple[int, ...]
) -> Floats:
    """Return values (replica, flavour, node) in the order of the flavours of a map.

    Parameters
    ----------
    densities : Densities or array_like
        The latter (replica, flavour, node) or (flavour, node), in that order already.
    grid : ChebyshevGrid
    start : tuple
        Scale in GeV^2 and number of flavours from which the map starts.
    flavours : tuple of int
        Those of the map.

    Raises
    ------
    InputError
        If grid, scale, number of flavours or shape do not fit.
    """
    if not isinstance(densities, Densities):
        return _array(densities, (len(flavours), grid.nodes))
    if densities.grid != grid:
        raise InputError(f"densities.grid = {densities.grid!r}: the map is for {grid!r}")
    if densities.scales != 1:
        raise InputError(f"densities have {densities.scales} scales: the map starts from one")
    q2, nf = float(np.ravel(densities.q2)[0]), int(np.ravel(densities.nf)[0])
    if abs(q2 - start[0]) > SAME_SCALE * start[0]:
        _check.refuse("densities.q2", q2, f"the map starts from {show(start[0])} GeV^2")
    if nf != start[1]:
        _check.refuse("densities.nf", nf, f"the map starts from nf = {start[1]}")
    values = densities.values.reshape(-1, *densities.values.shape[-2:])
    held = {flavour: place for place, flavour in enumerate(densities.flavours)}
    for flavour, place in held.items():
        if flavour not in flavours and values[:, place].any():
            what = f"not active at nf = {nf} and not zero: {INTRINSIC}"
            _check.refuse("densities.flavours", flavour, what)
    absent = [flavour for flavour in flavours if flavour not in held]
    if absent:
        raise InputError(f"densities have no flavour {_check.show_all(absent)}, active at nf = {nf}")
    return np.ascontiguousarray(values[:, [held[flavour] for flavour in flavours]])


def _array(given: Any, expected: tuple[int, int]) -> Floats:
    """Return an array (replica, flavour, node)."""
    array = _check.real_array("densities", given)
    array = array[np.newaxis] if array.ndim == 2 else array
    if array.ndim != 3 or array.shape[1:] != expected:
        _check.refuse("densities", array, f"the shape must be (replica, {expected[0]}, {expected[1]})")
    return array
