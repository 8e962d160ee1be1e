"""Weights of replicas by how well they describe new data.

Which one when: "Giele-Keller" (W. Giele, S. Keller, hep-ph/9803393), exp(-chi2/2), the likelihood of the
data: right where replicas are drawn from a prior. "1012.0836" (R. Ball et al.), chi^(n-1) exp(-chi2/2), the
density of chi: proposed for replicas that are fits to pseudo-data. They answer different questions and
differ; common practice is divided, so that the method must be named.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats, Integers
from ..errors import InputError

__all__ = ["METHODS", "effective", "normalised", "places", "reweighted"]

METHODS = ("Giele-Keller", "1012.0836")


def reweighted(weights: Floats, chi2: Floats, method: str, data: int | None) -> Floats:
    """Return weights, of sum 1, after new data.

    Parameters
    ----------
    weights : ndarray, (replica,)
        Before.
    chi2 : ndarray, (replica,)
        Of the new data.
    method : {"Giele-Keller", "1012.0836"}
    data : int, optional
        Number of new data; "1012.0836" needs it.

    Returns
    -------
    ndarray, (replica,)
    """
    _check.choice("method", method, METHODS)
    _check.refuse_where("chi2", chi2, chi2 < 0.0, "chi2 must not be negative")
    logarithm = -0.5 * chi2
    if method == "1012.0836":
        if data is None:
            raise InputError('data: the method "1012.0836" needs the number of new data')
        count = _check.whole("data", data, least=1)
        if count > 1:
            with np.errstate(divide="ignore"):  # a perfect description has weight 0
                logarithm = logarithm + 0.5 * (count - 1) * np.log(chi2)
    top = logarithm[weights > 0.0].max()
    if not np.isfinite(top):
        raise InputError("chi2 is 0 for every replica: no weights follow from it")
    found = weights * np.exp(np.minimum(logarithm - top, 0.0))
    return np.asarray(found / found.sum())


def normalised(given: ArrayLike | None, count: int) -> Floats:
    """Return weights of sum 1."""
    if given is None:
        return np.full(count, 1.0 / count)
    weights = _check.real_array("weights", given, shape=(count,))
    _check.refuse_where("weights", weights, weights < 0.0, "weights must not be negative")
    if not weights.any():
        _check.refuse("weights", weights, "weights must not all be 0")
    total = weights.sum()
    # those that are normalised keep their bits
    return weights if abs(total - 1.0) < 1e-12 else weights / total


def places(weights: Floats, count: int) -> Integers:
    """Return which replicas `count` of equal weight are, in rising order (arXiv:1108.1758)."""
    ends = np.cumsum(weights)
    marks = (np.arange(count) + 0.5) / count * ends[-1]
    return np.asarray(np.minimum(np.searchsorted(ends, marks, side="left"), weights.size - 1))


def effective(weights: Floats) -> float:
    """Return the effective number of replicas, the exponential of the entropy (arXiv:1012.0836, eq. 10).

    The number of the equation is recalled from memory.
    """
    kept = weights[weights > 0.0]
    return float(np.exp(-(kept * np.log(kept)).sum()))
