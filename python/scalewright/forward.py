"""From input densities to predictions: one linear map for a table of points.

Massless coefficient functions are matrices on the grid, computed once; a point is a row of them, combined
with powers of a and the couplings of the quarks, and carried back to the input by the operators of its
mu_f^2.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from functools import cached_property
from typing import Any

import numpy as np

from ._check import Floats, show
from ._corrected.bound import Bound, checked
from ._corrected.reported import described
from ._measured.combination import Combination
from ._observed import storing
from ._observed.accuracy import TOLERANCE, RowErrors, finer_grid, row_errors
from ._observed.carried import carried_matrix
from ._observed.derivatives import carried_derivative
from ._observed.further import checked_further
from ._observed.inputs import input_values
from ._observed.orders import Orders, orders_of
from ._observed.points import Points
from ._observed.problem import Problem
from .corrections import Correction
from .densities import Densities
from .electroweak import Electroweak
from .files.whole import PathLike
from .grid import ChebyshevGrid
from .kernels import CoefficientFunction
from .theory import Theory

__all__ = ["ForwardMap", "forward_map"]


class ForwardMap:
    """The linear map from input densities to predicted rows, and from rows to data; frozen.

    Made by `forward_map` or `ForwardMap.load`.

    Attributes
    ----------
    matrix : ndarray, (row, flavour, node)
        Predictions are sums over flavours and nodes of it times x f(x) at the input; read-only.
    flavours : tuple of int
        PDG numbers of the flavour axis.
    theory, electroweak, grid
        What was assumed.
    start_q2, start_nf : float, int
        Scale of the input in GeV^2 and its number of flavours.
    points : Points
        What each row is.
    data : Combination
        From rows to data.
    steps_error : float
        Largest relative error estimate of the steps in scale.
    """

    def __init__(
        self, problem: Problem, start_q2: float, start_nf: int, flavours: tuple[int, ...], matrix: Floats,
        data: Combination,
        steps_error: float,
    ) -> None:  # fmt: skip
        self._problem, self.data, self.steps_error = problem, data, steps_error
        self.start_q2, self.start_nf, self.flavours = start_q2, start_nf, flavours
        matrix.flags.writeable = False
        self.matrix = matrix

    @property
    def theory(self) -> Theory:
        """What was assumed."""
        return self._problem.theory

    @property
    def electroweak(self) -> Electroweak:
        """Electroweak inputs."""
        return self._problem.electroweak

    @property
    def grid(self) -> ChebyshevGrid:
        """Where x lives."""
        return self._problem.grid

    @property
    def points(self) -> Points:
        """What each row is."""
        return self._problem.points

    @property
    def weights(self) -> Floats:
        """Weights of F2, FL and xF3 in what each row is, (row, 3)."""
        return self._problem.factors

    def orders(self, boundaries: Mapping[str, float] | None = None) -> Orders:
        """Return the formal order of the light, heavy and longitudinal part of each row, and its regime.

        Parameters
        ----------
        boundaries : mapping, optional
            Of the regimes: arguments of `scalewright.kinematics.regimes`.

        Returns
        -------
        Orders
            `light`, `heavy`, `fl` and `regime`, one entry a row; ``of_data(fmap.data)``: one a datum.

        Raises
        ------
        InputError
            If a boundary is unknown or no number.
        """
        return orders_of(self._problem, boundaries)

    def describe(
        self,
        corrections: Sequence[Correction] | Correction = (),
        boundaries: Mapping[str, float] | None = None,
    ) -> str:
        """Say of what order predictions are, in which regimes they lie, and what they are not corrected for.

        Parameters
        ----------
        corrections : sequence of Correction
            Those that go with the map, see `scalewright.corrections`.
        boundaries : mapping, optional
            As for `orders`.

        Returns
        -------
        str
            One screen.

        Raises
        ------
        InputError
            If something is no correction, or a boundary no number.
        """
        return described(self._problem, self.orders(boundaries), repr(self), checked(corrections))

    def predict_rows(self, densities: Densities | Floats) -> Floats:
        """Predict each row.

        Parameters
        ----------
        densities : Densities or array_like
            Of one scale, the start; or values (replica, flavour, node) or (flavour, node) in the order of
            `flavours`.

        Returns
        -------
        ndarray, (replica, row)

        Raises
        ------
        InputError
            If grid, scale, number of flavours or shape do not fit.
        """
        values = self._values(densities)
        flat = self.matrix.reshape(self.matrix.shape[0], -1)
        return np.asarray(values.reshape(values.shape[0], -1) @ flat.T)

    def predict(
        self, densities: Densities | Floats, corrections: Sequence[Correction] | Correction = ()
    ) -> Floats:
        """Predict each datum.

        Parameters
        ----------
        densities : Densities or array_like
            As for `predict_rows`.
        corrections : sequence of Correction
            See `scalewright.corrections`; at the start of their parameters, which `Correction.at` sets.

        Returns
        -------
        ndarray, (replica, datum)

        Raises
        ------
        InputError
            As `predict_rows`; or if a denominator vanishes.
        """
        bound = Bound(corrections, self)
        return self.data.predict(bound.corrected(self.predict_rows(densities), bound.start))

    def numerical_error(
        self, densities: Densities | Floats, corrections: Sequence[Correction] | Correction = ()
    ) -> Floats:
        """Estimate how far `predict` is off numerically: grid, quadrature, steps in scale, rounding.

        Parameters
        ----------
        densities, corrections
            As for `predict`.

        Returns
        -------
        ndarray, (replica, datum)
            Absolute; not what a further order of a would change.

        Raises
        ------
        InputError
            As `predict`.

        Notes
        -----
        The map is made once more on a finer grid, the first time that this is asked; what lies beyond the
        nodal values of the input is judged by its last Chebyshev coefficients. Not below the true error in
        99 of 100 cases, by `benches/quoted_error.py`.
        """
        values = self._values(densities)
        errors = row_errors(self.grid, self.matrix, self._row_errors, values)
        bound, rows = Bound(corrections, self), self.predict_rows(values)
        if bound.parts:
            errors = errors * np.abs(bound.values(bound.start)[0])
            rows = bound.corrected(rows, bound.start)
        made = [
            np.abs(self.data.tangent(row, np.diag(error))).sum(axis=1)
            for row, error in zip(rows, errors, strict=True)
        ]
        return np.asarray(made)

    @cached_property
    def _row_errors(self) -> RowErrors:
        """The map compared with one on a finer grid."""
        problem = replace(self._problem, grid=finer_grid(self.grid))
        finer, _ = carried_matrix(
            problem, start_q2=self.start_q2, start_nf=self.start_nf, tolerance=TOLERANCE, threads=None
        )
        return RowErrors.of(self.grid, self.matrix, finer)

    def derivative(self, parameter: str) -> Floats:
        """Derivative of the matrix with respect to a parameter of the theory; thresholds stay fixed.

        Parameters
        ----------
        parameter : {"alpha_s", "charm", "bottom", "top", "hard_mur2_ratio", "hard_muf2_ratio"}
            alpha_s at the scale where it is given, a mass in GeV, or a ratio of scales.

        Returns
        -------
        ndarray, (row, flavour, node)

        Raises
        ------
        InputError
            If the parameter is unknown.

        Notes
        -----
        Exact, by the product rule from those of operators, coupling and coefficient functions; but massive
        coefficients are differentiated with respect to the mass by six-point differences of them alone. A
        mu_f that lies on a threshold is taken to stay above it.
        """
        return carried_derivative(self._problem, parameter, start_q2=self.start_q2, start_nf=self.start_nf)

    def save(self, path: PathLike) -> None:
        """Store the map, whole or not at all.

        Parameters
        ----------
        path : path-like
            The file, HDF5 in a checked wrapping.

        Raises
        ------
        StoreError
            If it cannot be written; an old file stays then.
        InputError
            If it has further coefficient functions: functions cannot be stored.
        """
        start = self.start_q2, self.start_nf
        storing.save(path, self._problem, start, self.flavours, self.matrix, self.data, self.steps_error)

    @classmethod
    def load(cls, path: PathLike, *, copy: bool = False) -> ForwardMap:
        """Read a map, after checking that no bit of the file has changed.

        Parameters
        ----------
        path : path-like
            The file.
        copy : bool
            Read it into memory instead of mapping it; for network file systems.

        Returns
        -------
        ForwardMap

        Raises
        ------
        StoreError
            If the file is not ours, damaged, of another kind or made by a newer release.
        """
        return cls(**storing.load(path, copy))

    def _values(self, densities: Any) -> Floats:
        """Return values (replica, flavour, node) in the order of the map."""
        return input_values(densities, self.grid, (self.start_q2, self.start_nf), self.flavours)

    def __repr__(self) -> str:
        """One line."""
        start = f"from {show(self.start_q2)} GeV^2 (nf = {self.start_nf})"
        return f"ForwardMap({self.theory.order}, {len(self.points)} rows, {self.data.data} data, {start})"


def forward_map(
    theory: Theory,
    grid: ChebyshevGrid,
    *,
    start_q2: float,
    points: Any,
    start_nf: int | None = None,
    electroweak: Electroweak | None = None,
    target_mass: bool = False,
    subtraction: str = "damped",
    further: Mapping[str, Sequence[Mapping[str, CoefficientFunction]]] | None = None,
    tolerance: float | None = None,
    threads: int | None = None,
) -> ForwardMap:
    """Return the linear map from input densities to predictions.

    Parameters
    ----------
    theory : Theory
        Orders, coupling, masses, scale ratios and the treatment of heavy quarks.
    grid : ChebyshevGrid
        Where x lives.
    start_q2 : float
        Scale of the input in GeV^2.
    points : Measurements, or rows
        A table, or any object with the attributes of `Measurements.rows`: x, q2, y, s, polarisation, measure,
        current, exchange, beam, target, tagged, one value a row or one for all.
    start_nf : int, optional
        Number of flavours of the input; by default that of the theory at `start_q2`.
    electroweak : Electroweak, optional
        By default `Electroweak.effective()`.
    target_mass : bool
        Keep the mass of the target (I. Schienbein et al., arXiv:0709.1775), in structure functions of light
        quarks and in the kinematics of cross sections.
    subtraction : {"damped", "chi", "plain"}
        With heavy_quarks="matched": what is beyond the massive part is multiplied by (1 - m^2/Q^2)^2 above
        Q^2 = m^2 and dropped below; taken at x (1 + 4 m^2/Q^2); or left as it is.
    further : mapping, optional
        Coefficient functions of your own beyond the order of the theory: "F2", "FL" or "xF3" to a list with
        one mapping an order, "ns+", "ns-", "pure singlet" or "gluon" to `CoefficientFunction`. They enter the
        light parts; logarithms of scale ratios follow to a^3, beyond it the ratios must be 1.
    tolerance, threads
        As for `build_operators`.

    Returns
    -------
    ForwardMap

    Raises
    ------
    InputError
        If an argument or a point is wrong; the message names the point.
    RangeError
        If a point lies outside the grid or its scale where the coupling is too large.

    Examples
    --------
    >>> import scalewright as sw
    >>> from types import SimpleNamespace
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> rows = SimpleNamespace(x=[0.01, 0.1], q2=[10.0, 100.0], measure="F2", exchange="photon")
    >>> fmap = sw.forward_map(sw.Theory(order="NLO"), grid, start_q2=2.0, points=rows)
    >>> fmap.matrix.shape == (2, 9, grid.nodes)
    True
    >>> shape = np.sqrt(grid.x) * (1 - grid.x) ** 3
    >>> fmap.predict(np.tile(shape, (5, 9, 1))).shape
    (5, 2)
    """
    rows, data = _rows_and_data(points)
    electroweak = Electroweak.effective() if electroweak is None else electroweak
    problem = Problem(theory, grid, electroweak, rows, target_mass, subtraction, checked_further(further))
    matrix, operators = carried_matrix(
        problem, start_q2=start_q2, start_nf=start_nf, tolerance=tolerance, threads=threads
    )
    flavours = operators._route.active
    return ForwardMap(
        problem, operators.start_q2, operators.start_nf, flavours, matrix, data, operators.error
    )


def _rows_and_data(points: Any) -> tuple[Points, Combination]:
    """Return points and what data they make: each its own where nothing is said."""
    if hasattr(points, "rows") and isinstance(getattr(points, "data", None), Combination):
        return Points.of(points.rows), points.data
    rows = Points.of(points)
    ones: list[list[tuple[int, float]]] = [[(row, 1.0)] for row in range(len(rows))]
    return rows, Combination(ones, [[] for _ in ones], len(rows))
