"""The part of a job file that says what densities may look like, and what their parameters may do."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any, NamedTuple

from .. import _check
from ..errors import InputError
from ..files.toml import Section
from ..fitting._problem import THEORY
from ..fitting.shapes import Network, PowerLaw, Shape, Term
from ..grid import ChebyshevGrid
from ..theory import Theory

_RULES = ("relations", "momentum", "numbers")
_OF_KIND = {"power law": (), "network": ("hidden", "seed")}
_OF_TERM = {
    "power law": ("power", "fall", "coefficients", "polynomial", "variable"),
    "network": ("power", "fall"),
}
_OF_PARAMETER = ("start", "bounds", "fixed", "tied", "prior")


class Start(NamedTuple):
    """Where the shape stands: scale in GeV^2, number of flavours."""

    q2: float
    nf: int


def read_start(section: Section, theory: Theory) -> Start:
    """Return scale and number of flavours of the shape."""
    given, count = section.get("start_q2"), section.get("start_nf", None)
    with section.blame():
        q2 = _check.scale("start_q2", given)
        return Start(q2, theory.start_nf(q2) if count is None else _check.flavour_count("start_nf", count))


def read_shape(section: Section, grid: ChebyshevGrid, nf: int) -> Shape:
    """Return the shape that a table describes, all parameters free.

    Parameters
    ----------
    section : Section
        kind, terms, relations, momentum, numbers; for a network hidden and seed.
    grid : ChebyshevGrid
    nf : int

    Raises
    ------
    InputError
        If a key is unknown, missing or wrong.
    """
    with section.blame():
        kind = _check.choice("kind", section.get("kind", "power law"), tuple(_OF_KIND))
    section.only("kind", "start_q2", "start_nf", "terms", *_RULES, *_OF_KIND[kind])
    terms = _terms(section.section("terms"), kind)
    options = {
        key: section.get(key) for key in (*_RULES, *_OF_KIND[kind]) if section.get(key, None) is not None
    }
    if not isinstance(options.get("relations", []), list):
        raise InputError(f"{section.where('relations')} = {options['relations']!r}: must be a list")
    section.section("numbers", {})
    with section.blame():
        if kind == "network":
            powers = {name: (term.power, term.fall) for name, term in terms.items()}
            return Network(grid, powers, nf=nf, **options)
        return PowerLaw(grid, terms, nf=nf, **options)


def _terms(section: Section, kind: str) -> dict[str, Term]:
    """Return the terms by the names of their combinations."""
    found = {}
    for name in section.names():
        one = section.section(name).only(*_OF_TERM[kind])
        power, fall = one.get("power"), one.get("fall")
        rest = {key: one.get(key) for key in _OF_TERM[kind][2:] if one.get(key, None) is not None}
        with one.blame():
            found[name] = Term(power, fall, **rest)
    return found


def read_parameters(
    section: Section, shape: Shape, free: tuple[str, ...]
) -> tuple[Shape, dict[str, tuple[float, float]]]:
    """Return the shape with what the job says of its parameters, and the priors of theory parameters.

    Parameters
    ----------
    section : Section
        Name of a parameter -> table with start, bounds, fixed, tied, prior.
    shape : Shape
        All parameters free.
    free : tuple of str
        Theory parameters that are fitted.

    Raises
    ------
    InputError
        If a parameter is unknown or restricted in two ways, or a value is not allowed.
    """
    of_theory: dict[str, tuple[float, float]] = {}
    asked: dict[str, dict[str, Any]] = {key: {} for key in _OF_PARAMETER}
    for name, one in _leaves(section, ""):
        if name in THEORY:
            if name not in free:
                raise InputError(f"{one.where()}: {name} is not free: name it in [fit] theory")
            of_theory[name] = _pair(one.only("prior"), "prior")
            continue
        one.only(*_OF_PARAMETER)
        for key in _OF_PARAMETER:
            if one.get(key, None) is not None:
                asked[key][name] = _asked(one, key, name, shape)
    # a fixed parameter stays at the start that is given for it
    for name in [name for name in asked["start"] if name in asked["fixed"]]:
        start = asked["start"].pop(name)
        asked["fixed"][name] = start if asked["fixed"][name] is None else asked["fixed"][name]
    with section.blame():
        fixed = {
            name: _own(shape, name) if value is None else value for name, value in asked["fixed"].items()
        }
        restricted = shape.restricted(
            fixed=fixed, tied=asked["tied"], bounds=asked["bounds"], priors=asked["prior"],
            start=asked["start"],
        )  # fmt: skip
    return (restricted if any(asked.values()) else shape), of_theory


def _leaves(section: Section, before: str) -> Iterator[tuple[str, Section]]:
    """Yield parameters: TOML reads g.power = {...} without quotes as a table within a table."""
    for key in section.names():
        inner, name = section.section(key), f"{before}{key}"
        values = [inner.get(one) for one in inner.names()]
        is_group = bool(values) and all(isinstance(value, Mapping) for value in values)
        if is_group and not before:
            yield from _leaves(inner, f"{name}.")
        else:
            yield name, inner


def _asked(one: Section, key: str, name: str, shape: Shape) -> Any:
    """Return what is said of a parameter, in the form that `Shape.restricted` takes; None: at its start."""
    value = one.get(key)
    if key == "fixed" and isinstance(value, bool):
        if not value:
            raise InputError(f"{one.where(key)} = false: leave the key out, or give the value")
        return None
    if key in ("start", "fixed"):
        with one.blame():
            return _check.real(key, value)
    if key == "tied":
        return tuple(value) if isinstance(value, list) else value
    return _pair(one, key)


def _own(shape: Shape, name: str) -> float:
    """Return the start of a parameter; `restricted` refuses a name that is unknown."""
    return float(shape.start[shape.names.index(name)]) if name in shape.names else 0.0


def _pair(section: Section, key: str) -> tuple[float, float]:
    value = section.get(key)
    if not isinstance(value, list) or len(value) != 2 or any(isinstance(v, bool) for v in value):
        raise InputError(f"{section.where(key)} = {value!r}: must be two numbers")
    if not all(isinstance(v, int | float) for v in value):
        raise InputError(f"{section.where(key)} = {value!r}: must be two numbers")
    return float(value[0]), float(value[1])
