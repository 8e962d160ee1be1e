"""Moments of all flavours on one contour, as q + qbar, q - qbar and the gluon."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from mellin.inputs import Moments

Complex = NDArray[np.complex128]
QUARKS = range(1, 7)
GLUON = 21


@dataclass
class State:
    """Moments at n values of N; row i of `plus` and `minus` is the quark of PDG number i+1."""

    plus: Complex
    minus: Complex
    gluon: Complex

    @classmethod
    def of(cls, moments: Mapping[int, Moments], n: Complex) -> State:
        """Evaluate the moments of every flavour; those not given are zero."""
        unknown = set(moments) - {GLUON, *QUARKS, *(-q for q in QUARKS)}
        if unknown:
            message = f"no parton has the PDG number {sorted(unknown)}"
            raise ValueError(message)
        zero = np.zeros_like(n)
        values = {pdg: np.asarray(f(n)) for pdg, f in moments.items()}
        quarks = [(values.get(q, zero), values.get(-q, zero)) for q in QUARKS]
        return cls(
            np.stack([q + anti for q, anti in quarks]),
            np.stack([q - anti for q, anti in quarks]),
            values.get(GLUON, zero),
        )

    def combination(self, plus: Mapping[int, float], minus: Mapping[int, float]) -> Complex:
        """Return sum_q plus[q] (q + qbar) + minus[q] (q - qbar); plus[21] is of the gluon."""
        total = np.zeros_like(self.gluon)
        for q, weight in plus.items():
            total = total + weight * (self.gluon if q == GLUON else self.plus[q - 1])
        for q, weight in minus.items():
            total = total + weight * self.minus[q - 1]
        return total


def halves(combination: Mapping[int, float]) -> tuple[dict[int, float], dict[int, float]]:
    """Split sum_f c_f f into its parts in q + qbar (and the gluon) and in q - qbar."""
    plus, minus = {}, {}
    for q in QUARKS:
        c, anti = combination.get(q, 0.0), combination.get(-q, 0.0)
        plus[q], minus[q] = (c + anti) / 2, (c - anti) / 2
    plus[GLUON] = combination.get(GLUON, 0.0)
    keep = ({q: c for q, c in part.items() if c != 0.0} for part in (plus, minus))
    return tuple(keep)  # type: ignore[return-value]
