"""Closure tests: fits to pseudo-data from a known law, and how often the truth lies inside their intervals.

The levels are those of R. Ball et al., arXiv:1410.8849 (recalled from memory):

level 0   the data are the law itself: a shape that contains it fits them exactly, from any start
level 1   the data fluctuate once: fits of the same data from different starts show what the search leaves
level 2   many sets of data, each with its own fluctuation, each fitted; with replicas of each set, which
          fluctuate a second time: the truth must lie inside 68 per cent of the 68 per cent intervals
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from . import _check
from ._check import Floats
from ._progress import Progress, watcher
from .densities import Densities
from .errors import ScalewrightError
from .fitting._starts import around
from .fitting.chi_square import ChiSquare
from .fitting.functionals import Functional
from .fitting.least_squares import FitResult, fit
from .fitting.maps import KnownMap
from .fitting.replicas import fit_replicas
from .fitting.shapes import Shape
from .forward import ForwardMap

__all__ = ["Closure", "Coverage", "Starts", "closure_test"]

#: The interval of one standard deviation of a normal distribution.
_ONE_SIGMA = 0.682689


@dataclass(frozen=True)
class Starts:
    """Fits of the same data from different starts.

    Parameters
    ----------
    chi2 : ndarray, (start,)
        Of those that converged.
    off : ndarray, (start, functional)
        Value minus truth, in units of the uncertainty.
    failed : int
        How many did not converge.
    """

    chi2: Floats
    off: Floats
    failed: int


@dataclass(frozen=True)
class Coverage:
    """How often the truth lies inside.

    Parameters
    ----------
    inside, expected, error : float
        Part of the sets; what it should be; its binomial error if it is what it should be.
    """

    inside: float
    expected: float
    error: float

    @property
    def is_fair(self) -> bool:
        """Whether the part lies within three binomial errors."""
        return abs(self.inside - self.expected) <= 3.0 * self.error


@dataclass(frozen=True)
class Closure:
    """What a closure test found.

    Attributes
    ----------
    functionals : tuple of str
    truth : ndarray, (functional,)
    data : int
        Number of data.
    level_0, level_1 : Starts or None
    values, errors : ndarray, (set, functional)
        Of the fits to each set, uncertainties by second derivatives.
    chi2 : ndarray, (set,)
    replica_mean, replica_std : ndarray, (set, functional)
        Of the replicas of each set; nan where there are none.
    replicas : int
        Replicas of each set, 0 for none.
    failed : dict
        Number of a set -> why its fit failed; it is left out.
    """

    functionals: tuple[str, ...]
    truth: Floats
    data: int
    level_0: Starts | None
    level_1: Starts | None
    values: Floats
    errors: Floats
    chi2: Floats
    replica_mean: Floats
    replica_std: Floats
    replicas: int
    failed: dict[int, str] = field(default_factory=dict)

    @property
    def sets(self) -> int:
        """Number of sets whose fit converged."""
        return len(self.values)

    @property
    def pulls(self) -> Floats:
        """(Value - truth) / uncertainty of each set, (set, functional)."""
        return (self.values - self.truth) / self.errors

    def coverage(self, name: str) -> Coverage:
        """How often the truth lies inside one uncertainty by second derivatives.

        Parameters
        ----------
        name : str
            A functional.

        Returns
        -------
        Coverage
        """
        return self._covered(self.pulls[:, self._place(name)], 1.0, _ONE_SIGMA)

    def replica_coverage(self, name: str) -> Coverage:
        """How often the truth lies within one standard deviation of the replicas around their mean.

        Parameters
        ----------
        name : str
            A functional.

        Returns
        -------
        Coverage
            What is expected is that of Student's distribution, for mean and deviation of finitely many.

        Raises
        ------
        InputError
            If there are no replicas.
        """
        from scipy.stats import t as student  # type: ignore[import-untyped]

        if not self.replicas:
            _check.refuse("replicas", 0, "this closure test has no replicas")
        place, count = self._place(name), self.replicas
        pulls = (self.replica_mean[:, place] - self.truth[place]) / self.replica_std[:, place]
        # (mean - truth) has the variance s^2 (1 + 1/n), and the deviation n - 1 degrees of freedom
        reach = 1.0 / np.sqrt(1.0 + 1.0 / count)
        expected = float(2.0 * student.cdf(reach, count - 1) - 1.0)
        return self._covered(pulls, 1.0, expected)

    def _covered(self, pulls: Floats, reach: float, expected: float) -> Coverage:
        inside = float((abs(pulls) < reach).mean())
        return Coverage(inside, expected, float(np.sqrt(expected * (1.0 - expected) / len(pulls))))

    def _place(self, name: str) -> int:
        return self.functionals.index(_check.choice("name", name, self.functionals))


def closure_test(
    fmap: Any,
    chi2: ChiSquare,
    shape: Shape,
    law: Densities,
    *,
    functionals: Sequence[str],
    sets: int,
    seed: int,
    levels: Sequence[int] = (0, 1, 2),
    starts: int = 4,
    replicas: int = 0,
    workers: int | None = 1,
    theory: Sequence[str] = (),
    priors: Mapping[str, tuple[float, float]] | None = None,
    progress: Progress = False,
) -> Closure:
    """Fit pseudo-data from a known law.

    Parameters
    ----------
    fmap : ForwardMap
        Under the theory of the law: theory parameters move it to first order around the truth.
    chi2 : ChiSquare
        Its measurements say where there are data and what their errors are; multiplicative ones are taken
        relative to the law.
    shape : Shape
    law : Densities
        One set, where the map starts.
    functionals : sequence of str
        What is compared, such as "alpha_s", "momentum(g)", "u_v(0.3)".
    sets : int
        Sets of pseudo-data at level 2.
    seed : int
        Set k is drawn from ``numpy.random.SeedSequence(seed, spawn_key=(k,))``.
    levels : sequence of {0, 1, 2}
    starts : int
        Fits from different starts at levels 0 and 1.
    replicas : int
        Of each set at level 2; 0 for uncertainties by second derivatives alone.
    workers : int, optional
        Processes for replicas.
    theory, priors
        As for `fit`. A prior is not drawn anew for each set: centred on the truth, it makes uncertainties
        cover more than their share.
    progress : bool or callable
        As for `fit_replicas`; counts sets.

    Returns
    -------
    Closure

    Raises
    ------
    InputError
        If the parts do not fit each other.
    ScalewrightError
        If no fit converged.
    """
    count = _check.whole("sets", sets, least=2, most=10**6)
    of_set = _check.whole("replicas", replicas, least=0)
    if of_set == 1:
        _check.refuse("replicas", replicas, "must be 0, or 2 and more")
    wanted = [_check.whole("level", level, least=0, most=2) for level in levels]
    test = _Test(fmap, chi2, shape, law, functionals, tuple(theory), dict(priors or {}), seed)
    report = watcher(progress, "closure")
    level_0 = test.from_starts(test.exact, starts) if 0 in wanted else None
    level_1 = test.from_starts(test.drawn(0), starts) if 1 in wanted else None
    rows: list[_Row] = []
    failed: dict[int, str] = {}
    for k in range(count if 2 in wanted else 0):
        try:
            rows.append(test.row(k, of_set, workers))
        except ScalewrightError as error:
            failed[k] = str(error)
        if report is not None:
            report(k + 1, count)
    if 2 in wanted and not rows:
        raise ScalewrightError(f"no fit of {count} sets converged; the first: {failed[0]}")
    size = len(test.functionals)
    columns = [np.array([row[place] for row in rows]).reshape(-1, size) for place in range(4)]
    return Closure(
        tuple(one.text for one in test.functionals), test.truth, len(chi2.measurements), level_0, level_1,
        columns[0], columns[1], np.array([row[4] for row in rows]), columns[2], columns[3], of_set, failed,
    )  # fmt: skip


_Row = tuple[Floats, Floats, Floats, Floats, float]


class _Test:
    """What the levels have in common: law, errors, and how a set is fitted."""

    def __init__(
        self, fmap: Any, chi2: ChiSquare, shape: Shape, law: Densities, functionals: Sequence[str],
        theory: tuple[str, ...], priors: dict[str, tuple[float, float]], seed: int,
    ) -> None:  # fmt: skip
        self._fmap = KnownMap(fmap) if isinstance(fmap, ForwardMap) else fmap
        self._shape, self._theory, self._priors = shape, theory, priors
        self._seed = _check.whole("seed", seed, least=0)
        self.functionals = [Functional(text) for text in functionals]
        for one in self.functionals:
            if one.parameter is not None and one.parameter not in theory:
                _check.refuse("functionals", one.text, "is not fitted: name it in theory")
        self.truth = np.array([one.of_law(law, fmap.theory) for one in self.functionals])
        self.exact: Floats = np.asarray(fmap.predict(law)[0])
        self._law = chi2.with_reference(self.exact)

    def drawn(self, k: int) -> Floats:
        """Return set k of pseudo-data, (datum,)."""
        rng = np.random.default_rng(np.random.SeedSequence(self._seed, spawn_key=(k,)))
        return self._law.measurements.pseudo_data(rng, self.exact).values

    def fitted(self, values: Floats, start: Any = None) -> tuple[ChiSquare, FitResult]:
        """Fit one set."""
        chi2 = ChiSquare(self._law.measurements.with_values(values), self._law.form, self.exact)
        return chi2, fit(self._fmap, chi2, self._shape, theory=self._theory, priors=self._priors, start=start)

    def row(self, k: int, replicas: int, workers: int | None) -> _Row:
        """Return values, errors, mean and deviation of replicas, and chi-square of set k."""
        chi2, result = self.fitted(self.drawn(k))
        if not result.converged or result.covariance is None:
            raise ScalewrightError("; ".join(result.status[:2]))
        pairs = np.array([one.of_fit(result) for one in self.functionals]).reshape(-1, 2)
        mean = spread = np.full(len(pairs), np.nan)
        if replicas:
            seed = int(np.random.SeedSequence(self._seed, spawn_key=(k, 1)).generate_state(1)[0])
            many = fit_replicas(
                self._fmap, chi2, self._shape, replicas=replicas, seed=seed, theory=self._theory,
                priors=self._priors, workers=workers, start=result.parameters,
            )  # fmt: skip
            found = np.stack([one.of_ensemble(many) for one in self.functionals])
            mean, spread = found.mean(axis=1), found.std(axis=1, ddof=1)
        return pairs[:, 0], pairs[:, 1], mean, spread, result.chi2

    def from_starts(self, values: Floats, starts: int) -> Starts:
        """Fit the same data from where the shape starts, and from around it."""
        count = _check.whole("starts", starts, least=1)
        _, first = self.fitted(values)
        results = [first, *(self.fitted(values, start)[1] for start in self._around(first, count - 1))]
        good = [result for result in results if result.converged]
        if not good:
            raise ScalewrightError(f"no fit from {count} starts converged: {first.status[0]}")
        errors = np.array([one.of_fit(good[0])[1] for one in self.functionals])
        off = [np.array([one.of_fit(r)[0] for one in self.functionals]) - self.truth for r in good]
        return Starts(np.array([r.chi2 for r in good]), np.array(off) / errors, len(results) - len(good))

    def _around(self, result: FitResult, count: int) -> list[Floats]:
        """Return starts a few uncertainties around a fit, inside the bounds."""
        rng = np.random.default_rng(np.random.SeedSequence(self._seed, spawn_key=(0, 2)))
        return around(result, count, rng)
