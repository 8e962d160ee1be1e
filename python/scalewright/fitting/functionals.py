"""Numbers by which fits are compared: alpha_s, the momentum of the gluon, u_v at one x; written as text.

============== ========================================================
alpha_s        a theory parameter: alpha_s, charm or bottom
momentum(g)    of a flavour or combination, the integral above x_min
u_v(0.3)       x f(x) at the start, of a flavour or combination at one x
============== ========================================================
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from .. import _check
from .._check import Floats
from ..densities import Densities
from ..flavours import combination
from ..theory import Theory
from ._problem import THEORY

if TYPE_CHECKING:
    from ._result import FitResult
    from .ensemble import Ensemble

__all__ = ["Functional", "default_functionals"]

_CALL = re.compile(r"(.+)\(([^()]+)\)")
_DEFAULT = ("momentum(g)", "momentum(sea)", "u_v(0.3)", "d_v(0.3)", "g(0.01)", "g(0.1)", "sea(0.01)")


@dataclass(frozen=True)
class Functional:
    """One number that follows from a fit.

    Parameters
    ----------
    text : str
        As in the table of the module.

    Raises
    ------
    InputError
        If the text is none of these.

    Examples
    --------
    >>> Functional("u_v(0.3)").flavour, Functional("u_v(0.3)").x
    ('u_v', 0.3)
    """

    text: str

    def __post_init__(self) -> None:
        if not isinstance(self.text, str):
            _check.refuse("functional", self.text, "must be text")
        if self.text in THEORY:
            return
        if _CALL.fullmatch(self.text) is None:
            forms = ", ".join((*THEORY, "momentum(g)", "u_v(0.3)"))
            _check.refuse("functional", self.text, f"must be of a form such as {forms}")
        combination(self.flavour, range(1, 7))
        if self.x is not None:
            _check.x_values(self.text, self.x)

    @property
    def parameter(self) -> str | None:
        """Name of a theory parameter, or None."""
        return self.text if self.text in THEORY else None

    @property
    def flavour(self) -> str:
        """The flavour or combination."""
        head, inside = self._parts
        return inside if head == "momentum" else head

    @property
    def x(self) -> float | None:
        """Where x f(x) is asked for, or None."""
        if self.parameter is not None:
            return None
        head, inside = self._parts
        if head == "momentum":
            return None
        try:
            return float(inside)
        except ValueError:
            _check.refuse("functional", self.text, f"{inside!r} is no number")

    @property
    def _parts(self) -> tuple[str, str]:
        found = _CALL.fullmatch(self.text)
        assert found is not None  # checked when it was made
        return found[1].strip(), found[2].strip()

    def of_densities(self, densities: Densities) -> Floats:
        """Return it for each replica of densities of one scale, (replica,)."""
        if self.x is None:
            return densities.moment(self.flavour, 2)
        return densities.at(None, self.x, self.flavour)

    def of_law(self, densities: Densities, theory: Theory) -> float:
        """Return it for one set of densities under a theory."""
        if self.parameter is None:
            return float(self.of_densities(densities)[0])
        of = theory.coupling if self.parameter == "alpha_s" else theory.masses
        return float(getattr(of, self.parameter))

    def of_fit(self, result: FitResult) -> tuple[float, float]:
        """Return value and uncertainty of a fit; the latter nan where there is no covariance."""
        if self.parameter is not None:
            return result.value(self.parameter), result.error(self.parameter)
        value = float(self.of_densities(result.densities)[0])
        if result.covariance is None:
            return value, np.nan
        return value, float(result.error_through(self.of_densities))

    def of_ensemble(self, ensemble: Ensemble) -> Floats:
        """Return it for each replica, (replica,)."""
        if self.parameter is not None:
            return ensemble.parameter(self.parameter)
        return self.of_densities(ensemble.densities)


def default_functionals(free: tuple[str, ...], x_min: float) -> tuple[Functional, ...]:
    """Return those that are looked at where none are named: what x_min allows, and theory parameters."""
    found = [Functional(text) for text in (*free, *_DEFAULT)]
    return tuple(one for one in found if one.parameter or one.x is None or one.x >= x_min)
