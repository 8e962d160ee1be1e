"""Densities in, densities out: what fits, where the result goes, what flows below x_min."""

from __future__ import annotations

import math
import os
from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from . import _check, _flows
from ._check import Floats, Integers, refuse, show
from ._route import SAME_SCALE, Route, Source
from .below import Below
from .densities import Densities
from .errors import InputError
from .grid import ChebyshevGrid
from .theory import Theory

#: Bytes of results that a stream makes at once: combinations of flavours are formed once for as many scales.
PART = 130_000_000


def thread_count(threads: int | None) -> int:
    """Return the number of threads to use, 0 for all processors.

    Parameters
    ----------
    threads : int or None
        None for the environment's SCALEWRIGHT_THREADS, or all processors where that is not set.

    Raises
    ------
    InputError
        If it is not a whole number from 1 to 4096.
    """
    if threads is not None:
        return _check.whole("threads", threads, least=1, most=4096)
    said = os.environ.get("SCALEWRIGHT_THREADS", "").strip()
    if not said:
        return 0
    if not said.isdecimal():
        refuse("SCALEWRIGHT_THREADS", said, "the environment variable must be a whole number")
    return _check.whole("SCALEWRIGHT_THREADS", int(said), least=1, most=4096)


def matched(densities: object, grid: ChebyshevGrid, route: Route, missing: str) -> Floats:
    """Return the values of an input, (replica, flavour, node), with the flavours that the route allows.

    Parameters
    ----------
    densities : Densities
        Of one scale, the start of the route, on the grid.
    grid : ChebyshevGrid
        Grid of the operators.
    route : Route
        Start, and flavours allowed.
    missing : {"error", "zero"}
        What an active flavour is that `densities` does not have.

    Raises
    ------
    InputError
        If something does not fit.
    """
    _check.choice("missing", missing, ("error", "zero"))
    if not isinstance(densities, Densities):
        refuse("densities", densities, f"densities must be Densities, not {type(densities).__name__}")
    if densities.grid != grid:
        raise InputError(f"densities.grid = {densities.grid!r}: the operators are for {grid!r}")
    if densities.scales != 1:
        allowed = f"the operators start from one, {show(route.start_q2)} GeV^2; pick it with .scale(q2)"
        raise InputError(f"densities have {densities.scales} scales: {allowed}")
    q2, nf = float(np.ravel(densities.q2)[0]), int(np.ravel(densities.nf)[0])
    if abs(q2 - route.start_q2) > SAME_SCALE * route.start_q2:
        refuse("densities.q2", q2, f"the operators start from {show(route.start_q2)} GeV^2")
    if nf != route.start_nf:
        refuse("densities.nf", nf, f"the operators start from nf = {route.start_nf}")
    return _picked(densities, route, missing)


def _picked(densities: Densities, route: Route, missing: str) -> Floats:
    """Return the values of the allowed flavours in their order; a copy only where the order differs."""
    values = densities.values.reshape(-1, *densities.values.shape[-2:])
    held = {flavour: place for place, flavour in enumerate(densities.flavours)}
    for flavour, place in held.items():
        if flavour not in route.allowed and values[:, place].any():
            cure = f"start at a larger nf, or build with intrinsic=({abs(flavour)},)"
            refuse("densities.flavours", flavour, f"not active at nf = {route.start_nf} and not zero: {cure}")
    absent = [flavour for flavour in route.active if flavour not in held]
    if absent and missing == "error":
        cure = 'give them, or allow missing="zero"'
        raise InputError(
            f"densities have no flavour {_check.show_all(absent)}, active at nf = {route.start_nf}: {cure}"
        )
    if tuple(densities.flavours) == route.allowed:
        return np.require(values, requirements=("C", "A"))
    picked = np.zeros((values.shape[0], len(route.allowed), values.shape[2]))
    for place, flavour in enumerate(route.allowed):
        if flavour in held:
            picked[:, place] = values[:, held[flavour]]
    return picked


def asked_scales(
    theory: Theory, route: Route, source: Source, q2: ArrayLike | None, nf: ArrayLike | None
) -> tuple[Floats, Integers]:
    """Return scales and numbers of flavours that the source serves; those of the route where `q2` is None."""
    if q2 is None:
        if nf is not None:
            raise InputError("nf: give q2 with it; without q2 all scales of the set are meant")
        return route.q2, route.nf
    asked = _check.scales("q2", q2)
    counts = theory.nf_at(asked) if nf is None else _check.flavour_counts("nf", nf, asked.size)
    _check.distinct_scales("q2", asked, counts)
    source.refuse(asked, counts)
    return asked, counts


def place(out: object, shape: tuple[int, ...], given: Floats) -> Floats:
    """Return the array to write to: a new one, or `out` if it fits.

    Parameters
    ----------
    out : ndarray or None
        What the user gave.
    shape : tuple of int
        (scale, replica, flavour, node).
    given : ndarray
        The input, which must not be overwritten.

    Raises
    ------
    InputError
        If `out` does not fit or shares memory with the input.
    """
    if out is None:
        return np.empty(shape)
    if not isinstance(out, np.ndarray):
        refuse("out", out, f"out must be an array, not {type(out).__name__}")
    if out.shape != shape:
        refuse("out", out, f"out must have the shape {shape} (scale, replica, flavour, node)")
    if out.dtype != np.float64 or not out.dtype.isnative:
        refuse("out", out, "out must hold float64")
    if not out.flags.c_contiguous or not out.flags.writeable or not out.flags.aligned:
        refuse("out", out, "out must be C-ordered, aligned and writeable")
    if np.may_share_memory(out, given):
        refuse("out", out, "out must not share memory with densities.values")
    return out


@dataclass(frozen=True, eq=False)
class Task:
    """One application, every argument checked.

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    route : Route
        Start, and flavours allowed.
    source : Source
        Where blocks and flows come from.
    given : ndarray, (replica, flavour, node)
        The input, with the flavours that the route allows.
    before : Below or None
        What lay below x_min at the start; None if that is unknown.
    q2, nf : ndarray, (scale,)
        Where to.
    made : tuple of int
        PDG numbers of the output.
    threads : int
        0 for all processors.
    """

    grid: ChebyshevGrid
    route: Route
    source: Source
    given: Floats
    before: Below | None
    q2: Floats
    nf: Integers
    made: tuple[int, ...]
    threads: int

    def parts(self, out: Floats | None) -> list[tuple[Task, Floats | None]]:
        """Return parts of a few scales, each with its place: as many as `out` holds, or `PART` bytes."""
        shape = (self.given.shape[0], len(self.made), self.grid.nodes)
        if out is None:
            together = max(1, PART // max(8 * math.prod(shape), 1))
        else:
            together = np.shape(out)[0] if np.ndim(out) == 4 else 0
            place(out, (max(together, 1), *shape), self.given)
        parts: list[tuple[Task, Floats | None]] = []
        for first in range(0, self.q2.size, together):
            part = slice(first, first + together)
            task = replace(self, q2=self.q2[part], nf=self.nf[part])
            parts.append((task, None if out is None else out[: task.q2.size]))
        return parts

    def run_apart(self, out: Floats | None) -> Iterator[Densities]:
        """Apply, and return the result scale by scale."""
        result = self.run(out)
        return (result.scale(q2, nf) for q2, nf in zip(self.q2.tolist(), self.nf.tolist(), strict=True))

    def run(self, out: object = None, at_hand: tuple[Floats, Floats] | None = None) -> Densities:
        """Apply; `at_hand` are blocks and flows of the task, if they are."""
        from . import _core

        shape = (self.q2.size, self.given.shape[0], len(self.made), self.grid.nodes)
        values = place(out, shape, self.given)
        blocks, flows = at_hand or self.source.at(self.q2, self.nf, self.threads)
        _core.apply(
            names=self.source.names,
            light=self.source.light,
            values=blocks,
            densities=self.given,
            in_flavours=np.asarray(self.route.allowed),
            out_flavours=np.asarray(self.made),
            out=values,
            threads=self.threads,
        )
        under = self.below(flows)
        return Densities(self.grid, q2=self.q2, nf=self.nf, flavours=self.made, values=values, below=under)

    def below(self, flows: Floats) -> Below | None:
        """Return what lies below x_min afterwards: what lay there, and what has flowed there since."""
        if self.before is None:
            return None
        rows = dict(zip(self.source.flow_names, np.moveaxis(flows, 1, 0), strict=True))
        light = self.source.light
        combined = _flows.Input(self.given, self.route.allowed, light)
        momentum = self.before.momentum + _flows.momentum(rows, combined)
        numbers = np.repeat(self.before.number, self.nf.size, axis=0)
        for quark in range(1, max(self.made_of) + 1):
            numbers[:, :, quark - 1] += _flows.number(rows, combined, quark, light)
        return Below(momentum, numbers)

    @property
    def made_of(self) -> list[int]:
        """The quarks that can be there."""
        return [abs(flavour) for flavour in self.route.made(self.nf) if flavour != 21]
