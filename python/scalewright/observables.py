"""Single questions: a structure function or cross section at some points, from densities at their scales.

Which one when: `structure_function` for a few values from densities that are evolved already; `forward_map`
for a table of points and many input densities. Both use the same rows.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from types import SimpleNamespace

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._check import Floats, show
from ._corrected.bound import Bound
from ._observed.carried import scale_groups, with_target
from ._observed.further import checked_further
from ._observed.point_rows import point_rows
from ._observed.points import Points
from ._observed.problem import INTRINSIC, Problem
from ._observed.pullback import flavour_rows
from ._route import SAME_SCALE
from .corrections import Correction
from .densities import Densities
from .electroweak import Electroweak
from .errors import InputError
from .kernels import CoefficientFunction
from .theory import Theory

__all__ = ["at_scale", "structure_function"]


def structure_function(
    measure: str,
    *,
    x: ArrayLike,
    q2: ArrayLike,
    densities: Densities,
    theory: Theory,
    current: str = "neutral",
    exchange: str | None = None,
    beam: str | None = None,
    polarisation: float = 0.0,
    target: object = "proton",
    tagged: str | None = None,
    y: ArrayLike | None = None,
    s: float | None = None,
    electroweak: Electroweak | None = None,
    target_mass: bool = False,
    subtraction: str = "damped",
    further: Mapping[str, Sequence[Mapping[str, CoefficientFunction]]] | None = None,
    corrections: Sequence[Correction] | Correction = (),
) -> Floats:
    """Return a structure function or cross section.

    Parameters
    ----------
    measure : str
        "F2", "FL", "F1", "xF3", "reduced_cross_section", "d2sigma_dx_dq2" (pb/GeV^2) or "d2sigma_dx_dy" (pb).
    x, q2 : array_like
        Bjorken x and Q^2 in GeV^2, of shapes that go together.
    densities : Densities
        Evolved, with a scale at each mu_f^2 = hard_muf2_ratio Q^2.
    theory : Theory
        Asked for here, since densities do not know with what coupling and order they were evolved.
    current : {"neutral", "charged"}
    exchange : {"photon", "photon+Z", "W"}, optional
        By default what the current allows.
    beam : {"e-", "e+", "nu", "nubar"}, optional
        Needed except for structure functions of photon exchange.
    polarisation : float
        Of the beam, in [-1, 1].
    target : str or {"z": int, "a": int}
        "proton", "neutron", "deuteron", "isoscalar" or a nucleus; per nucleon.
    tagged : {"charm", "bottom"}, optional
        The part where the current couples to that quark.
    y, s : array_like, float, optional
        For cross sections: inelasticity, or squared centre-of-mass energy in GeV^2.
    electroweak, target_mass, subtraction, further
        As for `forward_map`.
    corrections
        As for `ForwardMap.predict`.

    Returns
    -------
    ndarray, (replica, ...)
        The axes of x and q2 after that of the replicas.

    Raises
    ------
    InputError
        If an argument is wrong, or the densities have no such scale, another number of flavours, a flavour
        missing, or a heavy one below its threshold.
    RangeError
        If x lies below the grid, or the coupling is too large.

    Examples
    --------
    >>> import scalewright as sw
    >>> theory, grid = sw.Theory(order="NLO"), sw.ChebyshevGrid(x_min=1e-4)
    >>> shape = np.sqrt(grid.x) * (1 - grid.x) ** 3
    >>> start = sw.Densities(
    ...     grid, q2=2.0, nf=4, flavours=(21, 1, -1, 2, -2, 3, -3, 4, -4), values=np.tile(shape, (9, 1)))
    >>> evolved = sw.evolve(theory, start, [10.0, 100.0])
    >>> sw.structure_function(
    ...     "F2", x=[0.01, 0.1], q2=10.0, densities=evolved, theory=theory, exchange="photon").shape
    (1, 2)
    """
    if not isinstance(densities, Densities):
        _check.refuse("densities", densities, f"densities must be Densities, not {type(densities).__name__}")
    points, shape = _points(measure, x, q2, y, s, current, exchange, beam, polarisation, target, tagged)
    electroweak = Electroweak.effective() if electroweak is None else electroweak
    problem = Problem(
        theory, densities.grid, electroweak, points, target_mass, subtraction, checked_further(further)
    )
    scales, counts, group = scale_groups(problem)
    flavours = densities.flavours
    parts = []
    for place, (scale, nf) in enumerate(zip(scales.tolist(), counts.tolist(), strict=True)):
        members = np.flatnonzero(group == place)
        values = at_scale(densities, scale, nf)
        rows = flavour_rows(point_rows(problem, members, nf), flavours)
        rows = with_target(rows, points.protons[members], flavours)
        parts.append((members, np.einsum("pfn,rfn->rp", rows, values, optimize=True)))
    result = np.empty((parts[0][1].shape[0], len(points)))
    for members, values in parts:
        result[:, members] = values
    bound = Bound(corrections, SimpleNamespace(points=points, weights=problem.factors))
    return bound.corrected(result, bound.start).reshape(result.shape[0], *shape)


def _points(
    measure: str,
    x: ArrayLike,
    q2: ArrayLike,
    y: ArrayLike | None,
    s: float | None,
    current: str,
    exchange: str | None,
    beam: str | None,
    polarisation: float,
    target: object,
    tagged: str | None,
) -> tuple[Points, tuple[int, ...]]:
    """Return checked points and the shape of the answer."""
    given = [_check.real_array(name, value) for name, value in (("x", x), ("q2", q2))]
    given.append(np.asarray(np.nan) if y is None else _check.real_array("y", y))
    try:
        arrays = np.broadcast_arrays(*given)
    except ValueError:
        raise InputError(
            f"x, q2 and y have shapes {[a.shape for a in given]}: they must go together"
        ) from None
    if arrays[0].size == 0:
        raise InputError("x, q2, y: there must be at least one value")
    flat = [np.ravel(array) for array in arrays]
    rows = SimpleNamespace(
        x=flat[0],
        q2=flat[1],
        y=flat[2],
        s=np.nan if s is None else s,
        measure=measure,
        current=current,
        exchange=exchange,
        beam=beam,
        polarisation=polarisation,
        target=target,
        tagged=tagged,
    )
    return Points.of(rows), arrays[0].shape


def at_scale(densities: Densities, q2: float, nf: int) -> Floats:
    """Return the values at a scale, (replica, flavour, node), with every active flavour there."""
    scales, counts = np.atleast_1d(densities.q2), np.atleast_1d(densities.nf)
    near = np.abs(scales - q2) <= SAME_SCALE * q2
    if not near.any():
        held = _check.show_all(scales.tolist())
        raise InputError(
            f"densities.q2 = {held}: the points need mu_f^2 = {show(q2)} GeV^2: evolve them to it"
        )
    same = np.flatnonzero(near & (counts == nf))
    if same.size == 0:
        found = int(counts[np.flatnonzero(near)[0]])
        raise InputError(f"densities at {show(q2)} GeV^2 have nf = {found}: the points need nf = {nf}")
    missing = [f for f in (21, *range(1, nf + 1), *range(-nf, 0)) if f not in densities.flavours]
    if missing:
        raise InputError(f"densities have no flavour {_check.show_all(missing)}, active at nf = {nf}")
    values = densities.values if densities.values.ndim == 3 else densities.values[same[0]]
    for place, flavour in enumerate(densities.flavours):
        if flavour != 21 and abs(flavour) > nf and values[:, place].any():
            _check.refuse("densities.flavours", flavour, f"not active at nf = {nf} and not zero: {INTRINSIC}")
    return values
