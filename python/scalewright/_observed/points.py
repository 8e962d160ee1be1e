"""Points as arrays: what is measured where, in the form in which rows are computed.

Made of anything that has the attributes of `Measurements.rows`; checked here once more, since points may come
from elsewhere.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from .. import _check
from .._check import Floats, Integers, show
from .._measured.rows import NUCLEON_M2
from ..errors import InputError, RangeError
from ..grid import ChebyshevGrid

__all__ = ["MEASURES", "NEED_Y", "Points"]

MEASURES = ("F2", "FL", "F1", "xF3", "reduced_cross_section", "d2sigma_dx_dq2", "d2sigma_dx_dy")
NEED_Y = ("reduced_cross_section", "d2sigma_dx_dq2", "d2sigma_dx_dy")
_BEAMS = ("e-", "e+", "nu", "nubar")
_TAGS = {None: 0, "": 0, "charm": 4, "bottom": 5}
_PROTONS = {"proton": 1.0, "neutron": 0.0, "deuteron": 0.5, "isoscalar": 0.5}
#: y may exceed 1 by the rounding of its computation; a y that differs from Q^2/(x (s - M^2)) by more than
#: this part is another y.
_ROUNDING = 1e-12
_WRONG_Y = 0.05
#: Below it 1/y means nothing (far below any experiment).
_LEAST_Y = 1e-12


@dataclass(frozen=True, eq=False)
class Points:
    """Points, one entry each.

    Parameters
    ----------
    x, q2, y, s : ndarray, (point,)
        Q^2 and s in GeV^2; y and s are nan where they do not matter.
    polarisation : ndarray, (point,)
        Of the beam, in [-1, 1].
    measure, beam : tuple of str, (point,)
        As in `MEASURES`; e-, e+, nu or nubar.
    is_charged, is_photon : ndarray of bool, (point,)
        Whether a W is exchanged; whether the photon alone.
    tag : ndarray of int, (point,)
        PDG number of the tagged quark, 0 where none is.
    protons : ndarray, (point,)
        Fraction of protons in the target.
    target : tuple of str
        Its name, for reports.
    place : tuple of str
        Where each point stands, for messages.
    """

    x: Floats
    q2: Floats
    y: Floats
    s: Floats
    polarisation: Floats
    measure: tuple[str, ...]
    beam: tuple[str, ...]
    is_charged: NDArray[np.bool_]
    is_photon: NDArray[np.bool_]
    tag: Integers
    protons: Floats
    target: tuple[str, ...]
    place: tuple[str, ...]

    def __len__(self) -> int:
        return int(self.x.size)

    @property
    def is_neutral(self) -> NDArray[np.bool_]:
        """Whether a neutral boson is exchanged, (point,)."""
        return ~self.is_charged

    @property
    def is_negative(self) -> NDArray[np.bool_]:
        """Whether the beam is e- or nubar, so that a charged boson is W-, (point,)."""
        return np.array([beam in ("e-", "nubar") for beam in self.beam], dtype=bool)

    @property
    def is_neutrino(self) -> NDArray[np.bool_]:
        """Whether the beam is one of neutrinos or antineutrinos, (point,)."""
        return np.array([beam.startswith("nu") for beam in self.beam], dtype=bool)

    @property
    def sign(self) -> Floats:
        """+1 for e+ and nubar, whose xF3 enters cross sections with a minus sign, else -1, (point,)."""
        return np.array([1.0 if beam in ("e+", "nubar") else -1.0 for beam in self.beam])

    @classmethod
    def of(cls, rows: Any) -> Points:
        """Make points of an object with the attributes of `Measurements.rows`, all checked.

        Raises
        ------
        InputError
            If an attribute is missing, unknown or outside its range; the message names the point.
        """
        count = len(np.atleast_1d(_attribute(rows, "x")))
        place = tuple(getattr(rows, "place", None) or (f"point {index}" for index in range(count)))
        columns = {
            name: _column(getattr(rows, name, default), count, name) for name, default in _DEFAULTS.items()
        }
        if count == 0:
            raise InputError("points: there must be at least one")
        lists = _together(columns) or _one_by_one(columns, place)
        x, q2, y, s, polarisation, measure, beam, is_charged, is_photon, tag, protons, target = lists
        return cls(
            _real(x),
            _real(q2),
            _real(y),
            _real(s),
            _real(polarisation),
            tuple(measure),
            tuple(beam),
            np.asarray(is_charged, dtype=bool),
            np.asarray(is_photon, dtype=bool),
            np.asarray(tag, dtype=np.int64),
            np.asarray(protons, dtype=float),
            tuple(target),
            place,
        )

    def part(self, chosen: Any) -> Points:
        """Return some of the points, by their indices."""
        numbers = np.atleast_1d(np.asarray(chosen))
        columns: dict[str, Any] = {}
        for field in fields(self):
            value = getattr(self, field.name)
            columns[field.name] = value[numbers] if isinstance(value, np.ndarray) else _picked(value, numbers)
        return Points(**columns)

    def refuse_outside(self, grid: ChebyshevGrid) -> None:
        """Raise a `RangeError` that names the first point with x below the grid."""
        low = self.x < grid.x_min * (1.0 - 1e-13)
        if low.any():
            row = int(np.argmax(low))
            allowed = f"x must lie in [{show(grid.x_min)}, 1], that of the grid"
            raise RangeError(f"{self.place[row]}: x = {show(self.x[row])}: {allowed}")


_DEFAULTS: dict[str, object] = {
    "x": None,
    "q2": None,
    "y": np.nan,
    "s": np.nan,
    "polarisation": 0.0,
    "measure": None,
    "current": "neutral",
    "exchange": None,
    "beam": None,
    "target": "proton",
    "tagged": None,
}


def _real(values: Sequence[Any] | Floats) -> Floats:
    return np.asarray(values, dtype=np.float64)


def _picked(values: tuple[str, ...], numbers: NDArray[Any]) -> tuple[str, ...]:
    return tuple(map(values.__getitem__, numbers.tolist()))


def _attribute(rows: Any, name: str) -> Any:
    value = getattr(rows, name, None)
    if value is None:
        raise InputError(f"points: no attribute {name}: make them with Measurements")
    return value


def _column(given: Any, count: int, name: str) -> Sequence[Any]:
    """Return one entry a point; a single value stands for all."""
    is_list = isinstance(given, list | tuple | np.ndarray) and not (name == "target" and hasattr(given, "z"))
    if not is_list or (isinstance(given, np.ndarray) and given.ndim == 0):
        return [given] * count
    if len(given) != count:
        raise InputError(f"points.{name}: there are {len(given)} entries for {count} points")
    return given.tolist() if isinstance(given, np.ndarray) else list(given)


def _one_by_one(columns: dict[str, Sequence[Any]], place: Sequence[str]) -> list[Any]:
    """Return the columns of `Points` but the last, every point checked by itself."""
    entries = [
        _entry({name: column[row] for name, column in columns.items()}, place[row])
        for row in range(len(place))
    ]
    return [list(column) for column in zip(*entries, strict=True)]


def _together(columns: dict[str, Sequence[Any]]) -> list[Any] | None:
    """Return the same by column, combinations of words checked once each; None if anything is not right.

    Who wants to know what is wrong asks `_one_by_one`.
    """
    numbers = {name: _floats(columns[name]) for name in ("x", "q2", "y", "s", "polarisation")}
    x, q2, y, s, spin = numbers.values()
    if x is None or q2 is None or y is None or s is None or spin is None:
        return None
    spin = np.where(np.isnan(spin), 0.0, spin)
    words = zip(*(columns[name] for name in _WORDS), (spin != 0.0).tolist(), strict=True)
    known: dict[Any, tuple[Any, ...]] = {}
    entries = []
    try:
        for row, word in enumerate(words):
            if word not in known:
                known[word] = _checked({name: column[row] for name, column in columns.items()})
            entries.append(known[word])
    except (InputError, TypeError):  # or a target that cannot be hashed
        return None
    *_, measure, beam, charged, photon, tag, protons, target = zip(*entries, strict=True)
    good = (x > 0.0) & (x <= 1.0) & (q2 > 0.0) & (q2 < np.inf) & (np.abs(spin) <= 1.0) & ~np.isinf(y)
    good &= np.isnan(s) | ((s > NUCLEON_M2) & (s < np.inf))
    if not good.all():
        return None
    from_s = q2 / (x * (s - NUCLEON_M2))
    good = ~(np.abs(y - from_s) > _WRONG_Y * from_s)
    y = np.where(np.isnan(s), y, from_s)
    needed = np.array([one in NEED_Y for one in measure])
    good &= ~needed | ((y >= _LEAST_Y) & (y <= 1.0 + _ROUNDING))
    y = np.where(needed | ((y > 0.0) & (y <= 1.0)), y, np.nan)
    return [x, q2, y, s, spin, measure, beam, charged, photon, tag, protons, target] if good.all() else None


_WORDS = ("measure", "current", "exchange", "beam", "target", "tagged")


def _floats(column: Sequence[Any]) -> Floats | None:
    """Return numbers with nan for None; None where an entry is neither."""
    if not set(map(type, column)) <= {float, int, np.float64, type(None)}:
        return None
    return np.array([np.nan if value is None else value for value in column], dtype=np.float64)


def _entry(given: dict[str, Any], place: str) -> tuple[Any, ...]:
    """Check one point and return it in the order of `Points`."""
    try:
        return _checked(given)
    except InputError as error:
        raise InputError(f"{place}: {error}") from None


def _checked(given: dict[str, Any]) -> tuple[Any, ...]:
    measure = _check.choice("measure", given["measure"], MEASURES)
    is_charged = _check.choice("current", given["current"], ("neutral", "charged")) == "charged"
    exchange = given["exchange"] or ("W" if is_charged else "photon+Z")
    _check.choice("exchange", exchange, ("W",) if is_charged else ("photon", "photon+Z"))
    x = _check.real("x", given["x"], above=0.0, most=1.0)
    q2 = _check.real("q2", given["q2"], above=0.0, unit="GeV^2")
    polarisation = _check.real("polarisation", given["polarisation"] or 0.0, least=-1.0, most=1.0)
    beam = given["beam"]
    if beam is None and exchange == "photon" and measure not in NEED_Y:
        beam = "e-"
    _check.choice("beam", beam, _BEAMS if is_charged else _BEAMS[:2])
    if beam.startswith("nu") and polarisation != 0.0:
        _check.refuse("polarisation", polarisation, "a neutrino has one helicity; leave it out")
    if not isinstance(given["tagged"], str | None) or given["tagged"] not in _TAGS:
        _check.choice("tagged", given["tagged"], ("charm", "bottom"))
    y, s = _inelasticity(x, q2, given["y"], given["s"], measure)
    protons, target = _target(given["target"])
    tag = _TAGS[given["tagged"]]
    photon = exchange == "photon"
    return x, q2, y, s, polarisation, measure, beam, is_charged, photon, tag, protons, target


def _inelasticity(x: float, q2: float, y: Any, s: Any, measure: str) -> tuple[float, float]:
    """Return y and s, each from the other where it is unknown."""
    y, s = _known("y", y), _known("s", s)
    if not np.isnan(s):
        s = _check.real("s", s, above=NUCLEON_M2, unit="GeV^2")
        from_s = q2 / (x * (s - NUCLEON_M2))
        if abs(y - from_s) > _WRONG_Y * from_s:
            _check.refuse("y", y, f"x, q2 and s say {from_s:.4g}: y must agree within 5 per cent")
        y = from_s
    if measure not in NEED_Y:
        return (y if 0.0 < y <= 1.0 else np.nan), s
    if np.isnan(y):
        raise InputError(f"{measure} needs y, or s")
    if not _LEAST_Y <= y <= 1.0 + _ROUNDING:
        _check.refuse("y", y, "y = Q^2/(x (s - M^2)) must lie in (0, 1]")
    return y, s


def _known(name: str, value: Any) -> float:
    """Return a number, nan where there is none."""
    if value is None or (isinstance(value, float) and np.isnan(value)):
        return float("nan")
    return _check.real(name, value)


def _target(given: Any) -> tuple[float, str]:
    """Return fraction of protons and name."""
    if hasattr(given, "z") and hasattr(given, "a"):
        return float(given.z) / float(given.a), str(given)
    if isinstance(given, dict) and set(given) == {"z", "a"}:
        z, a = _check.whole("target.z", given["z"], least=0), _check.whole("target.a", given["a"], least=1)
        if z > a:
            _check.refuse("target.z", z, f"z must be from 0 to a = {a}")
        return z / a, f"z={z} a={a}"
    name = _check.choice("target", given, tuple(_PROTONS))
    return _PROTONS[name], name
