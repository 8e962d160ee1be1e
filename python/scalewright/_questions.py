"""Questions that densities answer: values at any x, combinations, moments, sum rules, resolution.

The base of `Densities`, which adds the ways in and out.
"""

from __future__ import annotations

from typing import Any, Self

import numpy as np
from numpy.typing import ArrayLike

from . import _check, _resolution, _sums
from ._check import Floats, Integers
from .below import Below
from .errors import RangeError
from .flavours import combination, flavour_name
from .grid import ChebyshevGrid

#: Two scales within this relative distance are one: over it a density changes by less than 1e-12.
_SAME_Q2 = 1e-12


class Questions:
    """Densities as they are held; see `Densities`."""

    _grid: ChebyshevGrid
    _q2: Floats
    _nf: Integers
    _flavours: tuple[int, ...]
    _values: Floats
    _below: Below | None
    _one: bool

    def _fill(
        self,
        grid: ChebyshevGrid,
        q2: Floats,
        nf: Integers,
        flavours: tuple[int, ...],
        values: Floats,
        below: Below | None,
        one: bool,
    ) -> None:
        self._grid, self._q2, self._nf, self._flavours = grid, _frozen(q2), _frozen(nf), flavours
        self._values, self._below, self._one = _frozen(values), below, one

    @classmethod
    def _of(
        cls,
        grid: ChebyshevGrid,
        q2: Floats,
        nf: Integers,
        flavours: tuple[int, ...],
        values: Floats,
        below: Below | None,
        one: bool = False,
    ) -> Self:
        """Make densities from parts that are known to be right: four axes, C-ordered, finite."""
        made = cls.__new__(cls)
        made._fill(grid, q2, nf, flavours, values, below, one)
        return made

    @property
    def grid(self) -> ChebyshevGrid:
        """Where x lives."""
        return self._grid

    @property
    def q2(self) -> float | Floats:
        """mu_f^2 in GeV^2: a number, or an array (scale,)."""
        return float(self._q2[0]) if self._one else self._q2

    @property
    def nf(self) -> int | Integers:
        """Number of active flavours: a number, or an array (scale,)."""
        return int(self._nf[0]) if self._one else self._nf

    @property
    def flavours(self) -> tuple[int, ...]:
        """PDG numbers in the order of the flavour axis."""
        return self._flavours

    @property
    def values(self) -> Floats:
        """x f(x) at the nodes, (replica, flavour, node) or (scale, replica, flavour, node); read-only."""
        return self._values[0] if self._one else self._values

    @property
    def below(self) -> Below | None:
        """What lies below x_min, or None where that is unknown."""
        return self._below

    @property
    def scales(self) -> int:
        """Number of scales."""
        return int(self._values.shape[0])

    @property
    def replicas(self) -> int:
        """Number of replicas."""
        return int(self._values.shape[1])

    def at(
        self, q2: ArrayLike | None, x: ArrayLike, flavour: int | str, nf: ArrayLike | None = None
    ) -> Floats:
        """Return x f(x) of a flavour or a combination at scales at hand and any x.

        Parameters
        ----------
        q2 : float or array_like, (scale,), or None
            mu_f^2 in GeV^2, equal to scales at hand to 1e-12; None for the only one.
        x : array_like
            In [x_min, 1].
        flavour : int or str
            PDG number or name, such as 21, "u_v", "sea", "dbar - ubar"; see `scalewright.flavours`.
        nf : int or array_like of int, optional
            Picks between the two values on a threshold; by default the one above.

        Returns
        -------
        ndarray
            With the axes (scale) if `q2` is a list, (replica) always, and those of `x`.

        Raises
        ------
        InputError
            If the flavour is unknown or not held, or an `x` lies outside (0, 1].
        RangeError
            If a scale is not at hand or an `x` lies below `x_min`.
        """
        asked, indices = self._find(q2, nf)
        result = self._grid.interpolate(self._combined(flavour, indices), x)
        return result if asked else result[0]

    def scale(self, q2: float | None, nf: int | None = None) -> Self:
        """Return the densities of one scale at hand, without copying.

        Parameters
        ----------
        q2 : float or None
            mu_f^2 in GeV^2, equal to a scale at hand to 1e-12; None for the only one.
        nf : int, optional
            Picks between the two values on a threshold; by default the one above.

        Returns
        -------
        Densities
            Without the axis of scales.

        Raises
        ------
        InputError
            If `q2` is a list, or None where there are several scales.
        RangeError
            If the scale is not at hand.
        """
        if q2 is not None and not _check.is_one("q2", q2):
            _check.refuse("q2", q2, "q2 must be one number")
        _, indices = self._find(q2, nf)
        part = slice(indices[0], indices[0] + 1)
        known = None if self._below is None else self._below.scale(indices[0])
        return self._of(
            self._grid, self._q2[part], self._nf[part], self._flavours, self._values[part], known, True
        )

    def combination(self, name: int | str) -> Floats:
        """Return the nodal values of a flavour or a combination.

        Parameters
        ----------
        name : int or str
            PDG number or name, as for `at`.

        Returns
        -------
        ndarray, (replica, node) or (scale, replica, node)

        Raises
        ------
        InputError
            If the name is unknown, or a flavour in it is not held.
        """
        result = self._combined(name)
        return result[0] if self._one else result

    def momentum(self, part: str = "total") -> Floats:
        """Return the momentum of all flavours held: the integral of x f(x).

        Parameters
        ----------
        part : {"total", "above"}
            From x = 0, or from x_min.

        Returns
        -------
        ndarray, (replica,) or (scale, replica)

        Warns
        -----
        ResolutionWarning
            If the total is asked for and what lies below x_min is unknown: the answer is that above.
        """
        return self._shaped(_sums.momentum(self, part))

    def number(self, flavour: int | str, part: str = "total") -> Floats:
        """Return the number of a quark: the integral of q(x) - qbar(x).

        Parameters
        ----------
        flavour : int or str
            A quark: 1 to 6, "d" to "t".
        part : {"total", "above"}
            From x = 0, or from x_min.

        Returns
        -------
        ndarray, (replica,) or (scale, replica)

        Raises
        ------
        InputError
            If it is not a quark, or quark or antiquark are not held.

        Warns
        -----
        ResolutionWarning
            As `momentum`.
        """
        return self._shaped(_sums.number(self, flavour, part))

    def moment(self, flavour: int | str, N: float) -> Floats:
        """Return the integral of x^(N-1) f(x) above x_min: N = 2 is the momentum, N = 1 the number.

        Parameters
        ----------
        flavour : int or str
            As for `at`.
        N : float
            Any real number in [-20, 200].

        Returns
        -------
        ndarray, (replica,) or (scale, replica)

        Raises
        ------
        InputError
            If the flavour is unknown or not held, or `N` out of range.
        """
        return self._shaped(_sums.moment(self, flavour, N))

    def resolution(self) -> Floats:
        """Return an estimate of the interpolation error in each panel, from its Chebyshev coefficients.

        It errs on the safe side: the true error is mostly 10 to 100 times smaller.

        Returns
        -------
        ndarray, (replica, flavour, panel) or (scale, replica, flavour, panel)
            In parts of the largest value of the density in that panel; 0 where it vanishes.
        """
        return self._shaped(_resolution.estimated(self))

    def _shaped(self, result: Floats) -> Floats:
        """Drop the axis of scales where there is no list of them."""
        return result[0] if self._one else result

    def _combined(self, name: int | str, indices: list[int] | None = None) -> Floats:
        """Return the nodal values of a combination at some or all scales, (scale, replica, node)."""
        held = {abs(number) for number in self._flavours if number != 21}
        weights = combination(name, sorted(held | set(range(1, int(self._nf.max()) + 1))))
        missing = [number for number in weights if number not in self._flavours]
        if missing:
            names = ", ".join(flavour_name(number) for number in missing)
            have = ", ".join(flavour_name(number) for number in self._flavours)
            _check.refuse("flavour", name, f"these densities do not hold {names}, only {have}")
        scales = self.scales if indices is None else len(indices)
        result = np.zeros((scales, self.replicas, self._grid.nodes))
        for number, weight in weights.items():
            held_values = self._values[:, :, self._flavours.index(number)]
            result += weight * (held_values if indices is None else held_values[indices])
        return result

    def _find(self, q2: ArrayLike | None, nf: ArrayLike | None) -> tuple[bool, list[int]]:
        """Return whether a list was asked for, and the positions of the scales."""
        if q2 is None:
            if self.scales != 1:
                _check.refuse("q2", q2, f"q2 must be given: there are {self.scales} scales")
            q2 = float(self._q2[0])
        many = not _check.is_one("q2", q2)
        asked = _check.scales("q2", q2)
        counts = None if nf is None else _check.flavour_counts("nf", nf, asked.size)
        return many, [
            self._position(i if many else None, float(asked[i]), None if counts is None else int(counts[i]))
            for i in range(asked.size)
        ]

    def _position(self, index: int | None, q2: float, nf: int | None) -> int:
        """Return the position of one scale: the highest nf at hand unless one is named."""
        near = np.flatnonzero(abs(self._q2 - q2) <= _SAME_Q2 * q2)
        if not near.size:
            have = _check.show_all(self._q2)
            cure = "operators serve any scale of their range: apply(densities, q2=...)"
            _check.refuse(
                "q2", q2, f"not among the scales at hand, {have} GeV^2; {cure}", index=index, error=RangeError
            )
        counts = self._nf[near]
        if nf is None:
            return int(near[np.argmax(counts)])
        if nf not in counts:
            have = _check.show_all(counts)
            _check.refuse(
                "nf", nf, f"at q2 = {_check.show(q2)} GeV^2 nf is {have}", index=index, error=RangeError
            )
        return int(near[np.argmax(counts == nf)])


def _frozen(array: np.ndarray[Any, Any]) -> Any:
    """Return a read-only view; the array itself stays as it is."""
    view = array.view()
    view.flags.writeable = False
    return view
