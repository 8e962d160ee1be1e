"""Integrals over densities: momentum, quark numbers, moments.

Works on densities with all four axes; results keep the axis of scales.
"""

from __future__ import annotations

import warnings
from typing import TYPE_CHECKING

import numpy as np

from . import _check
from ._check import Floats
from .errors import ResolutionWarning
from .flavours import flavour_name, quark

if TYPE_CHECKING:
    from ._questions import Questions


def momentum(of: Questions, part: str) -> Floats:
    """Return the momentum of all flavours held, (scale, replica)."""
    _check.choice("part", part, ("total", "above"))
    above: Floats = (of._values @ of._grid.handle().moment_weights(1.0)).sum(axis=2)
    if part == "above":
        return above
    return _with_below("momentum", of, above, None if of._below is None else of._below.momentum)


def number(of: Questions, flavour: int | str, part: str) -> Floats:
    """Return the number of a quark, (scale, replica)."""
    _check.choice("part", part, ("total", "above"))
    which = quark(flavour)
    difference = of._combined(f"{flavour_name(which)}_v")
    above = difference @ of._grid.handle().moment_weights(0.0)
    if part == "above":
        return above
    name = f"number({which})"
    return _with_below(name, of, above, None if of._below is None else of._below.number[..., which - 1])


def _with_below(name: str, of: Questions, above: Floats, below: Floats | None) -> Floats:
    """Add what lies below x_min; where that is unknown, warn and leave it out everywhere."""
    if below is not None and not np.isnan(below).any():
        return above + below
    text = (
        f"{name}: above x_min = {_check.show(of._grid.x_min)} only; what lies below is not known: "
        'give below=, or ask for part="above"'
    )
    warnings.warn(text, ResolutionWarning, stacklevel=4)
    return above


def moment(of: Questions, flavour: int | str, N: float) -> Floats:
    """Return the integral of x^(N-1) f(x) above x_min, (scale, replica)."""
    # x^(N-1) f dx = x^(N-1) F dx/x, and |N| ln(1/x_min) must stay far from overflow
    power = _check.real("N", N, least=-20.0, most=200.0) - 1.0
    return of._combined(flavour) @ of._grid.handle().moment_weights(power)
