"""What each datum and each table does to a result, without a refit: closed forms at the minimum of a fit.

Which one when: `influence` for a parameter, or for anything whose derivative by the parameters is known;
`density_gradient` for that of x f(x) at any scale.

With P the inverse of the covariance C of the data, D the derivative of the predictions, r = value -
prediction and V the covariance of the parameters, leaving out the data S is the same as giving each of them
a shift of its own that costs nothing. Minimised over the shifts, with A = (P D)_S and w = (P r)_S,

    parameters move by   -V' A^T (P_SS)^-1 w,     their covariance becomes   V' = (V^-1 - A^T (P_SS)^-1 A)^-1.

For one datum and independent errors these are the deletion formulas of linear regression (R. Cook, S.
Weisberg, Residuals and Influence in Regression, Chapman and Hall 1982, section 2.2, recalled from memory).
They are exact where predictions are linear in the parameters, whatever the correlations of the data.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, Integers, show
from ..densities import Densities
from ..errors import InputError
from ..operators import Operators
from ._deletion import Deletion
from ._result import FitResult
from .chi_square import ChiSquare

__all__ = ["Influence", "density_gradient", "influence"]

Rebuilt: TypeAlias = Operators | Callable[[Mapping[str, float]], Operators]

#: Step of theory parameters in parts of themselves: operators are smooth and known to about 1e-9, so that the
#: four-point difference is good to 1e-6.
_STEP = 0.005


@dataclass(frozen=True, eq=False)
class Influence:
    """What data do to a quantity; the axes of the quantity come last everywhere.

    Parameters
    ----------
    parts : tuple of str
        Titles of tables, or "title, datum n" with n from 1 among all data.
    data : ndarray of int, (part,)
        Number of data of each.
    change : ndarray, (part, ...)
        By how much the quantity moves when the part is left out; nan where the rest does not determine it.
    error : ndarray, (...)
        Uncertainty of the quantity now, to first order.
    error_without : ndarray, (part, ...)
        Uncertainty without the part; infinite where the rest does not determine it.
    share : ndarray, (part, ...)
        Part of the variance that comes from the uncertainties of these data; negative is possible where
        uncertainties are common to several parts. Shares and `share_of_priors` add up to 1.
    share_of_priors : ndarray, (...)
    """

    parts: tuple[str, ...]
    data: Integers
    change: Floats
    error: Floats
    error_without: Floats
    share: Floats
    share_of_priors: Floats

    def __str__(self) -> str:
        """One screen, for a quantity that is one number."""
        if np.ndim(self.error):
            return f"Influence of {len(self.parts)} parts on {show(np.shape(self.error))} numbers"
        order = np.argsort(-np.nan_to_num(abs(self.change), nan=np.inf), kind="stable")[:40]
        size = max(len(self.parts[place]) for place in order)
        lines = [f"Influence, in units of the uncertainty {float(self.error):.3g}"]
        for place in order:
            moved, wider = self.change[place] / self.error, self.error_without[place] / self.error
            words = f"change {moved:+.2f}, uncertainty {wider:.2f} without it"
            if not np.isfinite(wider):
                words = "not determined without it"
            lines.append(f"  {self.parts[place]:<{size}}  {words}, share {100 * self.share[place]:.0f} %")
        if len(order) < len(self.parts):
            lines.append(f"  ... and {len(self.parts) - len(order)} more")
        if self.share_of_priors > 0.0:
            lines.append(f"  {'priors':<{size}}  share {100 * float(self.share_of_priors):.0f} %")
        return "\n".join(lines)


def influence(result: FitResult, quantity: str | ArrayLike, of: str = "tables") -> Influence:
    """Say what each table or each datum does to a quantity.

    Parameters
    ----------
    result : FitResult
        Of a fit with a `ChiSquare`, that has a covariance.
    quantity : str or array_like, (parameter, ...)
        Name of a parameter, such as "alpha_s"; or the derivative of the quantity by all parameters of the
        fit, such as that of `density_gradient`.
    of : {"tables", "data"}

    Returns
    -------
    Influence

    Raises
    ------
    InputError
        If there is no covariance, the name is unknown or the derivative has not one entry a parameter.

    Notes
    -----
    Exact for predictions that are linear in the parameters; elsewhere good while the change is small against
    the uncertainty. Multiplicative errors keep their reference, and parameters on a bound stay there.
    Uncertainties are those of `FitResult.linear_covariance`: second derivatives of the predictions, known for
    all data together only, would make the step to some of them worse, not better (tried).

    Examples
    --------
    >>> import scalewright as sw
    >>> from types import SimpleNamespace
    >>> from scalewright.fitting.shapes import FunctionShape
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> stat = [{"column": "stat", "given_in": "value", "scales_with": "nothing"}]
    >>> tables = [sw.Measurements.from_columns(
    ...     {"title": title, "measures": "F2", "exchange": "photon", "uncertainty": stat},
    ...     {"x": [0.1], "q2": [2.0], "value": [value], "stat": [0.01]})
    ...     for title, value in (("Run 1", 0.36), ("Run 2", 0.38))]
    >>> fmap = SimpleNamespace(
    ...     matrix=4 / 9 * grid.cardinals([0.1, 0.1])[:, None], flavours=(2,), grid=grid, start_q2=2.0,
    ...     start_nf=3)
    >>> flat = FunctionShape(grid, [2], lambda x, p: p[0] * (1 - x), [1.0], names=["norm"])
    >>> result = sw.fit(fmap, sw.ChiSquare(sw.Measurements.join(tables)), flat)
    >>> found = influence(result, "norm")  # a mean of two equal data: half a difference, sqrt(2)
    >>> (found.change * 0.4).round(6), (found.error_without / found.error).round(6), found.share.round(6)
    (array([ 0.01, -0.01]), array([1.414214, 1.414214]), array([0.5, 0.5]))
    """
    kind = _check.choice("of", of, ("tables", "data"))
    if not isinstance(result, FitResult):
        _check.refuse("result", result, "result must be a FitResult")
    chi2 = result._problem._chi2
    if not isinstance(chi2, ChiSquare):
        _check.refuse("result", result, "the fit must be one with a ChiSquare")
    gradient = _gradient(result, quantity)
    if result.linear_covariance is None:
        raise InputError(f"there is no covariance: {'; '.join(result.status)}")
    deletion = Deletion.of(result, chi2)
    flat = gradient.reshape(len(gradient), -1)
    table_of, titles = chi2.measurements.table_of, chi2.measurements.tables
    if kind == "data":
        parts = tuple(f"{titles[number]}, datum {datum + 1}" for datum, number in enumerate(table_of))
        sizes = np.ones(len(table_of), dtype=np.int64)
        change, variance = deletion.each(flat)
        share = deletion.shares(flat)
    else:
        members = [np.flatnonzero(table_of == number) for number in range(len(titles))]
        parts, sizes = tuple(titles), np.array([one.size for one in members])
        both = [deletion.without(one, flat) for one in members]
        change, variance = (np.stack([pair[k] for pair in both]) for k in (0, 1))
        each = deletion.shares(flat)
        share = np.stack([each[one].sum(axis=0) for one in members])
    after = (len(parts), *gradient.shape[1:])
    now = np.sqrt(deletion.variance(flat) * result.delta_chi2).reshape(gradient.shape[1:])
    return Influence(
        parts, sizes, change.reshape(after), now,
        np.sqrt(variance * result.delta_chi2).reshape(after), share.reshape(after),
        (1.0 - share.sum(axis=0)).reshape(gradient.shape[1:]),
    )  # fmt: skip


def density_gradient(
    result: FitResult,
    x: ArrayLike,
    flavour: int | str,
    *,
    q2: float | None = None,
    nf: int | None = None,
    operators: Rebuilt | None = None,
) -> Floats:
    """Return the derivative of x f(x) by the parameters of a fit.

    Parameters
    ----------
    result : FitResult
    x : array_like
        In [x_min, 1].
    flavour : int or str
        PDG number or name of a combination.
    q2 : float, optional
        Scale in GeV^2; by default the start.
    nf : int, optional
        Picks between the two values on a threshold.
    operators : Operators or callable, optional
        From the start to `q2`. Where the fit has theory parameters a callable is needed,
        ``f({"alpha_s": value, ...})`` returning the operators for these; their derivative is taken by
        differences.

    Returns
    -------
    ndarray, (parameter, ...)
        The axes of `x` last.

    Raises
    ------
    InputError
        If operators are missing or do not fit.
    """
    if not isinstance(result, FitResult):
        _check.refuse("result", result, "result must be a FitResult")
    problem, count = result._problem, len(result._problem.shape.names)
    shape, theory = problem.shape, tuple(problem.reference)
    jacobian = shape.jacobian(result.parameters[:count])
    along = Densities(problem.shape.grid, q2=problem.q2, nf=problem.nf, flavours=shape.flavours,
                      values=jacobian)  # fmt: skip
    shape_of_x = np.shape(np.asarray(x, dtype=np.float64))
    none = np.zeros((len(result.names) - count, *shape_of_x))
    if q2 is None:
        return np.concatenate([along.at(None, x, flavour, nf), none])
    none = none[: len(none) - len(theory)]  # of what moves neither densities nor operators
    scale = _check.scale("q2", q2)

    def carried(by: Operators, densities: Densities) -> Floats:
        return by.apply(densities, q2=[scale], nf=None if nf is None else [nf]).at(scale, x, flavour, nf)

    last = result.parameters[len(result.names) - len(theory) :]
    values = dict(zip(theory, last.tolist(), strict=True))
    first = carried(_operators(operators, values), along)
    moved = [_moved(operators, values, name, lambda by: carried(by, result.densities)) for name in theory]
    return np.concatenate([first, none, *moved])


def _operators(operators: Rebuilt | None, values: Mapping[str, float]) -> Operators:
    """Return the operators for theory parameters."""
    if isinstance(operators, Operators):
        if values:
            names = _check.show_all(list(values))
            raise InputError(
                f"operators: the fit has theory parameters {names}: give a function of them that returns "
                "operators"
            )
        return operators
    if operators is None or not callable(operators):
        _check.refuse("operators", operators, "operators from the start to q2 must be given")
    made = _check.raised("operators", operators, dict(values))
    if not isinstance(made, Operators):
        _check.refuse("operators", made, "the function must return Operators")
    return made


def _moved(
    operators: Rebuilt | None, values: Mapping[str, float], name: str, at: Callable[[Operators], Floats]
) -> Floats:
    """Return the derivative by a theory parameter, (1, ...): four points, error h^4."""
    step = _STEP * values[name]
    points = {k: at(_operators(operators, {**values, name: values[name] + k * step})) for k in (-2, -1, 1, 2)}
    return (8.0 * (points[1] - points[-1]) - (points[2] - points[-2])) / (12.0 * step)


def _gradient(result: FitResult, quantity: str | ArrayLike) -> Floats:
    """Return the derivative of a quantity by the parameters, (parameter, ...)."""
    if isinstance(quantity, str):
        gradient = np.zeros(len(result.names))
        gradient[result._place(quantity)] = 1.0
        return gradient
    array = _check.real_array("quantity", quantity)
    if array.ndim == 0 or len(array) != len(result.names):
        _check.refuse("quantity", array, f"the first axis must have {len(result.names)} parameters")
    return array
