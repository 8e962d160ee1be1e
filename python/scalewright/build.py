"""Operators from a theory and a grid; and densities evolved without operators.

Which one when: `build_operators` if more than a few densities will be evolved from one scale, `evolve` for
one or a few.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._carry import matched, thread_count
from ._check import Floats, Integers, refuse
from ._progress import Progress, watcher
from ._route import Live, Route
from .below import Below
from .densities import Densities
from .grid import ChebyshevGrid
from .kernels import CHANNELS, SplittingKernel
from .operators import Operators
from .theory import ORDERS, Theory

__all__ = ["build_operators", "evolve"]

Further: TypeAlias = Sequence[Mapping[str, SplittingKernel]]

# Relative error allowed to the steps in scale, as the core estimates it on smooth densities: well below what
# each resolution of the grid promises.
_TOLERANCE = {"standard": 1e-8, "fine": 1e-10}


def build_operators(
    theory: Theory,
    grid: ChebyshevGrid,
    *,
    start_q2: float,
    q2: ArrayLike,
    start_nf: int | None = None,
    nf: ArrayLike | None = None,
    intrinsic: Sequence[int] = (),
    tolerance: float | None = None,
    threads: int | None = None,
    further_orders: Further = (),
    progress: Progress = None,
) -> Operators:
    """Build what carries x f(x) from one scale to others.

    Parameters
    ----------
    theory : Theory
        Order, coupling, masses, flavours.
    grid : ChebyshevGrid
        Where x lives.
    start_q2 : float
        Scale of the input in GeV^2.
    q2 : array_like, (scale,)
        Scales of the output in GeV^2, in any order, above or below the start.
    start_nf : int, optional
        Number of flavours of the input; by default that of the theory at `start_q2`, a scale on a threshold
        counting as above it. A smaller one makes the route go down to that threshold first.
    nf : int or array_like of int, (scale,), optional
        Numbers of flavours of the output; by default those of the theory.
    intrinsic : sequence of int
        Heavy flavours, 4 to 6 and above `start_nf`, that the input may have.
    tolerance : float, optional
        Relative error allowed to the steps in scale; by default 1e-8, and 1e-10 on a fine grid.
    threads : int, optional
        By default the environment's SCALEWRIGHT_THREADS, or all processors. The bits do not depend on it.
    further_orders : sequence of mappings
        Splitting functions of your own beyond the order of the theory, one mapping an order: channel ("ns+",
        "ns-", "ns-sea", "pure singlet", "qg", "gq", "gg") to `SplittingKernel`.
    progress : bool or callable, optional
        True for a line on a terminal, or a callable of (done, total).

    Returns
    -------
    Operators
        A live set: it serves any scale between the lowest and the highest.

    Raises
    ------
    InputError
        If an argument is wrong or does not fit the others.
    RangeError
        If the coupling has no solution at one of the scales.

    Notes
    -----
    The "exact" solution: d f/d ln a = -(P0 + a P1 + ...)/(beta0 + beta1 a + ...) f, nothing expanded.

    Examples
    --------
    >>> import scalewright as sw
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> ops = sw.build_operators(sw.Theory(order="NLO"), grid, start_q2=1.5, start_nf=3, q2=[10.0, 1e4])
    >>> ops.nf
    array([4, 5])
    """
    from . import _core

    _check_kinds(theory, grid)
    route = _route(theory, start_q2, start_nf, q2, nf, intrinsic)
    evolution = _core.build(
        theory.handle(),
        grid.handle(),
        start_q2=route.start_q2,
        start_nf=route.start_nf,
        q2=route.q2,
        nf=route.nf,
        intrinsic=route.intrinsic,
        tolerance=_tolerance(tolerance, grid),
        threads=thread_count(threads),
        further=_further(further_orders, theory, grid, route),
        progress=watcher(progress, "building operators"),
    )
    return Operators(theory, grid, route, Live(evolution))


def evolve(
    theory: Theory,
    densities: Densities,
    q2: ArrayLike,
    nf: ArrayLike | None = None,
    *,
    flavours: ArrayLike | None = None,
    tolerance: float | None = None,
    threads: int | None = None,
    missing: str = "error",
) -> Densities:
    """Carry a few densities to other scales without building operators.

    Parameters
    ----------
    theory : Theory
        Order, coupling, masses, flavours.
    densities : Densities
        Of one scale, which is the start. Heavy flavours above its nf that are not zero are taken as
        intrinsic.
    q2 : array_like, (scale,)
        Scales of the output in GeV^2.
    nf : int or array_like of int, (scale,), optional
        Their numbers of flavours; by default those of the theory.
    flavours : sequence of int, optional
        PDG numbers of the output; by default gluon, quarks and antiquarks up to the largest `nf`.
    tolerance, threads
        As for `build_operators`.
    missing : {"error", "zero"}
        What an active flavour is that `densities` does not have.

    Returns
    -------
    Densities
        Values (scale, replica, flavour, node), and what lies below x_min where that is known of `densities`.

    Raises
    ------
    InputError, RangeError
        As for `build_operators` and `Operators.apply`.

    Examples
    --------
    >>> import scalewright as sw
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> start = sw.Densities.sample(grid, q2=2.0, nf=4, functions={21: lambda x: x**-0.1 * (1 - x) ** 5})
    >>> evolved = sw.evolve(sw.Theory(order="LO"), start, q2=[10.0, 1e4], missing="zero")
    >>> evolved.values.shape == (2, 1, 11, grid.nodes)
    True
    """
    from . import _core

    if not isinstance(densities, Densities):
        refuse("densities", densities, f"densities must be Densities, not {type(densities).__name__}")
    _check_kinds(theory, densities.grid)
    start_q2, start_nf = float(np.ravel(densities.q2)[0]), int(np.ravel(densities.nf)[0])
    route = _route(theory, start_q2, start_nf, q2, nf, _heavy(densities, start_nf))
    given = matched(densities, densities.grid, route, missing)
    made = route.made(route.nf) if flavours is None else _check.partons("flavours", flavours)
    values, momentum, number = _core.evolve(
        theory.handle(),
        densities.grid.handle(),
        start_q2=route.start_q2,
        start_nf=route.start_nf,
        densities=given,
        in_flavours=np.asarray(route.allowed),
        q2=route.q2,
        nf=route.nf,
        out_flavours=np.asarray(made),
        tolerance=_tolerance(tolerance, densities.grid),
        threads=thread_count(threads),
    )
    before = densities.below
    under = None if before is None else Below(before.momentum + momentum, before.number + number)
    return Densities(densities.grid, q2=route.q2, nf=route.nf, flavours=made, values=values, below=under)


def _check_kinds(theory: object, grid: object) -> None:
    if not isinstance(theory, Theory):
        refuse("theory", theory, f"theory must be a Theory, not {type(theory).__name__}")
    if not isinstance(grid, ChebyshevGrid):
        refuse("grid", grid, f"grid must be a ChebyshevGrid, not {type(grid).__name__}")


def _route(
    theory: Theory,
    start_q2: object,
    start_nf: int | None,
    q2: ArrayLike,
    nf: ArrayLike | None,
    intrinsic: Sequence[int],
) -> Route:
    """Return start and end, checked."""
    start = _check.scale("start_q2", start_q2)
    asked = _check.scales("q2", q2).copy()
    count = theory.start_nf(start) if start_nf is None else _check.flavour_count("start_nf", start_nf)
    if not theory.fewest <= count <= theory.most:
        refuse("start_nf", count, f"the theory has {theory.fewest} to {theory.most} flavours")
    counts = theory.nf_at(asked) if nf is None else _check.flavour_counts("nf", nf, asked.size)
    outside = (counts < theory.fewest) | (counts > theory.most)
    _check.refuse_where("nf", counts, outside, f"the theory has {theory.fewest} to {theory.most} flavours")
    _check.distinct_scales("q2", asked, counts)
    return Route(start, count, _intrinsic(intrinsic, count), asked, np.array(counts))


def _intrinsic(given: Sequence[int], start_nf: int) -> tuple[int, ...]:
    """Return the heavy flavours that an input may have, rising."""
    flavours: Integers = _check.whole_array("intrinsic", given, ndim=1)
    least = max(4, start_nf + 1)
    allowed = f"intrinsic must be heavy flavours from {least} to 6" if least <= 6 else "no flavour is left"
    _check.refuse_where("intrinsic", flavours, (flavours < least) | (flavours > 6), allowed)
    return tuple(sorted(set(flavours.tolist())))


def _heavy(densities: Densities, nf: int) -> tuple[int, ...]:
    """Return the heavy flavours above `nf` that densities have and that are not zero."""
    held = enumerate(densities.flavours)
    heavy = {abs(f) for i, f in held if f != 21 and abs(f) > nf and densities.values[..., i, :].any()}
    return tuple(sorted(heavy))


def _tolerance(tolerance: float | None, grid: ChebyshevGrid) -> float:
    if tolerance is not None:
        return _check.real("tolerance", tolerance, least=1e-14, most=1e-2)
    fine = ChebyshevGrid(min(max(grid.x_min, 1e-12), 0.1), "fine")
    return _TOLERANCE["fine" if grid.nodes >= fine.nodes else "standard"]


def _further(
    orders: Further, theory: Theory, grid: ChebyshevGrid, route: Route
) -> list[tuple[int, int, str, Floats, Floats, float]]:
    """Evaluate the user's splitting functions where the convolution wants them."""
    if not orders:
        return []
    z = grid.handle().quadrature_z()
    counts = range(min(int(route.nf.min()), route.start_nf), max(int(route.nf.max()), route.start_nf) + 1)
    made = []
    for place, channels in enumerate(orders):
        if not isinstance(channels, Mapping):
            refuse("further_orders", channels, "must be a mapping of channel to SplittingKernel", index=place)
        for channel, kernel in channels.items():
            where = f"further_orders[{place}]"
            _check.choice(where, channel, CHANNELS)
            if not isinstance(kernel, SplittingKernel):
                refuse(f"{where}[{channel!r}]", kernel, "must be a SplittingKernel")
            for nf in counts:
                regular, plus, local = kernel.evaluate(z, nf)
                made.append((ORDERS.index(theory.order) + 1 + place, nf, channel, regular, plus, local))
    return made
