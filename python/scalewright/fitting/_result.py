"""What a fit found, and how far it can be trusted, in numbers and in words."""

from __future__ import annotations

import html
from collections.abc import Callable
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from ..densities import Densities
from ..errors import InputError
from ..files.whole import PathLike
from ..theory import Theory
from ._answers import BlindDirection, blind_directions, ends, propagated, weights_of
from ._bend import map_curvature
from ._curvature import curvature
from ._problem import Problem
from ._profile import Profile, Rebuild, profiled
from ._result_files import load, save
from ._solve import Solution, scaled

__all__ = ["BlindDirection", "FitResult", "Profile"]


class FitResult:
    """What a fit found; made by `scalewright.fitting.least_squares.fit`.

    Attributes
    ----------
    names : tuple of str
        Parameters of the shape, then of corrections, then of the theory.
    parameters : ndarray, (parameter,)
    chi2, chi2_priors : float
        Of the data, and of the priors.
    data : int
        Number of data.
    converged : bool
        Whether this is a minimum: a linear step would lower chi-square by less than 1e-6.
    distance : float
        By how much it would.
    at_bounds : dict
        Name -> "lower" or "upper", of parameters that press against a bound.
    calls : dict
        How often residuals and Jacobian were computed.
    rebuilt : int
        How often the map was built anew for other theory parameters.
    delta_chi2 : float
        Rise of chi-square that uncertainties stand for.
    """

    def __init__(
        self, problem: Problem, solution: Solution, delta_chi2: float, rebuilt: int, rebuild: Rebuild | None
    ) -> None:
        self._problem, self._solution, self._rebuild = problem, solution, rebuild
        self.names, self.parameters = problem.names, solution.parameters
        self.delta_chi2, self.rebuilt = delta_chi2, rebuilt
        self.data = problem.count
        squares = solution.residuals**2
        self.chi2 = float(squares[: problem.rows].sum())
        self.chi2_priors = float(squares[problem.rows :].sum())
        self.converged, self.distance = solution.converged, solution.distance
        self.calls = {"residuals": solution.residual_calls, "jacobian": solution.jacobian_calls}
        sides = (("lower", solution.at_low), ("upper", solution.at_high))
        self.at_bounds = {self.names[place]: side for side, at in sides for place in np.flatnonzero(at)}
        self.parameters.flags.writeable = False

    def value(self, name: str) -> float:
        """Return the value of a parameter."""
        return float(self.parameters[self._place(name)])

    def error(self, name: str) -> float:
        """Return the uncertainty of a parameter; nan on a bound or where there is no covariance."""
        return float(self.errors[self._place(name)])

    @cached_property
    def densities(self) -> Densities:
        """Densities at the start, one replica."""
        problem = self._problem
        return problem.shape.densities(self._of_shape(self.parameters), q2=problem.q2, nf=problem.nf)

    @cached_property
    def prediction(self) -> Floats:
        """The data predicted, (datum,)."""
        return self._problem.prediction(self.parameters)

    def predict(self, parameters: ArrayLike) -> Floats:
        """Return the data predicted from other parameters of the same fit, such as those of replicas.

        Parameters
        ----------
        parameters : array_like, (parameter,) or (replica, parameter)
            In the order of `names`; those of the theory move the map to first order.

        Returns
        -------
        ndarray, (datum,) or (replica, datum)
            For correlations with data: ``ensemble.correlation_matrix("alpha_s",
            result.predict(ensemble.parameters))``.

        Raises
        ------
        InputError
            If the shape is wrong, or the fit was read from a file.
        """
        given = _check.real_array("parameters", parameters)
        if given.ndim not in (1, 2) or given.shape[-1] != len(self.names):
            _check.refuse("parameters", given, f"the last axis must have {len(self.names)} parameters")
        if given.ndim == 1:
            return self._problem.prediction(given)
        return np.array([self._problem.prediction(row) for row in given]).reshape(len(given), -1)

    @property
    def theory(self) -> Theory | None:
        """What was assumed, theory parameters at their fitted values; None where the map did not say."""
        from .maps import theory_at

        assumed = self._problem.theory
        at = {name: self.value(name) for name in self._problem.reference}
        return None if assumed is None else theory_at(assumed, at)

    @property
    def solved(self) -> dict[str, float]:
        """What sum rules determine: name -> value."""
        return self._problem.shape.solved(self._of_shape(self.parameters))

    @property
    def map_at(self) -> dict[str, float]:
        """Theory parameters that were fitted -> where the map of the fit is exact."""
        return dict(self._problem.reference)

    @property
    def gradient(self) -> Floats:
        """Derivative of chi-square of data and priors, (parameter,)."""
        return 2.0 * (self._solution.jacobian.T @ self._solution.residuals)

    @cached_property
    def singular_values(self) -> Floats:
        """Singular values of the derivative of the residuals, free parameters in units of their effect."""
        return scaled(self._solution.jacobian[:, self._solution.free])[1]

    @cached_property
    def linear_covariance(self) -> Floats | None:
        """As `covariance`, but the inverse of J^T J: second derivatives of the predictions left out."""
        if not self.converged or self._unseen(self._solution.jacobian):
            return None
        return self._of_free(self._axes, self._solution.free)

    @cached_property
    def covariance(self) -> Floats | None:
        """Covariance of the parameters, (parameter, parameter), or None where there is none.

        Twice the inverse of the second derivatives of chi-square, times `delta_chi2`; those of the map with
        respect to theory parameters are among them if the fit knows how to rebuild it. Rows and columns of
        parameters on a bound are 0: the covariance is that of the others with these where they are. None if
        the search has not ended at a minimum, or if neither data nor priors see some direction.
        """
        if self.linear_covariance is None or self._curvature is None:
            return None
        values, vectors, _ = self._curvature
        return self._of_free(self._axes @ (vectors / np.sqrt(values)), self._solution.free)

    @cached_property
    def _axes(self) -> Floats:
        """Axes of the linear error ellipsoid of the free parameters, (free, axis)."""
        free = self._solution.free
        if not free.size:
            return np.zeros((0, 0))
        _, values, right, size = scaled(self._solution.jacobian[:, free])
        return np.asarray((right / values[:, None] / size).T)

    @cached_property
    def _curvature(self) -> tuple[Floats, Floats, int] | None:
        """Eigensystem of the second derivatives along `_axes`, or None if chi-square falls somewhere.

        Third, the number of axes along which they did not settle, and are taken as linear.
        """
        free, problem = self._solution.free, self._problem
        axes = np.zeros((len(self.names), free.size))
        axes[free] = self._axes

        def gradient(parameters: Floats) -> Floats:
            return np.asarray(problem.jacobian(parameters).T @ problem.residuals(parameters))

        room = np.minimum(self.parameters - problem.low, problem.high - self.parameters)
        matrix, unsettled = curvature(gradient, self.parameters, axes, room)
        if self._rebuild is not None and problem.reference:
            of_theory = axes[-len(problem.reference) :]
            errors = np.linalg.norm(of_theory, axis=1)
            bend = map_curvature(problem, self.parameters, errors, self._rebuild)
            matrix += of_theory.T @ bend @ of_theory
        values, vectors = np.linalg.eigh(matrix)
        return None if (values <= 0.0).any() else (values, vectors, unsettled)

    def _of_free(self, root: Floats, free: Any) -> Floats:
        result = np.zeros((len(self.names), len(self.names)))
        result[np.ix_(free, free)] = self.delta_chi2 * root @ root.T
        return result

    @cached_property
    def errors(self) -> Floats:
        """Uncertainties of the parameters, (parameter,); nan on a bound or where there is no covariance."""
        result = np.full(len(self.names), np.nan)
        if self.covariance is not None:
            free = self._solution.free
            result[free] = np.sqrt(np.diagonal(self.covariance)[free])
        return result

    @cached_property
    def blind(self) -> tuple[BlindDirection, ...]:
        """Directions that the data do not see, whether priors do or not."""
        return self._unseen(self._solution.jacobian[: self._problem.rows])

    def error_of(self, x: ArrayLike, flavour: int | str) -> Floats:
        """Uncertainty of x f(x) at the start, to first order.

        Parameters
        ----------
        x : array_like
            In [x_min, 1].
        flavour : int or str
            PDG number or name of a combination.

        Returns
        -------
        ndarray
            Of the shape of `x`.

        Raises
        ------
        InputError
            If there is no covariance, or a flavour or x is wrong.
        """
        shape = self._problem.shape
        root, jacobian = self._root[: len(shape.names)], shape.jacobian(self._of_shape(self.parameters))
        weights = weights_of(self._problem, flavour)
        along = sum(weight * jacobian[:, shape.flavours.index(n)] for n, weight in weights.items())
        changes = np.atleast_2d(self._problem.shape.grid.interpolate(root.T @ along, np.ravel(x)))
        result: Floats = np.linalg.norm(changes, axis=0).reshape(np.shape(x))[()]
        return result

    def error_through(self, function: Callable[[Densities], ArrayLike]) -> Floats:
        """Uncertainty of anything computed from densities at the start, to first order.

        Parameters
        ----------
        function : callable
            Densities -> array_like, (replica, ...), such as ``lambda d: d.moment("g", 2)``.

        Returns
        -------
        ndarray
            The axes of the answer without the first; by differences over one uncertainty to either side.

        Raises
        ------
        InputError
            If there is no covariance.
        """
        return propagated(self.densities, self.changes, function)

    @property
    def changes(self) -> Floats:
        """How x f(x) changes along the axes of the error ellipsoid, (direction, flavour, node)."""
        shape = self._problem.shape
        jacobian = shape.jacobian(self._of_shape(self.parameters))
        return np.tensordot(self._root[: len(shape.names)].T, jacobian, axes=1)

    def eigenvectors(self) -> Densities:
        """Densities at the ends of the axes of the error ellipsoid.

        Returns
        -------
        Densities
            1 + 2 n replicas: the best fit; then plus and minus of each of n independent directions, by which
            chi-square rises by `delta_chi2` to second order, the least known first.

        Raises
        ------
        InputError
            If there is no covariance, or an end lies beyond a bound.
        """
        return self._eigenvectors

    @cached_property
    def _eigenvectors(self) -> Densities:
        return ends(self._problem, self.parameters, self._root)

    def profile(self, name: str, values: ArrayLike) -> Profile:
        """Fit again with one parameter held at each of some values.

        Parameters
        ----------
        name : str
            The parameter; with one of the theory the map is built anew if the fit could.
        values : array_like, (point,)

        Returns
        -------
        Profile

        Raises
        ------
        InputError
            If the name is unknown or a value lies outside the bounds.
        """
        return profiled(self._problem, self._rebuild, self.parameters, self._place(name), values)

    @cached_property
    def _root(self) -> Floats:
        """R with R R^T = covariance, (parameter, direction), the longest direction first."""
        covariance = self.covariance
        if covariance is None:
            raise InputError(f"there is no covariance: {'; '.join(self.status)}")
        size = np.sqrt(np.diagonal(covariance))
        size = np.where(size > 0.0, size, 1.0)
        values, vectors = np.linalg.eigh(covariance / np.outer(size, size))
        kept = np.argsort(-values)[: self._solution.free.size]
        return np.asarray(size[:, None] * vectors[:, kept] * np.sqrt(np.maximum(values[kept], 0.0)))

    def _unseen(self, jacobian: Floats) -> tuple[BlindDirection, ...]:
        """Return directions of the free parameters along which residuals do not change."""
        return blind_directions(self._problem, self.parameters, self._solution.free, jacobian)

    def _of_shape(self, parameters: Floats) -> Floats:
        return parameters[: len(self._problem.shape.names)]

    def _place(self, name: object) -> int:
        if not isinstance(name, str) or name not in self.names:
            known = f"there are {_check.show_all(self.names)}{_check.nearest(name, self.names)}"
            _check.refuse("name", name, f"no parameter of this name; {known}")
        return self.names.index(name)

    def save(self, path: PathLike) -> None:
        """Store what was found, whole or not at all.

        Parameters
        ----------
        path : path-like
            The file, HDF5 in a checked wrapping.

        Raises
        ------
        StoreError
            If it cannot be written; an old file at `path` is untouched then.
        """
        save(path, self)

    @classmethod
    def load(cls, path: PathLike, *, copy: bool = False) -> FitResult:
        """Read what `save` wrote, after checking that no bit of the file has changed.

        Parameters
        ----------
        path, copy
            As for `Ensemble.load`.

        Returns
        -------
        FitResult
            All answers as before, to the last bit; `profile` needs the map and is refused.

        Raises
        ------
        StoreError
            If the file is not ours, damaged, of a newer format, or does not hold a fit.
        """
        arguments, known = load(path, copy)
        result = cls(rebuild=None, **arguments)
        result.__dict__.update(known)
        return result

    @property
    def status(self) -> tuple[str, ...]:
        """What is to be known about the fit, one sentence a line; the first says whether it converged."""
        from ._words import status

        return status(self, self._problem, self._solution)

    def __repr__(self) -> str:
        """One line."""
        state = "" if self.converged else ", not converged"
        return f"FitResult({len(self.names)} parameters, chi2={self.chi2:.6g} for {self.data} data{state})"

    def __str__(self) -> str:
        """One screen."""
        from ._words import screen

        return screen(self)

    def _repr_html_(self) -> str:
        return f"<pre>{html.escape(str(self))}</pre>"
