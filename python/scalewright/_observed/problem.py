"""A table of points under a theory: what is asked, its scales and coupling, and what is refused."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from .. import _check
from .._check import Floats, Integers, show
from ..electroweak import Electroweak
from ..errors import InputError, RangeError
from ..grid import ChebyshevGrid
from ..theory import ORDERS, Theory
from .further import Further
from .light import HIGHEST
from .measures import FUNCTIONS, measure_weights
from .points import Points
from .rows import Setting

__all__ = ["INTRINSIC", "Problem"]

#: R. Ball et al., arXiv:1510.00009, has the parts that would be needed.
INTRINSIC = "an intrinsic heavy input is not implemented in structure functions"
#: alpha_s at mu_r^2 above which a series in it means nothing (common practice, no source).
_STRONG = 1.0
#: Highest power of a whose logarithms of mu_r and mu_f follow from the splitting functions known.
_LOGARITHMS = 3


@dataclass(frozen=True, eq=False)
class Problem:
    """What is asked: points, theory, grid, electroweak inputs and options.

    Parameters
    ----------
    theory : Theory
    grid : ChebyshevGrid
    electroweak : Electroweak
    points : Points
    target_mass : bool
        Whether target mass is kept.
    subtraction : {"damped", "chi", "plain"}
        How "matched" treats what is beyond massive near threshold.
    further : mapping
        Structure function -> coefficient functions of the user beyond the order of the theory.
    """

    theory: Theory
    grid: ChebyshevGrid
    electroweak: Electroweak
    points: Points
    target_mass: bool = False
    subtraction: str = "damped"
    further: Further = field(default_factory=dict)

    def __post_init__(self) -> None:
        for name, kind in (("theory", Theory), ("grid", ChebyshevGrid), ("electroweak", Electroweak)):
            given = getattr(self, name)
            if not isinstance(given, kind):
                _check.refuse(name, given, f"{name} must be a {kind.__name__}, not {type(given).__name__}")
        if not isinstance(self.target_mass, bool):
            _check.refuse("target_mass", self.target_mass, "target_mass must be True or False")
        _check.choice("subtraction", self.subtraction, ("damped", "chi", "plain"))
        if not self.theory.hard_mur2_ratio == self.theory.hard_muf2_ratio == 1.0:
            self.refuse_unknown_logarithms("hard_mur2_ratio and hard_muf2_ratio must be 1")
        self.points.refuse_outside(self.grid)
        self._refuse_unknown_orders()
        self._refuse_strong()

    @cached_property
    def groups(self) -> tuple[Floats, Integers, Integers]:
        """The distinct Q^2 in GeV^2, their numbers of flavours, and to which of them each point belongs.

        Tables come in bins of Q^2: what follows from a scale is computed once for each.
        """
        q2, group = np.unique(self.points.q2, return_inverse=True)
        return q2, self.theory.nf_at(q2 * self.theory.hard_muf2_ratio), group

    @cached_property
    def muf2(self) -> Floats:
        """mu_f^2 in GeV^2, (point,)."""
        return self.points.q2 * self.theory.hard_muf2_ratio

    @cached_property
    def nf(self) -> Integers:
        """Number of active flavours of densities, coupling and coefficients, (point,)."""
        _, nf, group = self.groups
        return nf[group]

    @cached_property
    def a(self) -> Floats:
        """a(mu_r) = alpha_s/(4 pi), (point,)."""
        q2, nf, group = self.groups
        alpha = self.theory.alpha_s(q2 * self.theory.hard_mur2_ratio, nf)
        return np.asarray(alpha / (4.0 * np.pi))[group]

    @cached_property
    def highest(self) -> dict[str, int]:
        """Structure function -> highest power of a of its light part."""
        order = ORDERS.index(self.theory.order)
        return {name: order + (name == "FL" and self.theory.fl_counting == "own") for name in FUNCTIONS}

    @cached_property
    def setting(self) -> Setting:
        """What the rows of all points share."""
        theory = self.theory
        return Setting(
            self.grid,
            self.electroweak,
            self.highest,
            theory.hard_mur2_ratio,
            theory.hard_muf2_ratio,
            self.further,
        )

    @cached_property
    def factors(self) -> Floats:
        """Weights of F2, FL and xF3 in what is measured, (point, 3)."""
        return measure_weights(self.points, self.electroweak, self.target_mass)

    def _refuse_unknown_orders(self) -> None:
        """Refuse FL at a^3 where a part of it is not known: beside photon exchange with three flavours."""
        if self.highest["FL"] < HIGHEST["FL"]:
            return
        needed = self.factors[:, FUNCTIONS.index("FL")] != 0.0
        bad = needed & ~(self.points.is_photon & (self.nf == 3))
        if bad.any():
            row = int(np.argmax(bad))
            raise InputError(
                f'{self.points.place[row]}: FL at a^3 (fl_counting="own" at NNLO) is known here for photon '
                f"exchange with nf = 3, and not for nf = {self.nf[row]} or other bosons"
            )

    def refuse_unknown_logarithms(self, allowed: str) -> None:
        """Refuse logarithms of scales where further orders need splitting functions that are not known."""
        for function, orders in self.further.items():
            power = self.highest[function] + len(orders)
            if orders and power > _LOGARITHMS:
                raise InputError(
                    f"further[{function!r}]: to a^{power}: beyond a^{_LOGARITHMS} logarithms are not "
                    f"known: {allowed}"
                )

    def _refuse_strong(self) -> None:
        """Refuse points whose coupling is too large for a series, or has no solution."""
        try:
            alpha = self.a * 4.0 * np.pi
        except RangeError as error:
            raise RangeError(f"{self._lowest()}: {error}") from None
        if (alpha > _STRONG).any():
            row = int(np.argmax(alpha > _STRONG))
            mur2 = self.points.q2[row] * self.theory.hard_mur2_ratio
            raise RangeError(
                f"{self.points.place[row]}: alpha_s = {alpha[row]:.4g} at mu_r^2 = {show(mur2)} GeV^2: "
                f"it must not exceed {show(_STRONG)}"
            )

    def _lowest(self) -> str:
        row = int(np.argmin(self.points.q2))
        return f"{self.points.place[row]}: q2 = {show(self.points.q2[row])}"
