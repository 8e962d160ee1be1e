"""One calculation done twice: by scalewright on a grid, and by the Mellin-space solution of `tests/mellin`.

Given the same kernels the two share nothing: the one has panels in ln(1/x), collocation in ln a and blocks of
flavours, the other complex moments, contours and Gauss collocation at each moment.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cache

import numpy as np
import scalewright as sw
from mellin import toy_input
from mellin.conftest import KernelFunctions
from mellin.inputs import Density
from mellin.solution import MellinSolution
from numpy.typing import NDArray
from scalewright.flavours import combination

Real = NDArray[np.float64]
ORDERS = ("LO", "NLO", "NNLO")

#: Name of a quantity in scalewright; its weights by PDG number are looked up there.
QUANTITIES = ("u_v", "d_v", "dbar - ubar", "dbar + ubar", "s+", "c+", "b+", "g")

#: Every x of the published tables.
PUBLISHED_X = np.array([1e-7, 1e-6, 1e-5, 1e-4, 1e-3, 0.01, 0.1, 0.3, 0.5, 0.7, 0.9])

#: A difference of flavours is a difference of floats that are stored: that of their sum, times 2^-53, is what
#: each of a few operations may lose.
STORED = 8 * 2.0**-53


class CompiledParts:
    """A compiled kernel in the form that the Mellin-space solution takes."""

    def __init__(self, evaluate) -> None:
        self._evaluate = evaluate
        half = np.array([0.5])
        constants = evaluate(half, half)
        self.plus, self.local = tuple(constants.plus.tolist()), constants.local

    def regular(self, z: Real, one_minus_z: Real) -> Real:
        """Return the regular part."""
        return self._evaluate(z, one_minus_z).regular


def _splitting(k: int, channel: str, nf: int) -> CompiledParts:
    return CompiledParts(
        lambda z, rest: sw.splitting_function(channel, z, order=ORDERS[k], nf=nf, one_minus_z=rest)
    )


def _matching(k: int, element: str, power: int, kind: str, form: str) -> CompiledParts:
    options = {"order": ORDERS[k], "power_of_log": power, "kind": kind, "heavy_gluon_element": form}
    return CompiledParts(lambda z, rest: sw.matching_element(element, z, one_minus_z=rest, **options))


#: The core's own kernels, point by point: only the numerics differ then.
COMPILED = KernelFunctions(_splitting, _matching)


@cache
def grid(resolution: str = "standard", x_min: float = 1e-7) -> sw.ChebyshevGrid:
    """Return a preset grid, made once."""
    return sw.ChebyshevGrid(x_min, resolution)


@dataclass(frozen=True)
class Case:
    """Settings of both calculations; the defaults are the published benchmark's, with the exact A_Hg.

    `ratio` is mu_thr^2/m^2 of every heavy quark, `kappa` mu_r^2/mu_f^2, `coupling` alpha_s, its scale and nf,
    that of the benchmark with nf of the start unless given.
    """

    order: int
    flavours: tuple[int, int] = (3, 5)
    start_nf: int | None = None
    start_q2: float = toy_input.START_Q2
    q2: float = toy_input.FINAL_Q2
    kappa: float = 1.0
    ratio: float = 1.0
    kind: str = "pole"
    masses: tuple[float, float, float] = toy_input.MASSES
    coupling: tuple[float, float, int] | None = None
    form: str = "exact"
    densities: Mapping[int, Density] = field(default_factory=lambda: toy_input.DENSITIES, hash=False)

    @property
    def first_nf(self) -> int:
        """Number of flavours at the start."""
        return self.flavours[0] if self.start_nf is None else self.start_nf

    @property
    def alpha_s(self) -> tuple[float, float, int]:
        """Coupling, its scale mu_r^2 and its number of flavours."""
        return self.coupling or (toy_input.ALPHA_S, toy_input.START_Q2, self.first_nf)

    def theory(self) -> sw.Theory:
        """Return the theory as scalewright takes it."""
        value, q2, nf = self.alpha_s
        return sw.Theory(
            order=ORDERS[self.order],
            coupling=sw.Coupling(value, q2=q2, nf=nf),
            masses=sw.QuarkMasses(*self.masses, kind=self.kind),
            flavours=self.flavours,
            threshold_mu2_ratio=self.ratio,
            evolution_mu2_ratio=self.kappa,
            heavy_gluon_element=self.form,
        )

    def start(self, on: sw.ChebyshevGrid) -> sw.Densities:
        """Return the input on a grid, all active flavours held."""
        active = [21, *(s * q for q in range(1, self.first_nf + 1) for s in (1, -1))]
        given = {f: self.densities.get(f, Density(())) for f in sorted({*active, *self.densities})}
        return sw.Densities.sample(on, q2=self.start_q2, nf=self.first_nf, functions=given)

    def heavy(self) -> tuple[int, ...]:
        """Return the heavy flavours that the input has."""
        return tuple(sorted({abs(f) for f in self.densities if f != 21 and abs(f) > self.first_nf}))

    def operators(self, on: sw.ChebyshevGrid, q2: Sequence[float] | None = None, **options) -> sw.Operators:
        """Build operators from the start to q2, by default that of the case."""
        scales = [self.q2] if q2 is None else list(q2)
        ends = {"start_q2": self.start_q2, "start_nf": self.first_nf, "intrinsic": self.heavy()}
        return sw.build_operators(self.theory(), on, q2=scales, **ends, **options)

    def exact(
        self, x: Real, q2: float | None = None, names: Sequence[str] = QUANTITIES, kernels=COMPILED, nf=None
    ) -> dict[str, Real]:
        """Return quantities by the Mellin-space solution."""
        value, at, count = self.alpha_s
        solution = MellinSolution(
            kernels,
            order=self.order,
            alpha_s=value,
            alpha_s_q2=at,
            alpha_s_nf=count,
            masses=self.masses,
            kind=self.kind,
            threshold_ratios=(self.ratio,) * 3,
            flavours=self.flavours,
            evolution_mu2_ratio=self.kappa,
            form=self.form,
        )
        return solution.evolve_combinations(
            {name: combination(name) for name in names},
            {f: density.moments for f, density in self.densities.items()},
            start_q2=self.start_q2,
            start_nf=self.first_nf,
            q2=self.q2 if q2 is None else q2,
            nf=nf,
            x=x,
        )


def active(names: Sequence[str], nf: int) -> list[str]:
    """Return the quantities that have a meaning with nf flavours."""
    return [name for name in names if nf >= max((f for f in combination(name) if f != 21), default=0)]


@cache
def _exact(case: Case, x: tuple[float, ...], q2: float, names: tuple[str, ...], nf: int) -> dict[str, Real]:
    return case.exact(np.array(x), q2, names, nf=nf)


def errors(
    case: Case, evolved: sw.Densities, x: Real, names: Sequence[str] = QUANTITIES, *, floored: bool = True
) -> dict[str, Real]:
    """Return errors of quantities at one scale against the Mellin-space solution.

    Relative to the value, or to that at LO where this is larger: beyond LO what is made from gluons or from
    other quarks alone (heavy quarks, a sea under a harder one) changes sign near x = 0.9, and relative to
    zero nothing has an accuracy. Not `floored`: to the value alone. What storing flavours as floats may cost
    a difference of them is taken off.
    """
    asked = tuple(active(names, int(evolved.nf)))
    given = tuple(x.tolist()), float(evolved.q2), asked, int(evolved.nf)
    exact, leading = _exact(case, *given), _exact(replace(case, order=0), *given)
    result = {}
    for name in asked:
        parts = [abs(weight * evolved.at(None, x, f)[0]) for f, weight in combination(name).items()]
        difference = np.abs(evolved.at(None, x, name)[0] - exact[name])
        size = np.maximum(np.abs(exact[name]), np.abs(leading[name]) if floored else 0.0)
        result[name] = np.maximum(difference - STORED * np.sum(parts, axis=0), 0.0) / size
    return result


def worst(found: Mapping[str, Real]) -> tuple[float, str, int]:
    """Return the largest error of all quantities, its quantity and the position of its x."""
    name = max(found, key=lambda name: float(np.max(found[name])))
    return float(np.max(found[name])), name, int(np.argmax(found[name]))
