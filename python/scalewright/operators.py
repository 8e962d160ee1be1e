"""What carries x f(x) from one scale to others: built once, applied to anything.

A set made by `build_operators` is live and serves any scale in its range; a set that was loaded, unpickled or
composed serves the scales it holds.
"""

from __future__ import annotations

import threading
from collections.abc import Iterator
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from . import _check, _composed
from ._carry import Task, asked_scales, matched, thread_count
from ._check import Floats, Integers
from ._describe import operator_lines
from ._display import screen, table
from ._route import Held, Live, Route, Source
from .densities import Densities
from .files.whole import PathLike
from .grid import ChebyshevGrid
from .theory import Theory

__all__ = ["Operators"]

Scales: TypeAlias = ArrayLike | None
DIRECTIONS = ("alpha_s", "charm", "bottom", "top", "ln_q2")


class Operators:
    """What carries x f(x) from `start_q2`, `start_nf` to each of `q2`; frozen.

    Made by `build_operators`, by `Operators.load`, or by composing two sets.

    Examples
    --------
    >>> import numpy as np
    >>> import scalewright as sw
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> ops = sw.build_operators(sw.Theory(order="LO"), grid, start_q2=2.0, q2=[10.0, 1e4])
    >>> ops.q2, ops.nf
    (array([   10., 10000.]), array([4, 5]))
    >>> shape = np.sqrt(grid.x) * (1 - grid.x) ** 3
    >>> many = sw.Densities(grid, q2=2.0, nf=4, flavours=(21, 2), values=np.tile(shape, (5, 2, 1)))
    >>> evolved = ops.apply(many, missing="zero")
    >>> evolved.values.shape == (2, 5, 11, grid.nodes)
    True
    """

    __slots__ = ("_grid", "_kept", "_lock", "_route", "_source", "_theory")

    def __init__(self, theory: Theory, grid: ChebyshevGrid, route: Route, source: Source) -> None:
        self._theory, self._grid, self._route, self._source = theory, grid, route, source
        self._kept: tuple[Floats, Floats] | None = None
        self._lock = threading.Lock()

    # ---- what it is -------------------------------------------------------------------------------

    @property
    def theory(self) -> Theory:
        """What was assumed."""
        return self._theory

    @property
    def grid(self) -> ChebyshevGrid:
        """Where x lives."""
        return self._grid

    @property
    def start_q2(self) -> float:
        """Scale of the input in GeV^2."""
        return self._route.start_q2

    @property
    def start_nf(self) -> int:
        """Number of active flavours of the input."""
        return self._route.start_nf

    @property
    def intrinsic(self) -> tuple[int, ...]:
        """Heavy flavours above `start_nf` that an input may have."""
        return self._route.intrinsic

    @property
    def q2(self) -> Floats:
        """Scales of the output in GeV^2, (scale,), read-only."""
        return self._route.q2

    @property
    def nf(self) -> Integers:
        """Numbers of active flavours of the output, (scale,), read-only."""
        return self._route.nf

    @property
    def block_names(self) -> tuple[str, ...]:
        """Names of the distinct blocks, such as "gluon<-light+"; a block that equals another is not held."""
        return self._source.names

    @property
    def light(self) -> int:
        """Number of flavours that act alike along the whole route."""
        return self._source.light

    @property
    def blocks(self) -> Floats:
        """The blocks, (scale, block, node, node), read-only: output nodes first, input nodes last."""
        return self._all()[0]

    def _all(self) -> tuple[Floats, Floats]:
        """Blocks and flows at all scales, computed once by whoever comes first."""
        with self._lock:
            if self._kept is None:
                self._kept = self._source.at(self.q2, self.nf, thread_count(None))
                for array in self._kept:
                    array.flags.writeable = False
            return self._kept

    @property
    def error(self) -> float:
        """Largest relative error estimate of the steps in scale."""
        return self._source.error

    @property
    def steps(self) -> int:
        """Number of steps in scale that were taken."""
        return self._source.steps

    @property
    def live(self) -> bool:
        """Whether scales between those of `q2` are served too."""
        return isinstance(self._source, Live)

    def derivative(self, parameter: str, *, threads: int | None = None) -> Floats:
        """Derivative of the blocks at the scales `q2`, exact; threshold scales stay where they are.

        Parameters
        ----------
        parameter : {"alpha_s", "charm", "bottom", "top", "ln_q2"}
            alpha_s where the theory gives it, the mass of a quark in GeV, or ln q2 of the output.
        threads : int, optional
            As for `apply`.

        Returns
        -------
        ndarray, (scale, block, node, node)
            As `blocks`.

        Raises
        ------
        InputError
            If the parameter is unknown, or the set is not live.

        Notes
        -----
        By the chain rule from those of the coupling and of the matching; costs about as much as a build.
        """
        _check.choice("parameter", parameter, DIRECTIONS)
        count = thread_count(threads)
        return self._source.derivative(parameter, count).at(self.q2, self.nf, count)[0]

    # ---- applying ---------------------------------------------------------------------------------

    def apply(
        self,
        densities: Densities,
        *,
        q2: Scales = None,
        nf: Scales = None,
        flavours: ArrayLike | None = None,
        out: Floats | None = None,
        threads: int | None = None,
        missing: str = "error",
    ) -> Densities:
        """Carry densities to other scales.

        Parameters
        ----------
        densities : Densities
            Of one scale: `start_q2` and `start_nf`, on the same grid; any number of replicas.
        q2 : array_like, (scale,), optional
            Scales in GeV^2; by default those of the set. A live set serves any between its lowest and
            highest.
        nf : int or array_like of int, optional
            Numbers of flavours of these scales; by default those of the theory.
        flavours : sequence of int, optional
            PDG numbers of the output; by default gluon, quarks and antiquarks up to the largest `nf`.
        out : ndarray, (scale, replica, flavour, node), optional
            Where to write: C-ordered float64.
        threads : int, optional
            By default the environment's SCALEWRIGHT_THREADS, or all processors. The bits do not depend on it.
        missing : {"error", "zero"}
            What an active flavour is that `densities` does not have.

        Returns
        -------
        Densities
            Values (scale, replica, flavour, node).

        Raises
        ------
        InputError
            If grid, scale or number of flavours of `densities` differ from those of the set, or flavours
            are missing or not allowed.
        RangeError
            If a scale is not served.
        """
        task = self._task(densities, q2, nf, flavours, threads, missing)
        return task.run(out, self._all() if q2 is None else None)

    def stream(
        self,
        densities: Densities,
        *,
        q2: Scales = None,
        nf: Scales = None,
        flavours: ArrayLike | None = None,
        out: Floats | None = None,
        threads: int | None = None,
        missing: str = "error",
    ) -> Iterator[Densities]:
        """Carry densities to other scales, a few at a time: memory does not grow with their number.

        Parameters
        ----------
        densities, q2, nf, flavours, threads, missing
            As for `apply`.
        out : ndarray, (k, replica, flavour, node), optional
            Where to write, k scales at a time, again and again: what was yielded before is overwritten. Saves
            the time to fetch fresh memory for every scale.

        Yields
        ------
        Densities
            Of one scale each, in the order of `q2`.

        Raises
        ------
        InputError, RangeError
            As `apply`, before the first scale.
        """
        task = self._task(densities, q2, nf, flavours, threads, missing)
        return (one for part, place in task.parts(out) for one in part.run_apart(place))

    def _task(
        self,
        densities: Densities,
        q2: Scales,
        nf: Scales,
        flavours: ArrayLike | None,
        threads: int | None,
        missing: str,
    ) -> Task:
        """Check the arguments of one application."""
        given = matched(densities, self._grid, self._route, missing)
        asked, counts = asked_scales(self._theory, self._route, self._source, q2, nf)
        made = self._route.made(counts) if flavours is None else _check.partons("flavours", flavours)
        count = thread_count(threads)
        route, source, before = self._route, self._source, densities.below
        return Task(self._grid, route, source, given, before, asked, counts, made, count)

    # ---- composing --------------------------------------------------------------------------------

    def after(self, first: Operators) -> Operators:
        """Return the operators that do `first` and then these; also written ``second @ first``.

        Parameters
        ----------
        first : Operators
            They must serve the scale and number of flavours from which these start, on the same grid, with
            the same theory.

        Returns
        -------
        Operators
            From the start of `first` to the scales of these. They hold these scales and no others.

        Raises
        ------
        InputError
            If the two do not fit.
        RangeError
            If `first` does not serve the start of these.

        Examples
        --------
        >>> import scalewright as sw
        >>> grid, theory = sw.ChebyshevGrid(x_min=1e-4), sw.Theory(order="LO")
        >>> low = sw.build_operators(theory, grid, start_q2=2.0, q2=[10.0])
        >>> high = sw.build_operators(theory, grid, start_q2=10.0, q2=[100.0, 1e4])
        >>> (high @ low).start_q2, (high @ low).q2
        (2.0, array([  100., 10000.]))
        """
        if not isinstance(first, Operators):
            _check.refuse("first", first, f"first must be Operators, not {type(first).__name__}")
        route, source = _composed.composed(first, self)
        return Operators(self._theory, self._grid, route, source)

    def __matmul__(self, first: object) -> Operators:
        """Return `after`."""
        return self.after(first) if isinstance(first, Operators) else NotImplemented

    # ---- keeping ----------------------------------------------------------------------------------

    def held(self) -> Operators:
        """Return the same operators as arrays at the scales `q2`, without the means to serve others."""
        if not self.live:
            return self
        blocks, flows = self._all()
        names, rows = self.block_names, self._source.flow_names
        source = Held(self._route, names, self.light, blocks, rows, flows, self.error, self.steps)
        return Operators(self._theory, self._grid, self._route, source)

    def save(self, path: PathLike) -> None:
        """Store the operators at the scales `q2`, whole or not at all.

        Parameters
        ----------
        path : path
            The file, HDF5 in a checked wrapping.

        Raises
        ------
        StoreError
            If it cannot be written; an old file stays then.
        """
        from . import _stored_operators

        _stored_operators.save(path, self.held())

    @staticmethod
    def load(path: PathLike, copy: bool = False) -> Operators:
        """Read operators, after checking that no bit of the file has changed.

        Parameters
        ----------
        path : path
            The file.
        copy : bool
            Read it into memory instead of mapping it; for network file systems.

        Returns
        -------
        Operators
            They serve the scales stored.

        Raises
        ------
        StoreError
            If the file is not ours, damaged, of another kind or made by a newer release.
        """
        from . import _stored_operators

        return _stored_operators.load(path, copy)

    def __reduce__(self) -> tuple[Any, ...]:
        """Pickle as arrays."""
        kept = self.held()
        return Operators, (kept._theory, kept._grid, kept._route, kept._source)

    def __copy__(self) -> Operators:
        """Return itself: it is frozen."""
        return self

    def __deepcopy__(self, memo: dict[int, Any]) -> Operators:
        """Return itself: it is frozen."""
        return self

    def __eq__(self, other: object) -> bool:
        """Say whether theory, grid, scales and every bit of the blocks are the same."""
        if not isinstance(other, Operators):
            return NotImplemented
        return self is other or (
            self._key() == other._key()
            and self.block_names == other.block_names
            and np.array_equal(self.blocks, other.blocks)
        )

    def __hash__(self) -> int:
        """Hash of theory, grid and scales."""
        return hash(self._key())

    def _key(self) -> tuple[Any, ...]:
        return self._theory, self._grid, self._route.key

    # ---- showing ----------------------------------------------------------------------------------

    def __repr__(self) -> str:
        """One line."""
        return f"Operators({self._theory.order}, {self._route}, {len(self.block_names)} blocks)"

    def __str__(self) -> str:
        """One screen."""
        return screen("Operators", operator_lines(self))

    def _repr_html_(self) -> str:
        """Return a table, for notebooks."""
        return table("Operators", operator_lines(self))
