"""What every kernel of the second writing returns, and the logarithms they share.

The second writing exists to be compared with the compiled kernels: it was written from
the papers alone, in another form where one was at hand, and is slow on purpose.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Regular = Callable[[Array, Array], Array]

CF = 4.0 / 3.0
CA = 3.0
TR = 0.5
ZETA2 = np.pi**2 / 6.0
ZETA3 = 1.2020569031595942854


@dataclass(frozen=True)
class Parts:
    """A distribution on [0, 1], in powers of a = alpha_s/(4 pi).

    Attributes
    ----------
    regular : callable
        Function of the arrays z and 1 - z (same shape), integrable up to z = 1.
    plus : tuple of float
        Coefficient k multiplies [ln^k(1-z)/(1-z)]_+ on [0, 1].
    local : float
        Coefficient of delta(1-z).
    """

    regular: Regular
    plus: tuple[float, ...]
    local: float


def nothing(z: Array, one_minus_z: Array) -> Array:
    """Vanish for every z."""
    return np.zeros_like(z)


ZERO = Parts(nothing, (), 0.0)


def log_z(z: Array, one_minus_z: Array) -> Array:
    """Return ln z, to full relative accuracy at both ends."""
    near_one = one_minus_z < 0.5
    safe = np.where(near_one, one_minus_z, 0.0)
    return np.where(near_one, np.log1p(-safe), np.log(z))


def log_one_minus_z(z: Array, one_minus_z: Array) -> Array:
    """Return ln(1-z), to full relative accuracy at both ends."""
    return log_z(one_minus_z, z)
