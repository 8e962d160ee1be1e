"""What commands write beside stored files: predictions, parameters and densities as CSV."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from .._check import Floats
from ..densities import Densities
from ..files.cells import Cells, write_cells
from ..files.csv import Lattice, write_lattice
from ..fitting.chi_square import ChiSquare
from ..fitting.ensemble import Ensemble
from ..fitting.least_squares import FitResult


def write_columns(file: str, columns: Mapping[str, Sequence[str]]) -> None:
    """Write columns of equal length."""
    rows = tuple(zip(*columns.values(), strict=True))
    write_cells(file, Cells(tuple(columns), rows, file, tuple(range(2, len(rows) + 2))))


def numbers(values: Floats) -> list[str]:
    """Return numbers with every bit, nothing where there is none."""
    return ["" if np.isnan(value) else repr(value) for value in np.asarray(values).tolist()]


def write_predictions(
    file: str, chi_square: ChiSquare, prediction: Floats, error: Floats, spread: Floats | None = None,
    orders: Mapping[str, Sequence[str]] | None = None,
) -> None:  # fmt: skip
    """Write predictions beside the data, one line a datum.

    Parameters
    ----------
    file : str
    chi_square : ChiSquare
        What says how large uncertainties are.
    prediction, error : ndarray, (datum,)
        With its numerical error.
    spread : ndarray, (datum,), optional
        Standard deviation over replicas.
    orders : mapping, optional
        Part of the prediction -> its order, and regime -> that of each datum.
    """
    measured = chi_square.measurements
    columns: dict[str, Sequence[str]] = {
        "table": [measured.tables[number] for number in measured.table_of],
        "x": numbers(measured.x),
        "q2": numbers(measured.q2),
        "y": numbers(measured.y),
        "value": numbers(measured.value),
        "uncertainty": numbers(np.sqrt(np.diagonal(chi_square.covariance))),
        "prediction": numbers(prediction),
        "numerical error": numbers(error),
    }
    if spread is not None:
        columns["spread"] = numbers(spread)
    columns["pull"] = numbers(chi_square.pulls(prediction))
    columns["pull after shifts"] = numbers(chi_square.pulls(prediction, shifted=True))
    for name, words in (orders or {}).items():
        columns[name if name == "regime" else f"order of {name}"] = words
    write_columns(file, columns)


def write_parameters(file: str, result: FitResult, ensemble: Ensemble | None) -> None:
    """Write parameters, one line each: best fit, uncertainty, replicas, and what became of it."""
    state = ["fitted" if name not in result.at_bounds else f"{result.at_bounds[name]} bound"
             for name in result.names]  # fmt: skip
    columns: dict[str, Sequence[str]] = {
        "name": result.names,
        "state": state,
        "value": numbers(result.parameters),
        "uncertainty": numbers(result.errors),
    }
    if ensemble is not None:
        columns |= _of_replicas(ensemble)
    solved = result.solved
    rest = [""] * len(solved)
    added = {"name": list(solved), "state": ["sum rule"] * len(solved)}
    added["value"] = numbers(np.array(list(solved.values())))
    write_columns(file, {key: [*column, *added.get(key, rest)] for key, column in columns.items()})


def _of_replicas(ensemble: Ensemble) -> dict[str, Sequence[str]]:
    """Return mean and deviation with sampling errors, and intervals where replicas are enough for them."""
    mean, spread = ensemble.mean(ensemble.parameters), ensemble.std(ensemble.parameters)
    columns: dict[str, Sequence[str]] = {
        "replica mean": numbers(ensemble.parameters.mean(axis=0)),
        "replica deviation": numbers(ensemble.parameters.std(axis=0, ddof=1)),
        "sampling error of mean": numbers(mean.error),
        "sampling error of deviation": numbers(spread.error),
    }
    for words, level in (("68", 0.6827), ("95", 0.95)):
        for side, end in zip(("from", "to"), ensemble.interval(ensemble.parameters, level), strict=True):
            known = np.where(np.isnan(end.error), np.nan, end.value)
            columns[f"{words} per cent {side}"] = numbers(known)
    return columns


def write_table(densities: Densities, file: str, x: Floats | None) -> None:
    """Write densities as a CSV lattice, at the nodes or at some x."""
    if x is None:
        densities.to_csv(file)
        return
    points = np.unique(np.atleast_1d(x))[::-1]
    values = densities.grid.interpolate(densities.values, np.ascontiguousarray(points))
    q2, nf = np.atleast_1d(densities.q2), np.atleast_1d(densities.nf)
    replicas = tuple(range(densities.replicas))
    write_lattice(file, Lattice(q2, nf, replicas, densities.flavours, points, np.atleast_1d(values)))
