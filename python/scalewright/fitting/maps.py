"""Forward maps at other values of theory parameters, for fits in which alpha_s or a mass is free.

A fit asks for the map again where alpha_s has moved, and for its derivatives each time it is set up: what was
built last is kept, and each derivative is computed once.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from .. import _check
from .._check import Floats
from ..forward import ForwardMap, forward_map
from ..grid import ChebyshevGrid
from ..parameters import Coupling
from ..theory import Theory
from ._problem import THEORY

__all__ = ["KnownMap", "Maps", "theory_at"]


def theory_at(theory: Theory, at: Mapping[str, float]) -> Theory:
    """Return a theory with other parameters, thresholds where they were.

    Parameters
    ----------
    theory : Theory
    at : mapping
        "alpha_s", "charm" or "bottom" -> value, in GeV for masses.

    Returns
    -------
    Theory

    Raises
    ------
    InputError
        If a name is unknown, or a value is none that a theory can have.

    Examples
    --------
    >>> import scalewright as sw
    >>> moved = theory_at(sw.Theory(), {"alpha_s": 0.12})
    >>> moved.coupling.alpha_s, moved.threshold_scales == sw.Theory().threshold_scales
    (0.12, True)
    """
    if not at:
        return theory
    for name in at:
        _check.choice("parameter", name, THEORY)
    given = theory.coupling
    coupling = Coupling(at.get("alpha_s", given.alpha_s), q2=given.q2, nf=given.nf)
    moved: Any = {name: at[name] for name in ("charm", "bottom") if name in at}
    fixed = theory
    if moved:  # a threshold is a choice, and does not follow its mass
        fixed = replace(theory, threshold_mu2_ratio=1.0, thresholds_q2=theory.threshold_scales)
    return replace(fixed, coupling=coupling, masses=replace(theory.masses, **moved))


class KnownMap:
    """A forward map that remembers its derivatives.

    Parameters
    ----------
    fmap : ForwardMap
        All else is asked of it.
    """

    def __init__(self, fmap: ForwardMap) -> None:
        self._fmap = fmap
        self._derivatives: dict[str, Floats] = {}
        self.matrix, self.flavours, self.data = fmap.matrix, fmap.flavours, fmap.data
        self.start_q2, self.start_nf = fmap.start_q2, fmap.start_nf

    @property
    def grid(self) -> ChebyshevGrid:
        """Where x lives."""
        return self._fmap.grid

    @property
    def theory(self) -> Theory:
        """What was assumed."""
        return self._fmap.theory

    def derivative(self, parameter: str) -> Floats:
        """Return what `ForwardMap.derivative` gives, computed once."""
        if parameter not in self._derivatives:
            self._derivatives[parameter] = self._fmap.derivative(parameter)
        return self._derivatives[parameter]

    def __getattr__(self, name: str) -> Any:
        """Ask the map."""
        if name.startswith("__") or "_fmap" not in self.__dict__:
            raise AttributeError(name)
        return getattr(self._fmap, name)


class Maps:
    """Forward maps of one table of points, by values of theory parameters.

    Parameters
    ----------
    theory : Theory
        Where nothing else is asked for.
    grid : ChebyshevGrid
    options
        As for `forward_map`: start_q2, points, and what else it takes.

    Attributes
    ----------
    built : int
        How many maps were built.

    Examples
    --------
    >>> import scalewright as sw
    >>> from types import SimpleNamespace
    >>> rows = SimpleNamespace(x=[0.1, 0.3], q2=[10.0, 10.0], measure="F2", exchange="photon")
    >>> maps = Maps(sw.Theory(order="LO"), sw.ChebyshevGrid(x_min=1e-2), start_q2=2.0, points=rows)
    >>> maps().theory.coupling.alpha_s, maps({"alpha_s": 0.12}).theory.coupling.alpha_s, maps.built
    (0.118, 0.12, 2)
    """

    def __init__(self, theory: Theory, grid: ChebyshevGrid, **options: Any) -> None:
        self.theory, self.grid, self._options = theory, grid, options
        self.built = 0
        self._last: KnownMap | None = None

    def with_theory(self, theory: Theory) -> Maps:
        """Return maps of the same points for another theory.

        Parameters
        ----------
        theory : Theory

        Returns
        -------
        Maps
        """
        return Maps(theory, self.grid, **self._options)

    def __call__(self, at: Mapping[str, float] | None = None) -> KnownMap:
        """Return the map.

        Parameters
        ----------
        at : mapping, optional
            "alpha_s", "charm" or "bottom" -> value; by default those of the theory.

        Returns
        -------
        KnownMap

        Raises
        ------
        InputError, RangeError
            As `forward_map`.
        """
        wanted = theory_at(self.theory, at or {})
        if self._last is None or self._last.theory != wanted:
            self._last = KnownMap(forward_map(wanted, self.grid, **self._options))
            self.built += 1
        return self._last
