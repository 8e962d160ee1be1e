"""The published benchmark of parton evolution, and how far our numbers are from it.

Sources, input and what is known of the digits: `data/benchmark/README.md`.
"""

from __future__ import annotations

import csv
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from importlib import resources
from typing import Any

import numpy as np

from .._check import Floats
from ..build import build_operators
from ..densities import Densities
from ..grid import ChebyshevGrid
from ..theory import Coupling, QuarkMasses, Theory

ORDERS = ("LO", "NLO", "NNLO")
SCHEMES = {"fixed4": "four flavours", "variable": "three to five flavours"}
START_Q2, END_Q2 = 2.0, 1e4

# The columns of the tables, in our names.
QUANTITIES = {
    "x*u_v": "u_v",
    "x*d_v": "d_v",
    "x*(dbar-ubar)": "dbar - ubar",
    "2*x*(dbar+ubar)": "2*dbar + 2*ubar",
    "x*(s-sbar)": "s_v",
    "x*(s+sbar)": "s+",
    "x*(c+cbar)": "c+",
    "x*(b+bbar)": "b+",
    "x*g": "g",
}


@dataclass(frozen=True)
class Entry:
    """One published number.

    Attributes
    ----------
    x
        Momentum fraction.
    quantity
        A key of `QUANTITIES`.
    text
        The number as printed.
    """

    x: float
    quantity: str
    text: str

    @property
    def unit(self) -> float:
        """One unit of the last printed digit."""
        mantissa, exponent = self.text.lower().split("e")
        return 10.0 ** (int(exponent) - len(mantissa.partition(".")[2]))


@dataclass(frozen=True)
class Comparison:
    """One table against our numbers.

    Attributes
    ----------
    order, scheme
        Which table.
    entries
        What is published.
    off
        Ours minus published in units of the last printed digit, one an entry. A perfect number is off by up
        to one half.
    """

    order: str
    scheme: str
    entries: tuple[Entry, ...]
    off: Floats

    @property
    def worst(self) -> int:
        """Place of the entry that is off most."""
        return int(np.argmax(abs(self.off)))


def read(order: str, scheme: str) -> tuple[Entry, ...]:
    """Read one table.

    Parameters
    ----------
    order : {"LO", "NLO", "NNLO"}
    scheme : {"fixed4", "variable"}
    """
    place = resources.files("scalewright") / "data" / "benchmark" / f"{order.lower()}_{scheme}.csv"
    rows = csv.DictReader(place.read_text(encoding="utf-8").splitlines())
    return tuple(Entry(float(row["x"]), row["quantity"], row["published"]) for row in rows)


def theory(order: str, scheme: str) -> Theory:
    """Return what the table assumes."""
    fixed = scheme == "fixed4"
    # The charm threshold is the start scale itself: met exactly as a scale, but not as sqrt(2) squared.
    options: dict[str, Any] = {} if fixed else {"thresholds_q2": (START_Q2, 4.5**2, 175.0**2)}
    return Theory(
        order=order,
        coupling=Coupling(0.35, q2=START_Q2, nf=4 if fixed else 3),
        masses=QuarkMasses(charm=np.sqrt(2.0), bottom=4.5, top=175.0, kind="pole"),
        flavours=4 if fixed else (3, 5),
        heavy_gluon_element="compact",
        **options,
    )


def toy(
    valence: tuple[Any, Any] = (5.107200, 3.064320), gluon: Any = 1.7, sea: Any = 0.1939875, rise: Any = 0.0
) -> Mapping[int, Callable[[Floats], Floats]]:
    """Return the published input as functions of x, or one near it.

    Parameters
    ----------
    valence, gluon, sea : float or ndarray, (replica, 1)
        Normalisations of u_v and d_v, g and dbar.
    rise : float or ndarray, (replica, 1)
        Added to the power of x of gluon and sea.
    """

    def dbar(x: Floats) -> Floats:
        return np.asarray(sea * x ** (rise - 0.1) * (1 - x) ** 6)

    def strange(x: Floats) -> Floats:
        return 0.2 * (2 - x) * dbar(x)

    return {
        21: lambda x: np.asarray(gluon * x ** (rise - 0.1) * (1 - x) ** 5),
        1: lambda x: np.asarray(valence[1] * x**0.8 * (1 - x) ** 4) + dbar(x),
        -1: dbar,
        2: lambda x: np.asarray(valence[0] * x**0.8 * (1 - x) ** 3) + (1 - x) * dbar(x),
        -2: lambda x: (1 - x) * dbar(x),
        3: strange,
        -3: strange,
    }


def compare(order: str, scheme: str, grid: ChebyshevGrid) -> Comparison:
    """Evolve the published input and compare with one table.

    Parameters
    ----------
    order : {"LO", "NLO", "NNLO"}
    scheme : {"fixed4", "variable"}
    grid : ChebyshevGrid
        Down to x = 1e-7 at least.
    """
    nf = 4 if scheme == "fixed4" else 3
    start = Densities.sample(grid, q2=START_Q2, nf=nf, functions=toy())
    operators = build_operators(theory(order, scheme), grid, start_q2=START_Q2, start_nf=nf, q2=[END_Q2])
    evolved = operators.apply(start, missing="zero")
    entries = read(order, scheme)
    off = [
        (float(evolved.at(END_Q2, entry.x, QUANTITIES[entry.quantity])[0]) - float(entry.text)) / entry.unit
        for entry in entries
    ]
    return Comparison(order, scheme, entries, np.array(off))
