"""The error model of several tables: covariance, nuisance parameters, pseudo-data; one model, three uses.

Sources that share a name are one nuisance parameter, in one table or in many. What scales with the value is
multiplied by a reference that is fixed while a fit runs.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from .._check import Floats
from .correlated import Correlated
from .table import Table
from .uncertainty import Uncertainty

__all__ = ["covariance", "names_of_sources", "nuisance", "pseudo_data", "shared_sources"]


def _slices(tables: Sequence[Table]) -> Iterator[tuple[Table, slice]]:
    """Yield each table and where its data stand among all."""
    start = 0
    for table in tables:
        yield table, slice(start, start + len(table))
        start += len(table)


def shared_sources(tables: Sequence[Table]) -> tuple[str, ...]:
    """Return the names of nuisance parameters, in the order of their first use."""
    parts = (part for table in tables for part in table.uncertainties)
    return tuple(dict.fromkeys(part.source for part in parts if part.source is not None))


def names_of_sources(tables: Sequence[Table]) -> tuple[str, ...]:
    """Return the names of all columns of `nuisance`: shared sources, then directions of the matrices."""
    directions = [
        f"{table.title}: {part.name}: direction {number + 1}"
        for table in tables
        for part in table.correlated
        for number in range(len(table))
    ]
    return (*shared_sources(tables), *directions)


def _shared(tables: Sequence[Table], reference: Floats) -> Floats:
    """Return shifts by the shared sources, (datum, source)."""
    names = {name: place for place, name in enumerate(shared_sources(tables))}
    shifts = np.zeros((reference.size, len(names)))
    for table, where in _slices(tables):
        for part in table.uncertainties:
            if part.source is not None:
                shifts[where, names[part.source]] += part.at(reference[where])
    return shifts


def _own_variance(table: Table, reference: Floats) -> Floats:
    """Return variances of the errors that each datum has for itself, matrices apart."""
    sizes = [part.at(reference) for part in table.uncertainties if part.source is None]
    return np.sum(np.square(sizes), axis=0) if sizes else np.zeros(len(table))


def covariance(tables: Sequence[Table], reference: Floats) -> Floats:
    """Return the covariance of all data, (datum, datum)."""
    shifts = _shared(tables, reference)
    total: Floats = shifts @ shifts.T
    for table, where in _slices(tables):
        block = total[where, where]
        block += np.diag(_own_variance(table, reference[where]))
        for part in table.correlated:
            block += part.covariance(reference[where])
    return total


def nuisance(tables: Sequence[Table], reference: Floats) -> tuple[Floats, Floats]:
    """Return independent standard deviations (datum,) and shifts (datum, source) of equal covariance."""
    shared = _shared(tables, reference)
    variance = np.zeros(reference.size)
    columns = [shared]
    for table, where in _slices(tables):
        variance[where] = _own_variance(table, reference[where])
        for part in table.correlated:
            own, inside = part.nuisance(reference[where])
            variance[where] += own
            column = np.zeros((reference.size, inside.shape[1]))
            column[where] = inside
            columns.append(column)
    return np.sqrt(variance), np.concatenate(columns, axis=1)


def pseudo_data(tables: Sequence[Table], rng: np.random.Generator, truth: Floats, replicas: int) -> Floats:
    """Return (replica, datum): (truth + additive shifts) times the product over sources of (1 + shift)."""
    names = shared_sources(tables)
    drawn = dict(zip(names, rng.standard_normal((len(names), replicas, 1)), strict=True))
    shift, factor = np.zeros((replicas, truth.size)), np.ones((replicas, truth.size))
    for table, where in _slices(tables):
        parts: list[Uncertainty | Correlated] = [*table.uncertainties, *table.correlated]
        factors: dict[object, Floats] = {}
        for part in parts:
            moves = part.size * _draws(part, drawn, rng, (replicas, len(table)))
            if part.multiplicative:
                # columns of one source are one error, of the sum of their sizes, as in the covariance
                one = getattr(part, "source", None) or part
                factors[one] = factors[one] + moves if one in factors else moves
            else:
                shift[:, where] += moves
        for moves in factors.values():
            factor[:, where] *= 1.0 + moves
    return (truth + shift) * factor


def _draws(
    part: Uncertainty | Correlated, drawn: dict[str, Floats], rng: np.random.Generator, shape: tuple[int, int]
) -> Floats:
    """Return unit normal numbers, (replica, datum) or (replica, 1), correlated as the part says."""
    if isinstance(part, Correlated):
        return part.draw(rng, shape)
    return rng.standard_normal(shape) if part.source is None else drawn[part.source]
