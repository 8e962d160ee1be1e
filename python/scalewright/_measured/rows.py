"""Rows: the points at which a theory predicts one number each, and what is measured there.

An attribute (measure, current, exchange, beam, polarisation, target, tagged, s) comes from the description of
the table, or from a column where the description names one. The inelasticity follows from
Q^2 = x y (s - M^2) with the mass M of a nucleon.
"""

from __future__ import annotations

import warnings
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from typing import Any, NamedTuple, NoReturn, TypeAlias

import numpy as np

from .._check import Floats, nearest, show
from ..errors import InputError, InputWarning
from ..files.cells import Cells

__all__ = ["ATTRIBUTES", "NUCLEON_M2", "Nucleus", "Rows"]

#: Squared mass of the proton in GeV^2 (Particle Data Group, 0.93827208816 GeV), taken for every nucleon.
NUCLEON_M2 = 0.93827208816**2

MEASURES = ("reduced_cross_section", "F2", "FL", "F1", "xF3", "d2sigma_dx_dq2", "d2sigma_dx_dy")
NEED_Y = ("reduced_cross_section", "d2sigma_dx_dq2", "d2sigma_dx_dy")
TARGETS = ("proton", "neutron", "deuteron", "isoscalar")
_WORDS = {
    "measures": MEASURES,
    "current": ("neutral", "charged"),
    "exchange": ("photon", "photon+Z", "W"),
    "beam": ("e-", "e+", "nu", "nubar"),
    "tagged": ("charm", "bottom"),
}
#: Keys that say what is measured at a point; each may also be the name of a column.
ATTRIBUTES = ("measures", "current", "exchange", "beam", "polarisation", "target", "tagged", "s")

#: A y column may differ from Q^2/(x (s - M^2)) by rounding in print; by more than this part it is another y.
_WRONG_Y = 0.05


class Nucleus(NamedTuple):
    """A target of `z` protons in `a` nucleons."""

    z: int
    a: int

    def __str__(self) -> str:
        return f"z={self.z} a={self.a}"


Target: TypeAlias = str | Nucleus


@dataclass(frozen=True, eq=False)
class Rows:
    """Points at which the theory predicts, one entry each.

    Parameters
    ----------
    x, q2, y, s, polarisation : ndarray, (row,)
        q2 and s in GeV^2; y and s are nan where they are unknown.
    measure, current, exchange, beam, target, tagged : tuple
        Words of the description; tagged is None where nothing is; beam is None where it does not matter.
    place : tuple of str
        Where each row stands, for messages.
    """

    x: Floats
    q2: Floats
    y: Floats
    s: Floats
    polarisation: Floats
    measure: tuple[str, ...]
    current: tuple[str, ...]
    exchange: tuple[str, ...]
    beam: tuple[str | None, ...]
    target: tuple[Target, ...]
    tagged: tuple[str | None, ...]
    place: tuple[str, ...]

    def __len__(self) -> int:
        return int(self.x.size)

    @property
    def w2(self) -> Floats:
        """Squared mass of the final state, M^2 + Q^2 (1 - x)/x, in GeV^2, (row,)."""
        return NUCLEON_M2 + self.q2 * (1.0 - self.x) / self.x

    def key(self, row: int) -> tuple[object, ...]:
        """Return what makes a row the same as another."""
        values = (getattr(self, field.name)[row] for field in fields(self) if field.name != "place")
        # nan differs from itself
        return tuple(None if isinstance(v, float) and np.isnan(v) else v for v in values)

    @classmethod
    def join(cls, parts: Sequence[Rows]) -> Rows:
        """Put rows of several tables one after another."""
        joined: dict[str, Any] = {}
        for field in fields(cls):
            columns = [getattr(part, field.name) for part in parts]
            arrays = isinstance(columns[0], np.ndarray)
            joined[field.name] = np.concatenate(columns) if arrays else sum(columns, ())
        return cls(**joined)


class Reader:
    """Makes rows of the lines of one table.

    Parameters
    ----------
    cells : Cells
        The table.
    columns : mapping
        Key -> name of the column, as in the description.
    defaults : mapping
        Key -> value for all lines; `where` says where that stands.
    where : callable
        Key -> place in the description.
    """

    def __init__(
        self, cells: Cells, columns: Mapping[str, str], defaults: Mapping[str, Any], where: Any
    ) -> None:
        self.cells, self.columns, self.defaults, self.where = cells, columns, defaults, where
        self._words = {key: cells.words(columns[key]) for key in ATTRIBUTES if key in columns}
        self.x = cells.numbers(columns["x"])
        self.given_y = cells.numbers(columns["y"]) if "y" in columns else None
        self.given_q2 = cells.numbers(columns["q2"]) if "q2" in columns else None

    def row(self, line: int, overrides: Mapping[str, Any], named: str = "") -> tuple[Any, ...]:
        """Return the entries of one row, in the order of `Rows`."""
        get = {key: self._value(key, line, overrides) for key in ATTRIBUTES}
        place = self.cells.place(line) + (f", row {named}" if named else "")
        try:
            what = _consistent(get)
        except InputError as error:
            raise InputError(f"{place}: {error}") from None
        x, s = float(self.x[line]), get["s"]
        if not 0.0 < x <= 1.0:
            self.cells.refuse(line, self.columns["x"], f"{show(x)}: x must lie in (0, 1]")
        q2, y = self._kinematics(line, x, s, place)
        if np.isnan(y) and get["measures"] in NEED_Y:
            raise InputError(f"{place}: {get['measures']} needs s, or a y column")
        return (x, q2, y, np.nan if s is None else s, get["polarisation"], *what, place)

    def _kinematics(self, line: int, x: float, s: float | None, place: str) -> tuple[float, float]:
        """Return Q^2 and y, from the columns or from s."""
        given = None if self.given_y is None else float(self.given_y[line])
        if given is not None and not 0.0 < given <= 1.0:
            self.cells.refuse(line, self.columns["y"], f"{show(given)}: y must lie in (0, 1]")
        energy = None if s is None else s - NUCLEON_M2
        if self.given_q2 is None:
            if given is None or energy is None:
                raise InputError(f"{place}: there must be a q2 column, or a y column and s")
            return x * given * energy, given
        q2 = float(self.given_q2[line])
        if q2 <= 0.0:
            self.cells.refuse(line, self.columns["q2"], f"{show(q2)}: q2 must lie in (0, inf) GeV^2")
        if energy is None:
            return q2, np.nan if given is None else given
        y = q2 / (x * energy)
        if given is not None:
            self._compare(line, given, y, q2)
        if y > 1.0:
            raise InputError(f"{place}: y = {y:.6g} from x, q2 and s: y must lie in (0, 1]")
        return q2, y

    def _compare(self, line: int, given: float, y: float, q2: float) -> None:
        """Warn of a printed y that rounding in print does not explain; refuse one that is another y."""
        digit = {key: _half_digit(self.cells.words(self.columns[key])[line]) for key in ("x", "q2", "y")}
        spread = digit["x"] / self.x[line] + digit["q2"] / q2
        # one part in 10^12 for the arithmetic itself
        off = abs(given - y) - digit["y"] - 1e-12 * y
        # predicted is at x and q2 as printed, so that their rounding excuses no other y
        is_other = off > 0.0 and abs(given - y) > _WRONG_Y * y
        if off <= y * spread and not is_other:
            return
        place = self.cells.place(line, self.columns["y"])
        said = f"{place}: {show(given)}, but x, q2 and s say {y:.6g}"
        if is_other:
            raise InputError(f"{said}: y must be q2/(x (s - M^2)) within 5 per cent")
        warnings.warn(f"{said}; the latter is used", InputWarning, stacklevel=2)

    def _value(self, key: str, line: int, overrides: Mapping[str, Any]) -> Any:
        """Return the checked value of an attribute, None where there is none."""
        if key in overrides:
            place, value = self.where(key, inside=overrides), overrides[key]
        elif key in self._words:
            place, value = self.cells.place(line, self.columns[key]), self._words[key][line] or None
            if key in ("s", "polarisation") and value is not None:
                value = self.cells.numbers(self.columns[key])[line].item()
            if key == "target" and isinstance(value, str) and "=" in value:
                value = _nucleus_of(value)
        else:
            place, value = self.where(key), self.defaults.get(key)
        return None if value is None else _checked(key, value, place)


def _half_digit(text: str) -> float:
    """Return half a unit of the last printed digit of a number."""
    mantissa, _, exponent = text.lower().partition("e")
    decimals = len(mantissa.partition(".")[2])
    return 0.5 * 10.0 ** (int(exponent or 0) - decimals)


def _refuse(place: str, value: object, allowed: str) -> NoReturn:
    raise InputError(f"{place} = {show(value)}: {allowed}")


def _checked(key: str, value: Any, place: str) -> Any:
    """Return one attribute in its stored form, or refuse it."""
    if key in _WORDS:
        if value not in _WORDS[key] or not isinstance(value, str):
            words = ", ".join(f'"{word}"' for word in _WORDS[key])
            _refuse(place, value, f"must be one of {words}{nearest(value, _WORDS[key])}")
        return value
    if key == "target":
        return _target(value, place)
    if isinstance(value, bool) or not isinstance(value, int | float) or not np.isfinite(value):
        _refuse(place, value, "must be a finite number")
    if key == "s" and value <= NUCLEON_M2:
        _refuse(place, value, f"s must lie above the squared mass of a nucleon, {NUCLEON_M2:.4g} GeV^2")
    if key == "polarisation" and abs(value) > 1.0:
        _refuse(place, value, "polarisation must lie in [-1, 1]")
    return float(value)


def _target(value: Any, place: str) -> Target:
    """Return a name or a nucleus."""
    if isinstance(value, Mapping) and set(value) == {"z", "a"}:
        z, a = value["z"], value["a"]
        if type(z) is int and type(a) is int and 0 <= z <= a and a > 0:
            return Nucleus(z, a)
    elif isinstance(value, str) and value in TARGETS:
        return value
    words = ", ".join(f'"{word}"' for word in TARGETS)
    _refuse(place, value, f"must be one of {words}, or z and a with 0 <= z <= a{nearest(value, TARGETS)}")


def _nucleus_of(text: str) -> Any:
    """Read "z=26 a=56", as a column has it; what is no nucleus comes back as it is and is refused later."""
    try:
        return {key: int(number) for key, number in (part.split("=") for part in text.split())}
    except ValueError:
        return text


def _consistent(get: dict[str, Any]) -> tuple[Any, ...]:
    """Fill in what follows, refuse what contradicts; return the words in the order of `Rows`."""
    measure, current = get["measures"], get["current"] or "neutral"
    if measure is None:
        raise InputError("measures: missing")
    exchange = get["exchange"] or ("photon+Z" if current == "neutral" else "W")
    if (exchange == "W") != (current == "charged"):
        raise InputError(f'exchange = "{exchange}" does not go with current = "{current}"')
    beam = get["beam"]
    if beam is None and not (exchange == "photon" and measure not in NEED_Y):
        raise InputError("beam: missing")
    if current == "neutral" and beam in ("nu", "nubar"):
        raise InputError(f'beam = "{beam}" does not go with current = "neutral"')
    get["polarisation"] = get["polarisation"] or 0.0
    if beam in ("nu", "nubar") and get["polarisation"] != 0.0:
        raise InputError("polarisation: a neutrino has no other helicity; leave it out")
    return measure, current, exchange, beam, get["target"] or "proton", get["tagged"]


def rows_of(entries: Sequence[tuple[Any, ...]]) -> Rows:
    """Make `Rows` of the entries that `Reader.row` returns."""
    columns: list[Any] = list(zip(*entries, strict=True))
    for place in range(5):
        columns[place] = np.asarray(columns[place], dtype=np.float64)
    return Rows(*columns)
