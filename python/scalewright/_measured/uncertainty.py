"""One uncertainty of a table: how large, additive or multiplicative, shared with which others.

Sizes are kept with their sign: a source that moves one datum up and another down is one source. Two rules
are stated rather than assumed. What scales with the value is multiplied by a fixed reference, never by the
prediction that is being fitted (R. Ball et al., arXiv:0912.2276). What is asymmetric is made symmetric by the
rule that the description names.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .._check import Floats

__all__ = ["ASYMMETRIC", "Uncertainty"]

#: Rules for a shift `up` at +1 sigma and `down` at -1 sigma, with mean shift s = (up - down)/2 and
#: d = (up + down)/2. "mean": s, value untouched (common practice, no source). "larger": the larger of |up|
#: and |down| with the sign of s, value untouched (common practice, no source). "shifted": the value moves by
#: d and the size is sqrt(s^2 + 2 d^2) with the sign of s (G. D'Agostini, physics/0403086: mean and variance
#: of a parabola through the three points; recalled from memory).
ASYMMETRIC = ("mean", "larger", "shifted")


@dataclass(frozen=True, eq=False)
class Uncertainty:
    """One uncertainty of a table.

    Parameters
    ----------
    name : str
        As in the description.
    size : ndarray, (datum,)
        In units of the datum for an additive one, as a fraction of it for a multiplicative one; signed.
    offset : ndarray, (datum,)
        What an asymmetric one adds to the printed value, in units of the datum.
    multiplicative : bool
        Whether it scales with the value.
    source : str, optional
        The nuisance parameter it belongs to; None: every datum has its own.
    """

    name: str
    size: Floats
    offset: Floats
    multiplicative: bool
    source: str | None

    def at(self, reference: Floats) -> Floats:
        """Return the size in units of the datum, (datum,), where multiplicative ones multiply `reference`."""
        return self.size * reference if self.multiplicative else self.size


def symmetric(up: Floats, down: Floats, rule: str) -> tuple[Floats, Floats]:
    """Return size and offset of shifts `up` and `down` by a rule of `ASYMMETRIC`."""
    mean, half = 0.5 * (up - down), 0.5 * (up + down)
    # a source that moves the value equally at both ends has mean 0: count it as positive
    sign = np.where(mean < 0.0, -1.0, 1.0)
    if rule == "mean":
        return mean, np.zeros_like(mean)
    if rule == "larger":
        return sign * np.maximum(np.abs(up), np.abs(down)), np.zeros_like(mean)
    return sign * np.sqrt(mean**2 + 2.0 * half**2), half
