"""Corrections to predictions: higher twist, deuteron and nuclear factors, fitted or known from elsewhere.

There is none by default. With the map of leading twist untouched, the prediction of a row becomes

    (1 + h(x; q)/Q^2) (1 + d(x; q)) R(x) (map row . f) + w H(x; q)/Q^2,

each target its own. Which one when:

============= ========================================================= ============================
class         what it is                                                parameters
============= ========================================================= ============================
HigherTwist   a factor 1 + h/Q^2, or H/Q^2 added to F2, FL or xF3       those of h or H, in GeV^2
TargetFactor  a factor 1 + d of a target, to be fitted                  those of d
KnownFactor   a factor R from elsewhere, with its uncertainty           one, known as 0 +- 1, for each
                                                                        source of uncertainty
============= ========================================================= ============================

A factor multiplies all that is measured in a row, cross sections included, as if F2, FL and xF3 had the same
one; w is the weight of the structure function in what is measured (1 for F2 itself). h, H and d are a
`Polynomial`, a `Spline`, or a `Function` of x.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable, Mapping, Sequence
from copy import copy
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._check import Floats, show
from ._corrected.bound import Bound, Part
from ._corrected.curves import Curve, Linear
from ._corrected.families import Polynomial, Spline
from ._corrected.known import OfX, known_source, read_columns
from ._corrected.own_function import Function
from ._corrected.selection import chosen_rows, target_names
from .files.whole import PathLike

__all__ = [
    "Correction",
    "Curve",
    "Function",
    "HigherTwist",
    "KnownFactor",
    "Polynomial",
    "Spline",
    "TargetFactor",
    "covariance",
]

#: Structure functions in the order of the weights of a row.
_FUNCTIONS = ("F2", "FL", "xF3")

Source: TypeAlias = float | Callable[[Floats, Floats], ArrayLike]


class Correction(ABC):
    """What all corrections have: targets, a name, parameters.

    Attributes
    ----------
    targets : tuple of str
        Names of the targets it is for.
    name : str
        What stands before the names of its parameters.
    names : tuple of str
        Of the parameters.
    limits : tuple of three ndarrays, (parameter,)
        Start, lowest and highest values.
    priors : dict
        Name -> (value, standard deviation) of what is known from elsewhere.
    corrects_target : bool
        Whether it is for what a target is more than free protons and neutrons.
    """

    corrects_target = True

    def __init__(self, targets: Any, name: str | None, prefix: str, current: str | None) -> None:
        self.targets = target_names(targets)
        self.name = f"{prefix}_{'_'.join(self.targets)}".replace(" ", "_") if name is None else str(name)
        self.current = None if current is None else _check.choice("current", current, ("neutral", "charged"))
        self.names: tuple[str, ...] = ()
        self.limits: tuple[Floats, Floats, Floats] = (np.zeros(0), np.zeros(0), np.zeros(0))
        self.priors: dict[str, tuple[float, float]] = {}

    @abstractmethod
    def on(self, points: Any, weights: Floats) -> Part:
        """Return it on the rows of a map: `points`, and their weights of F2, FL and xF3, (row, 3)."""

    def at(self, values: Mapping[str, float]) -> Correction:
        """Return the same with its parameters, or some, starting at other values.

        Parameters
        ----------
        values : mapping
            Name -> value, as ``dict(zip(result.names, result.parameters))``; names that are not its own are
            passed over.

        Raises
        ------
        InputError
            If none of the names is its own, or a value lies outside the limits.
        """
        start, low, high = (side.copy() for side in self.limits)
        own = [name for name in self.names if name in values]
        if not own:
            known = _check.show_all(self.names)
            _check.refuse("values", list(values), f"there is none of the parameters {known}")
        for name in own:
            place = self.names.index(name)
            given, sides = _check.real(f"values[{name}]", values[name]), (low[place], high[place])
            if not sides[0] <= given <= sides[1]:
                _check.refuse(f"values[{name}]", given, f"must lie in [{show(sides[0])}, {show(sides[1])}]")
            start[place] = given
        made = copy(self)
        made.limits = (start, low, high)
        return made

    def _take(self, curve: Curve) -> None:
        """Name the parameters of a curve."""
        if not isinstance(curve, Curve):
            _check.refuse("curve", curve, "curve must be a Polynomial, a Spline or a Function")
        self.names = tuple(f"{self.name}.{name}" for name in curve.names)
        self.limits = (curve.start, curve.low, curve.high)

    def __repr__(self) -> str:
        """One line."""
        return f"{type(self).__name__}({self.name}, {len(self.names)} parameters)"


class HigherTwist(Correction):
    """Powers of 1/Q^2 beyond leading twist: a factor 1 + h(x)/Q^2, or H(x)/Q^2 added to a structure function.

    Parameters
    ----------
    curve : Polynomial, Spline or Function
        h or H in GeV^2.
    targets : str, {"z": int, "a": int}, or list of them
        Targets that have this h in common.
    form : {"factor", "addition"}
        1 + h/Q^2 on all that is measured; or H/Q^2 added to a structure function, which enters cross sections
        with its weight.
    structure_function : {"F2", "FL", "xF3"}
        For an addition: to which.
    current : {"neutral", "charged"}, optional
        One current alone.
    name : str, optional
        What stands before the names of the parameters; by default h or H (H_FL, H_xF3) and the targets.

    Raises
    ------
    InputError
        If an argument is wrong.

    Notes
    -----
    Rows with a tagged quark are left alone. Common practice, no source; the two forms give different results.

    Examples
    --------
    >>> twist = HigherTwist(Polynomial(2, a=1.0, b=0.0), targets="proton")
    >>> twist.names
    ('h_proton.c0', 'h_proton.c1', 'h_proton.c2')
    """

    corrects_target = False

    def __init__(
        self,
        curve: Curve,
        *,
        targets: Any = "proton",
        form: str = "factor",
        structure_function: str = "F2",
        current: str | None = None,
        name: str | None = None,
    ) -> None:
        self.form = _check.choice("form", form, ("factor", "addition"))
        self.structure_function = _check.choice("structure_function", structure_function, _FUNCTIONS)
        prefix = "h" if form == "factor" else "H" if structure_function == "F2" else f"H_{structure_function}"
        super().__init__(targets, name, prefix, current)
        self.curve = curve
        self._take(curve)

    def on(self, points: Any, weights: Floats) -> Part:
        """Return it on the rows of a map."""
        rows = chosen_rows(points, self.targets, self.current, self.name, tagged=False)
        weight, is_factor = 1.0 / points.q2[rows], self.form == "factor"
        if not is_factor:
            weight = weight * weights[rows, _FUNCTIONS.index(self.structure_function)]
        base = np.full(rows.size, float(is_factor))
        at = self.curve.on(points.x[rows], [points.place[row] for row in rows])
        return Part(rows, is_factor, base, weight, at)


class TargetFactor(Correction):
    """A factor 1 + d(x) of a deuteron or a nucleus, with parameters that are fitted.

    Parameters
    ----------
    curve : Polynomial, Spline or Function
        d, dimensionless.
    targets, current, name
        As for `HigherTwist`; the name is "d" and the targets by default.

    Raises
    ------
    InputError
        If an argument is wrong.

    Examples
    --------
    >>> TargetFactor(Spline([0.01, 0.3, 0.7]), targets="deuteron").names
    ('d_deuteron.k0', 'd_deuteron.k1', 'd_deuteron.k2')
    """

    def __init__(
        self, curve: Curve, *, targets: Any = "deuteron", current: str | None = None, name: str | None = None
    ) -> None:
        super().__init__(targets, name, "d", current)
        self.curve = curve
        self._take(curve)

    def on(self, points: Any, weights: Floats) -> Part:
        """Return it on the rows of a map."""
        rows = chosen_rows(points, self.targets, self.current, self.name, tagged=True)
        at = self.curve.on(points.x[rows], [points.place[row] for row in rows])
        return Part(rows, True, np.ones(rows.size), np.ones(rows.size), at)


class KnownFactor(Correction):
    """A factor of a deuteron or a nucleus that is known from elsewhere, with its uncertainty.

    Parameters
    ----------
    factor : float, or callable
        Number, or ``f(x, q2)`` with arrays (row,), returning (row,).
    uncertainty : float, callable, or mapping of name to one, optional
        Absolute standard deviation of the factor: one source, common to all rows, or several independent ones
        by name. In a fit each is a parameter b with prior 0 +- 1, the factor being factor + uncertainty b.
    targets, current, name
        As for `HigherTwist`; the name is "R" and the targets by default.

    Raises
    ------
    InputError
        If an argument is wrong.

    Examples
    --------
    >>> factor = KnownFactor(lambda x, q2: 1 - 0.03 * x, 0.01, targets="deuteron")
    >>> factor.names, factor.priors
    (('R_deuteron.shift',), {'R_deuteron.shift': (0.0, 1.0)})
    """

    def __init__(
        self,
        factor: Source,
        uncertainty: Source | Mapping[str, Source] | None = None,
        *,
        targets: Any = "deuteron",
        current: str | None = None,
        name: str | None = None,
    ) -> None:
        super().__init__(targets, name, "R", current)
        self.factor = known_source("factor", factor)
        given = uncertainty if isinstance(uncertainty, Mapping) else {"shift": uncertainty}
        self.uncertainty: dict[str, OfX] = {
            str(key): known_source(f"uncertainty[{key}]", one)
            for key, one in given.items()
            if one is not None
        }
        self.names = tuple(f"{self.name}.{key}" for key in self.uncertainty)
        wide = np.full(len(self.names), np.inf)
        self.limits = (np.zeros(len(self.names)), -wide, wide)
        self.priors = dict.fromkeys(self.names, (0.0, 1.0))

    @classmethod
    def read(
        cls, path: PathLike, *, targets: Any = "deuteron", current: str | None = None, name: str | None = None
    ) -> KnownFactor:
        """Read a table of a factor against x.

        Parameters
        ----------
        path : path-like
            CSV with columns x and factor; each further column is a source of uncertainty, absolute. Straight
            lines in x join the entries; rows outside them are refused.
        targets, current, name
            As for the class.

        Raises
        ------
        InputError
            If a column is missing or an entry wrong; file, line and column are named.
        StoreError
            If the file cannot be read.
        """
        factor, sources = read_columns(path)
        return cls(factor, sources, targets=targets, current=current, name=name)

    def on(self, points: Any, weights: Floats) -> Part:
        """Return it on the rows of a map."""
        rows = chosen_rows(points, self.targets, self.current, self.name, tagged=True)
        x, q2 = points.x[rows], points.q2[rows]
        base = self.factor(x, q2)
        columns = [np.zeros((0, rows.size)), *(one(x, q2)[np.newaxis] for one in self.uncertainty.values())]
        return Part(rows, True, base, np.ones(rows.size), Linear(np.concatenate(columns).T))


def covariance(fmap: Any, corrections: Sequence[Correction] | Correction, densities: Any) -> Floats:
    """Return the covariance of predictions that the uncertainties of known factors make.

    For chi-square without a fit: ``ChiSquare(table, theory=covariance(...))``. A fit that is given the
    corrections has these uncertainties as parameters already; do not use both.

    Parameters
    ----------
    fmap : ForwardMap
    corrections : sequence of Correction
        Those with priors count, each parameter by the standard deviation of its prior.
    densities : Densities or array_like
        Of one replica, or the mean is taken: where the derivative is taken.

    Returns
    -------
    ndarray, (datum, datum)

    Raises
    ------
    InputError
        If an argument is wrong.
    """
    bound = Bound(corrections, fmap)
    rows = fmap.predict_rows(densities).mean(axis=0)
    shifted = bound.corrected(rows, bound.start)
    along = fmap.data.tangent(shifted, bound.jacobian(rows, bound.start))
    width = np.array([bound.priors.get(name, (0.0, 0.0))[1] for name in bound.names])
    return np.asarray((along * width) @ (along * width).T)
