"""Families of polynomials on 0 <= y <= 1, as matrices from powers of y.

Which one when: "plain" for one or two coefficients; "chebyshev" for more, since its members are almost
independent; "bernstein" where all coefficients positive must make a density positive.
"""

from __future__ import annotations

from math import comb

import numpy as np

from .. import _check
from .._check import Floats

__all__ = ["FAMILIES", "MOST", "powers"]

FAMILIES = ("plain", "chebyshev", "bernstein")

#: Highest degree: coefficients of T_8(1 - 2y) in powers of y reach 2e5, and a moment loses as many roundings.
MOST = 8


def powers(family: str, degree: int) -> Floats:
    """Return each member of a family in powers of y.

    Parameters
    ----------
    family : {"plain", "chebyshev", "bernstein"}
        y^k; T_k(1 - 2y); binomial(n, k) y^k (1-y)^(n-k).
    degree : int
        n, 0 to 8.

    Returns
    -------
    ndarray, (k, power)

    Examples
    --------
    >>> powers("chebyshev", 2)
    array([[ 1.,  0.,  0.],
           [ 1., -2.,  0.],
           [ 1., -8.,  8.]])
    """
    _check.choice("polynomial", family, FAMILIES)
    _check.whole("degree", degree, least=0, most=MOST)
    matrix = np.zeros((degree + 1, degree + 1))
    for k in range(degree + 1):
        if family == "plain":
            matrix[k, k] = 1.0
        elif family == "chebyshev":
            of_t = np.polynomial.chebyshev.cheb2poly([0.0] * k + [1.0])
            in_y = np.polynomial.Polynomial(of_t)(np.polynomial.Polynomial([1.0, -2.0]))
            matrix[k, : k + 1] = in_y.coef
        else:
            for j in range(k, degree + 1):
                matrix[k, j] = comb(degree, k) * comb(degree - k, j - k) * (-1.0) ** (j - k)
    return matrix
