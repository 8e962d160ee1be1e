"""Many replicas and what can be said about them, each statement with its sampling error."""

from __future__ import annotations

import html
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, Integers, show
from ..below import Below
from ..densities import Densities
from ..errors import InputError
from ..files.whole import PathLike
from ..operators import Operators
from . import _ensemble_files, _reweighting
from ._ensemble_statistics import Statistics
from ._statistics import Estimate

__all__ = ["Ensemble", "Estimate"]

#: Part of the fits that may fail before every summary warns.
_MANY_FAILED = 0.01


class Ensemble(Statistics):
    """Replicas of densities, with the parameters they were made from, and weights.

    Parameters
    ----------
    densities : Densities
        One replica each.
    parameters : array_like, (replica, parameter), optional
    names : sequence of str
        Of the parameters.
    weights : array_like, (replica,), optional
        Not negative; equal by default. Kept with sum 1.
    index : array_like of int, (replica,), optional
        Numbers of the replicas; by default from 0.
    chi2 : array_like, (replica,), optional
        Of each fit to its own pseudo-data.
    chi2_data : array_like, (replica,), optional
        Of each replica to the data themselves.
    data : int
        Number of data.
    failed : mapping
        Number of a replica that is not here -> why.
    seed : int, optional
        Of the pseudo-data.
    negative : int
        How many pseudo-data were negative.
    notes : sequence of str
        What else is to be known, in sentences.

    Raises
    ------
    InputError
        If a shape does not fit, or weights are negative or all 0.

    Examples
    --------
    >>> import scalewright as sw
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> size = 1 + 0.1 * np.random.default_rng(1).normal(size=(1000, 1, 1))
    >>> values = size * (grid.x**-0.1 * (1 - grid.x) ** 5)
    >>> ensemble = Ensemble(sw.Densities(grid, q2=2.0, nf=3, flavours=[21], values=values))
    >>> spread = ensemble.std(ensemble.at(0.1, "g") / ensemble.at(0.1, "g").mean())
    >>> abs(spread.value - 0.1) < 4 * spread.error, round(spread.error, 3)
    (True, 0.002)
    """

    def __init__(
        self,
        densities: Densities,
        *,
        parameters: ArrayLike | None = None,
        names: Sequence[str] = (),
        weights: ArrayLike | None = None,
        index: ArrayLike | None = None,
        chi2: ArrayLike | None = None,
        chi2_data: ArrayLike | None = None,
        data: int = 0,
        failed: Mapping[int, str] | None = None,
        seed: int | None = None,
        negative: int = 0,
        notes: Sequence[str] = (),
    ) -> None:
        if not isinstance(densities, Densities):
            _check.refuse("densities", densities, "densities must be Densities")
        count = densities.replicas
        if count < 1:
            _check.refuse("densities", densities, "there must be at least one replica")
        self.densities, self.names = densities, tuple(names)
        given = np.zeros((count, 0)) if parameters is None else parameters
        self.parameters = _frozen(_check.real_array("parameters", given, shape=(count, len(self.names))))
        self.weights = _frozen(_reweighting.normalised(weights, count))
        numbers = np.arange(count) if index is None else _check.whole_array("index", index, ndim=1)
        if numbers.size != count:
            _check.refuse("index", numbers, f"there must be {count}, one a replica")
        self.index: Integers = np.array(numbers, dtype=np.int64)
        self.chi2, self.chi2_data = (
            _frozen(np.full(count, np.nan) if one is None
                    else _check.real_array(name, one, shape=(count,), unknown=True))
            for name, one in (("chi2", chi2), ("chi2_data", chi2_data))
        )  # fmt: skip
        self.data = _check.whole("data", data, least=0)
        self.failed = dict(sorted((failed or {}).items()))
        self.seed = None if seed is None else _check.whole("seed", seed, least=0)
        self.negative = _check.whole("negative", negative, least=0)
        self.notes = tuple(str(note) for note in notes)

    # ---- what there is ---------------------------------------------------------------------------------

    @property
    def replicas(self) -> int:
        """Number of replicas, those that failed not counted."""
        return self.densities.replicas

    @property
    def effective_replicas(self) -> float:
        """The number of replicas of equal weight that would say as much (arXiv:1012.0836)."""
        return _reweighting.effective(self.weights)

    def parameter(self, name: str) -> Floats:
        """Return a parameter of each replica.

        Parameters
        ----------
        name : str

        Returns
        -------
        ndarray, (replica,)

        Raises
        ------
        InputError
            If there is none of this name.
        """
        if not isinstance(name, str) or name not in self.names:
            known = f"there are {_check.show_all(self.names)}" if self.names else "there are none"
            near = _check.nearest(name, self.names)
            _check.refuse("name", name, f"no parameter of this name; {known}{near}")
        return self.parameters[:, self.names.index(name)]

    def at(self, x: ArrayLike, flavour: int | str, q2: float | None = None, nf: int | None = None) -> Floats:
        """Return x f(x) of each replica.

        Parameters
        ----------
        x : array_like
            In [x_min, 1].
        flavour : int or str
            PDG number or name of a combination.
        q2 : float, optional
            Scale in GeV^2; needed where there are several.
        nf : int, optional
            Picks between the two values on a threshold.

        Returns
        -------
        ndarray, (replica, ...)
            The axes of `x` last.
        """
        return self.densities.at(None if q2 is None else _check.scale("q2", q2), x, flavour, nf)

    # ---- new ensembles ---------------------------------------------------------------------------------

    def reweighted(
        self, chi2: ArrayLike, method: str, *, data: int | None = None, least: float = 50.0
    ) -> Ensemble:
        """Return the ensemble weighted by how well each replica describes new data.

        Parameters
        ----------
        chi2 : array_like, (replica,)
            Of the new data, such as ``chi2.value(fmap.predict(ensemble.densities))``.
        method : {"Giele-Keller", "1012.0836"}
            exp(-chi2/2) (W. Giele, S. Keller, hep-ph/9803393), or chi^(n-1) exp(-chi2/2) (R. Ball et al.,
            arXiv:1012.0836).
        data : int, optional
            Number of new data; "1012.0836" needs it.
        least : float
            Fewest effective replicas.

        Returns
        -------
        Ensemble

        Raises
        ------
        InputError
            If the effective number of replicas falls below `least`: fit the new data instead.
        """
        array = _check.real_array("chi2", chi2, shape=(self.replicas,))
        floor = _check.real("least", least, least=1.0)
        weights = _reweighting.reweighted(self.weights, array, method, data)
        left = _reweighting.effective(weights)
        if left < floor:
            raise InputError(
                f"chi2: of {self.replicas} replicas {left:.1f} are effective afterwards, fewer than "
                f"least = {show(floor)}: the new data say too much for reweighting; fit them"
            )
        return self._with(weights=weights)

    def evolved(self, operators: Operators, **options: Any) -> Ensemble:
        """Return the ensemble at the scales of some operators.

        Parameters
        ----------
        operators : Operators
        options
            As for `Operators.apply`.

        Returns
        -------
        Ensemble
        """
        if not isinstance(operators, Operators):
            _check.refuse("operators", operators, "operators must be Operators")
        return self._with(densities=operators.apply(self.densities, **options))

    def stream(self, operators: Operators, **options: Any) -> Iterator[Ensemble]:
        """Yield the ensemble at the scales of some operators one after another: needs memory for one only.

        Parameters
        ----------
        operators : Operators
        options
            As for `Operators.stream`, such as ``q2=[10.0, 100.0]``.

        Yields
        ------
        Ensemble
            Of one scale each.
        """
        if not isinstance(operators, Operators):
            _check.refuse("operators", operators, "operators must be Operators")
        return (self._with(densities=part) for part in operators.stream(self.densities, **options))

    def unweighted(self, replicas: int | None = None) -> Ensemble:
        """Return replicas of equal weight that stand for weighted ones, the likely ones several times.

        Parameters
        ----------
        replicas : int, optional
            How many; by default the effective number, rounded down.

        Returns
        -------
        Ensemble
            Weights are equal; a replica that is taken n times appears n times, with its `index`.

        Raises
        ------
        InputError
            If `replicas` is not a whole number from 1.

        Notes
        -----
        R. Ball et al., arXiv:1108.1758, section 3 (recalled from memory): marks at equal distances on the
        line of the summed weights; each takes the replica in whose part it falls. Here they stand in the
        middle of equal parts, so that equal weights give the replicas themselves; nothing is drawn at random.
        Sampling errors take what is taken several times for independent replicas and come out too small:
        ask the weighted ensemble for them.
        """
        most = int(self.effective_replicas * (1.0 + 1e-12))  # of N equal weights it is N to rounding
        count = most if replicas is None else _check.whole("replicas", replicas, least=1, most=10**7)
        taken = _reweighting.places(self.weights, count)
        held = self.densities
        below = held.below
        if below is not None:
            below = Below(below.momentum[:, taken], below.number[:, taken])
        made = Densities(
            held.grid, q2=held.q2, nf=held.nf, flavours=held.flavours,
            values=held.values[..., taken, :, :], below=below,
        )  # fmt: skip
        each = {name: getattr(self, name)[taken] for name in ("parameters", "index", "chi2", "chi2_data")}
        return self._with(densities=made, weights=None, **each)

    def _with(self, **changed: Any) -> Ensemble:
        kept = {name: getattr(self, name) for name in _ensemble_files.PARTS}
        kept |= {"densities": self.densities, **changed}
        return Ensemble(kept.pop("densities"), **kept)

    # ---- files -----------------------------------------------------------------------------------------

    def save(self, path: PathLike) -> None:
        """Store the ensemble, whole or not at all; `load` gives every bit back.

        Parameters
        ----------
        path : path-like

        Raises
        ------
        StoreError
            If the file cannot be written; an old one at `path` is untouched then.
        """
        parts = {name: getattr(self, name) for name in _ensemble_files.PARTS}
        _ensemble_files.save(path, self.densities, parts)

    @classmethod
    def load(cls, path: PathLike, *, copy: bool = False) -> Ensemble:
        """Read an ensemble that `save` wrote; the file is verified first.

        Parameters
        ----------
        path : path-like
        copy : bool
            Read into memory instead of mapping the file: for network file systems.

        Returns
        -------
        Ensemble

        Raises
        ------
        StoreError
            If the file is not ours, damaged, of a newer format, or does not hold an ensemble.
        """
        densities, parts = _ensemble_files.load(path, copy)
        return cls(densities, **parts)

    def to_csv(self, path: PathLike) -> None:
        """Write the replicas as a lattice; its columns are told in `scalewright.files.csv`.

        Parameters
        ----------
        path : path-like

        Raises
        ------
        InputError
            If replicas have weights, which a lattice does not hold: write those of `unweighted`.
        StoreError
            If the file cannot be written.
        """
        if self.weights.min() != self.weights.max():
            raise InputError("a lattice holds no weights: write that of unweighted()")
        self.densities.to_csv(path)

    # ---- in words --------------------------------------------------------------------------------------

    @property
    def _too_many_failed(self) -> bool:
        return len(self.failed) > _MANY_FAILED * (self.replicas + len(self.failed))

    def __repr__(self) -> str:
        """One line."""
        much = ", more than 1 per cent: see failed" if self._too_many_failed else ""
        lost = f", {len(self.failed)} failed{much}" if self.failed else ""
        return f"Ensemble({self.replicas} replicas, {len(self.names)} parameters{lost})"

    def __str__(self) -> str:
        """One screen."""
        total = self.replicas + len(self.failed)
        lines = ["Ensemble", f"  {self.replicas} replicas of {total}"]
        if self._too_many_failed:
            lines.append(f"  WARNING: {len(self.failed)} fits failed, more than 1 per cent: see failed")
        elif self.failed:
            lines.append(f"  {len(self.failed)} fits failed and are left out: see failed")
        if self.weights.min() != self.weights.max():
            lines.append(f"  weighted: {self.effective_replicas:.1f} are effective")
        if self.negative:
            lines.append(f"  {self.negative} pseudo-data were negative, and kept")
        lines += [f"  {note}" for note in self.notes]
        for what, values in (("pseudo-data", self.chi2), ("the data", self.chi2_data)):
            if self.data and np.isfinite(values).all():
                lines.append(f"  mean chi-square {self.weights @ values:.5g} to {what}, for {self.data} data")
        if self.replicas >= 2 and self.weights.max() < 1.0:
            size = max([10, *(len(name) for name in self.names)])
            for name in self.names[:40]:
                centre, spread = self.mean(name), self.std(name)
                line = f"{centre.value: .5g} +- {spread.value:.3g}"
                lines.append(f"  {name:<{size}}  {line}  (sampling {centre.error:.1g}, {spread.error:.1g})")
        return "\n".join(lines)

    def _repr_html_(self) -> str:
        return f"<pre>{html.escape(str(self))}</pre>"


def _frozen(values: Floats) -> Floats:
    array: Floats = np.array(values)
    array.flags.writeable = False
    return array
