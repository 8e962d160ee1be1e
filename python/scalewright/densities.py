"""x f(x) on a grid, for one scale or for many: values, questions, and ways in and out.

Axes are (scale, replica, flavour, node); the axis of scales is there only where there is a list of scales.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from . import _check, _nodal, _resolution, _stored_densities, below as _below
from ._check import Floats, Integers
from ._display import brief, brief_all, count, screen, table
from ._questions import Questions
from .below import Below
from .files.csv import Lattice, read_lattice, write_lattice
from .files.whole import PathLike
from .flavours import flavour_name
from .grid import ChebyshevGrid

__all__ = ["Below", "Densities"]


class Densities(Questions):
    """x f(x) on a grid, with its scale and number of flavours.

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    q2 : float or array_like, (scale,)
        mu_f^2 in GeV^2.
    nf : int or array_like of int, (scale,)
        Number of active flavours, 3 to 6, of each scale.
    flavours : sequence of int
        PDG numbers, in the order of the flavour axis.
    values : array_like
        (replica, flavour, node), or (flavour, node) for one replica; (scale, replica, flavour, node) where
        `q2` is a list. An array of C-ordered float64 is not copied: it must not be changed afterwards.
    below : Below, optional
        What lies below x_min; unknown if None.

    Raises
    ------
    InputError
        If a shape does not fit, a value is not finite, or a scale, flavour or number of flavours is wrong.

    Examples
    --------
    >>> grid = ChebyshevGrid(x_min=1e-5)
    >>> one = Densities.sample(grid, q2=2.0, nf=3, functions={
    ...     21: lambda x: 3.0 * x**-0.1 * (1 - x) ** 5,
    ...     2: lambda x: 2.0 * x**0.5 * (1 - x) ** 3,
    ...     -2: lambda x: 0.1 * x**-0.1 * (1 - x) ** 7})
    >>> one.values.shape == (1, 3, grid.nodes)
    True
    >>> one.at(2.0, [0.1, 0.5], "u_v").shape
    (1, 2)
    """

    def __init__(
        self,
        grid: ChebyshevGrid,
        *,
        q2: ArrayLike,
        nf: ArrayLike,
        flavours: ArrayLike,
        values: ArrayLike,
        below: Below | None = None,
    ) -> None:
        _check_grid(grid)
        numbers = _check.partons("flavours", flavours)
        one, scales, counts = _check_scales(q2, nf)
        array = _check.real_array("values", values)
        lead = ("replica",) if one else ("scale", "replica")
        if one and array.ndim == 2:
            array = array[np.newaxis]
        expected = (*(() if one else (scales.size,)), None, len(numbers), grid.nodes)
        fits = array.ndim == len(expected) and all(
            want in (None, has) for want, has in zip(expected, array.shape, strict=True)
        )
        if not fits:
            of = "one q2" if one else "a list of q2"
            words = ", ".join((*lead, "flavour", "node"))
            want = ", ".join("any" if n is None else str(n) for n in expected)
            _check.refuse("values", array, f"the axes must be ({words}) = ({want}) for {of}")
        array = array[np.newaxis] if one else array
        known = _below.check(below, array.shape[0], array.shape[1])
        self._fill(grid, scales, counts, numbers, array, known, one)

    # ---- ways in ---------------------------------------------------------------------------------------

    @classmethod
    def sample(
        cls,
        grid: ChebyshevGrid,
        q2: float,
        nf: int,
        functions: Mapping[int, Callable[[Floats], ArrayLike]],
    ) -> Densities:
        """Make densities of one scale and one replica from one function for each flavour.

        Parameters
        ----------
        grid : ChebyshevGrid
            Where to sample.
        q2 : float
            mu_f^2 in GeV^2.
        nf : int
            Number of active flavours, 3 to 6.
        functions : mapping
            PDG number -> function of an array x, (n,), that returns x f(x), (n,), or one number for all. What
            lies below x_min is integrated from the functions, down to x = 1e-300 if need be.

        Returns
        -------
        Densities

        Raises
        ------
        InputError
            If a function raises, or returns another shape or values that are not finite.

        Warns
        -----
        ResolutionWarning
            If interpolation misses a function at x <= 0.9 by more than 1e-6 of its largest value in a panel.
        """
        if not isinstance(functions, Mapping):
            _check.refuse(
                "functions",
                functions,
                f"must map PDG numbers to functions, and is a {type(functions).__name__}",
            )
        flavours = _check.partons("functions", list(functions))
        for flavour, function in zip(flavours, functions.values(), strict=True):
            _check.function(f"functions[{flavour}]", function)
        checked = {
            flavour: _nodal.checked(f"functions[{flavour}]", function)
            for flavour, function in zip(flavours, functions.values(), strict=True)
        }
        return cls._sampled(grid, _check.scale("q2", q2), nf, [checked], flavours)

    @classmethod
    def from_function(
        cls,
        f: Callable[[int, Floats, float], ArrayLike],
        grid: ChebyshevGrid,
        q2: ArrayLike,
        nf: ArrayLike,
        flavours: ArrayLike,
    ) -> Densities:
        """Make densities of one replica from one function of flavour, x and scale.

        Parameters
        ----------
        f : callable
            ``f(flavour, x, q2)`` with a PDG number, an array x (n,) and a number q2, returning x f(x), (n,).
        grid : ChebyshevGrid
            Where to sample.
        q2, nf : float and int, or array_like, (scale,)
            mu_f^2 in GeV^2 and number of active flavours, 3 to 6.
        flavours : sequence of int
            PDG numbers.

        Returns
        -------
        Densities

        Raises
        ------
        InputError
            If `f` raises, or returns another shape or values that are not finite.

        Warns
        -----
        ResolutionWarning
            As `sample`.
        """
        _check.function("f", f)
        numbers = _check.partons("flavours", flavours)
        _, scales, _ = _check_scales(q2, nf)

        def of(flavour: int, scale: float) -> Callable[[Floats], Floats]:
            name = f"f at flavour = {flavour}, q2 = {_check.show(scale)}"
            return _nodal.checked(name, lambda x: f(flavour, x, scale))

        return cls._sampled(grid, q2, nf, [{n: of(n, s) for n in numbers} for s in scales.tolist()], numbers)

    @classmethod
    def _sampled(
        cls,
        grid: ChebyshevGrid,
        q2: ArrayLike,
        nf: ArrayLike,
        functions: Sequence[Mapping[int, Callable[[Floats], Floats]]],
        flavours: tuple[int, ...],
    ) -> Densities:
        """Sample checked functions, one mapping a scale, and say where the grid is too coarse for them."""
        _check_grid(grid)
        one, scales, counts = _check_scales(q2, nf)
        parts = [_nodal.sampled(grid, of_scale) for of_scale in functions]
        values = np.stack([part[0] for part in parts])[:, np.newaxis]
        known = _nodal.joined([part[1] for part in parts])
        made = cls._of(grid, scales, counts, flavours, np.ascontiguousarray(values), known, one)
        errors = np.stack([part[2] for part in parts])[:, np.newaxis]
        _resolution.warn_where_measured(made, errors, depth=2)
        return made

    @classmethod
    def from_csv(cls, path: PathLike, grid: ChebyshevGrid, *, interpolate: bool = False) -> Densities:
        """Read densities from a table; its columns are told in `scalewright.files.csv`.

        Parameters
        ----------
        path : path-like
            A table with the columns q2, nf, x, flavour, replica, value, full in all combinations.
        grid : ChebyshevGrid
            The grid of the result. Where the x of the table are its nodes, values are taken as they are.
        interpolate : bool
            Whether other x may be interpolated, by a natural cubic spline in ln x through all points and
            through 0 at x = 1.

        Returns
        -------
        Densities
            With an axis of scales, rising, if the table has more than one; replicas in the order of their
            numbers.

        Raises
        ------
        StoreError
            If the file cannot be read.
        InputError
            If an entry is wrong, double or missing, or the x are not the nodes and `interpolate` is false.
        RangeError
            If the grid reaches below the smallest x of the table.

        Warns
        -----
        ResolutionWarning
            If `resolution` estimates an error above 1e-4.
        """
        _check_grid(grid)
        read = read_lattice(path)
        values = _nodal.on_nodes(str(path), read.x, read.values, grid, interpolate)
        made = cls._of(grid, read.q2, read.nf, read.flavours, values, None, read.q2.size == 1)
        _resolution.warn_where_estimated(made, depth=1)
        return made

    @classmethod
    def load(cls, path: PathLike, *, copy: bool = False) -> Densities:
        """Read densities that `save` wrote; the file is verified first.

        Parameters
        ----------
        path : path-like
            The file.
        copy : bool
            Read into memory instead of mapping the file: for network file systems.

        Returns
        -------
        Densities
            With what is known of below x_min.

        Raises
        ------
        StoreError
            If the file is not ours, damaged, of a newer format, or does not hold densities.
        """
        return cls(**_stored_densities.load(path, copy))

    # ---- ways out --------------------------------------------------------------------------------------

    def save(self, path: PathLike) -> None:
        """Store the densities, whole or not at all; `load` gives every bit back.

        Parameters
        ----------
        path : path-like
            The file, HDF5 in a checked wrapping; its folder must exist.

        Raises
        ------
        StoreError
            If the file cannot be written; an old one at `path` is untouched then.
        """
        _stored_densities.save(path, self)

    def to_csv(self, path: PathLike) -> None:
        """Write a table with the columns q2, nf, x, flavour, replica, value, at the nodes of the grid.

        Floats keep every bit. What is known of below x_min is not in the table.

        Parameters
        ----------
        path : path-like
            The file; its folder must exist.

        Raises
        ------
        StoreError
            If the file cannot be written; an old one at `path` is untouched then.
        """
        replicas = tuple(range(self.replicas))
        write_lattice(path, Lattice(self._q2, self._nf, replicas, self._flavours, self._grid.x, self._values))

    # ---- printing, comparing, pickling -----------------------------------------------------------------

    def __repr__(self) -> str:
        """One line."""
        flavours, replicas = count(len(self.flavours), "flavour"), count(self.replicas, "replica")
        if self._one:
            where = f"q2={brief(self._q2[0])} GeV^2, nf={self.nf}"
        else:
            where = f"{count(self.scales, 'scale')}, q2={brief_all(self._q2, most=2)} GeV^2"
        return f"Densities({replicas}, {flavours}, {where}, {self.grid.nodes} nodes)"

    def _rows(self) -> list[tuple[str, str]]:
        return [
            ("q2", f"{brief_all(self._q2)} GeV^2"),
            ("nf", _check.show_all(self._nf)),
            ("replicas", str(self.replicas)),
            ("flavours", ", ".join(flavour_name(number) for number in self.flavours)),
            ("grid", repr(self.grid)),
            ("values", f"x f(x), {self.values.nbytes / 1e6:.3g} MB"),
            ("below x_min", "unknown" if self.below is None else "momentum and quark numbers known"),
        ]

    def __str__(self) -> str:
        """One screen."""
        return screen("Densities", self._rows())

    def _repr_html_(self) -> str:
        """Return a table for notebooks."""
        return table("Densities", self._rows())

    def __eq__(self, other: object) -> bool:
        """Say whether grid, scales, flavours and every value are the same."""
        if not isinstance(other, Densities):
            return NotImplemented
        same = self._grid == other._grid and self._flavours == other._flavours and self._one == other._one
        arrays = ((self._q2, other._q2), (self._nf, other._nf), (self._values, other._values))
        return same and self._below == other._below and all(np.array_equal(a, b) for a, b in arrays)

    __hash__ = None  # type: ignore[assignment]

    def __reduce__(self) -> tuple[Any, ...]:
        """Pickle by the arrays, so that protocol 5 can pass them without a copy."""
        parts = (self._grid, self._q2, self._nf, self._flavours, self._values, self._below, self._one)
        return Densities._of, parts


def _check_grid(grid: object) -> None:
    """Refuse what is not a grid."""
    if not isinstance(grid, ChebyshevGrid):
        _check.refuse("grid", grid, f"grid must be a ChebyshevGrid, not {type(grid).__name__}")


def _check_scales(q2: ArrayLike, nf: ArrayLike) -> tuple[bool, Floats, Integers]:
    """Return whether there is one scale, not a list, and scales and numbers of flavours as arrays."""
    one = _check.is_one("q2", q2)
    scales = _check.scales("q2", q2)
    if one and not _check.is_one("nf", nf):
        _check.refuse("nf", nf, "nf must be one number where q2 is one")
    counts = _check.flavour_counts("nf", nf, scales.size)
    _check.distinct_scales("q2", scales, counts)
    return one, scales, counts
