"""Checks of arguments: the one place where messages about bad input are worded.

Each function takes the name of the argument first and returns the value in the form the package computes with
(float, int, C-ordered float64 or int64 array), or raises `InputError` or `RangeError`. Nothing is clipped,
rounded or filled in. Arrays that already have the right dtype and order are passed on without a copy.
"""

from __future__ import annotations

import difflib
import operator
from collections.abc import Iterable, Sequence
from typing import Any, NoReturn

import numpy as np
from numpy.typing import NDArray

from .errors import InputError, RangeError

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

#: PDG numbers of the partons that evolve: gluon, quarks and antiquarks.
PARTONS = (21, *range(1, 7), *range(-6, 0))


def show(value: object) -> str:
    """Write a value for a message: short, and exact for floats (1e-07, 1, 0.35)."""
    if isinstance(value, float | np.floating):
        text = repr(float(value))
        return text.removesuffix(".0")
    if isinstance(value, np.generic):
        return show(value.item()) if not isinstance(value.item(), np.generic) else repr(value)
    if isinstance(value, np.ndarray) and value.ndim == 0:
        return show(value[()])
    if isinstance(value, np.ndarray):
        return f"array of shape {value.shape} and dtype {value.dtype}"
    text = repr(value)
    return text if len(text) <= 80 else text[:77] + "..."


def show_all(values: Iterable[object], most: int = 8) -> str:
    """Write a list for a message, the middle left out when it is long."""
    words = [show(value) for value in values]
    if len(words) > most:
        words = [*words[: most - 1], "...", words[-1]]
    return ", ".join(words)


def refuse(
    name: str,
    given: object,
    allowed: str,
    *,
    index: object = None,
    error: type[InputError] | type[RangeError] = InputError,
) -> NoReturn:
    """Raise `error` in the one form all messages have: ``name = given at index i: allowed``."""
    where = "" if index is None or index == () else f" at index {index}"
    raise error(f"{name} = {show(given)}{where}: {allowed}")


def _first(bad: NDArray[np.bool_]) -> tuple[int, ...]:
    """Index of the first true entry."""
    return tuple(int(i) for i in np.unravel_index(int(np.argmax(bad)), bad.shape))


def refuse_where(
    name: str,
    values: NDArray[Any],
    bad: NDArray[np.bool_],
    allowed: str,
    *,
    error: type[InputError] | type[RangeError] = InputError,
) -> None:
    """Raise `error` for the first entry of `values` that is `bad`, naming value and index."""
    if not bad.any():
        return
    index = _first(bad)
    given = values[index]
    refuse(name, given, allowed, index=index[0] if len(index) == 1 else index, error=error)


def real_array(
    name: str,
    value: object,
    *,
    ndim: int | None = None,
    shape: tuple[int | None, ...] | None = None,
    unknown: bool = False,
) -> Floats:
    """Return finite real numbers as a C-ordered float64 array, without a copy where none is needed.

    Parameters
    ----------
    name : str
        Name of the argument, for the message.
    value : array_like
        Any real dtype, order, byte order or stride; read-only arrays too.
    ndim : int, optional
        Number of axes wanted.
    shape : tuple, optional
        Shape wanted; None stands for any length.
    unknown : bool
        Whether nan may stand for what is not known.
    """
    array = _numbers(name, value)
    wanted = len(shape) if shape is not None else ndim
    if wanted is not None and array.ndim != wanted:
        _refuse_axes(name, array, wanted)
    if shape is not None:
        fits = all(want is None or want == has for want, has in zip(shape, array.shape, strict=True))
        if not fits:
            want = ", ".join("any" if n is None else str(n) for n in shape)
            refuse(name, array, f"the shape of {name} must be ({want})")
    # Not ascontiguousarray: that one makes a 0-d array one of length 1, and lets unaligned memory through.
    with np.errstate(over="ignore"):  # a longdouble beyond float64 becomes inf and is refused below
        floats: Floats = np.require(array, dtype=np.float64, requirements=("C", "A"))
    # One pass without a temporary array as large as the input: a sum of finite numbers can overflow, so a sum
    # that is not finite only says "look closer".
    with np.errstate(all="ignore"):
        suspicious = not np.isfinite(np.sum(floats))
    if suspicious:
        bad = np.isinf(floats) if unknown else ~np.isfinite(floats)
        refuse_where(name, array, bad, f"{name} must be finite")
    return floats


def _refuse_axes(name: str, array: NDArray[Any], wanted: int) -> NoReturn:
    """Say how many axes there are and how many there must be."""
    refuse(name, array, f"{name} must have {wanted} {'axis' if wanted == 1 else 'axes'}, not {array.ndim}")


def _numbers(name: str, value: object) -> NDArray[Any]:
    """Turn `value` into an array of real numbers, or refuse it with the reason."""
    if value is None:
        refuse(name, value, f"{name} must be given")
    if np.ma.isMaskedArray(value) and bool(np.ma.is_masked(value)):
        refuse(name, np.asarray(value), f"{name} must not have masked entries: fill or drop them first")
    try:
        array = np.asarray(value)
    except (ValueError, TypeError):  # ragged lists
        refuse(name, value, f"{name} must be an array: its rows differ in length")
    except Exception as error:  # an __array__ of the user's that raises
        raise InputError(f"{name}: cannot be read as an array: {error}") from error
    if array.dtype.kind not in "fiu":
        given = value if array.dtype.kind == "O" and array.ndim == 0 else array
        given = array[()] if array.ndim == 0 and array.dtype.kind != "O" else given
        refuse(name, given, f"{name} must be real numbers, not {_kind(array, value)}")
    return array


def _kind(array: NDArray[Any], value: object) -> str:
    """Say what an array that is not one of numbers holds."""
    if array.dtype.kind == "O":
        return type(value).__name__ if array.ndim == 0 else "objects"
    known = {"b": "bool", "c": "complex", "U": "text", "S": "bytes", "M": "dates", "m": "durations"}
    return known.get(array.dtype.kind, str(array.dtype))


def whole_array(name: str, value: object, *, ndim: int | None = None) -> Integers:
    """Return whole numbers as a C-ordered int64 array; floats such as 3.0 are not whole numbers."""
    array = np.zeros(0, np.int64) if _is_empty(value) else _numbers(name, value)
    if array.dtype.kind not in "iu":
        refuse(name, array, f"{name} must be whole numbers, not {array.dtype}")
    if ndim is not None and array.ndim != ndim:
        _refuse_axes(name, array, ndim)
    if array.dtype == np.uint64:
        refuse_where(name, array, array > np.uint64(2**63 - 1), f"{name} must be below 2^63")
    return np.asarray(array, dtype=np.int64, order="C")


def is_one(name: str, value: object) -> bool:
    """Say whether `value` is one number and not a list of them; refuse what is neither."""
    return _numbers(name, value).ndim == 0 if not _is_empty(value) else False


def _is_empty(value: object) -> bool:
    """Say whether `value` is an empty list or tuple, which numpy would take for floats."""
    return isinstance(value, list | tuple) and len(value) == 0


def real(
    name: str,
    value: object,
    *,
    above: float | None = None,
    least: float | None = None,
    most: float | None = None,
    below: float | None = None,
    unit: str = "",
) -> float:
    """Return one finite real number within limits (`above` and `below` exclude the limit itself)."""
    array = _numbers(name, value)
    if array.ndim != 0:
        refuse(name, array, f"{name} must be one number")
    number = float(array[()])
    unit = f" {unit}" if unit else ""
    low = "(-inf" if above is None else f"({show(float(above))}"
    low = low if least is None else f"[{show(float(least))}"
    high = "inf)" if below is None else f"{show(float(below))})"
    high = high if most is None else f"{show(float(most))}]"
    fits = (
        np.isfinite(number)
        and (above is None or number > above)
        and (least is None or number >= least)
        and (most is None or number <= most)
        and (below is None or number < below)
    )
    if not fits:
        refuse(name, number, f"{name} must lie in {low}, {high}{unit}")
    return number


def whole(name: str, value: object, *, least: int | None = None, most: int | None = None) -> int:
    """Return one whole number within limits."""
    if isinstance(value, bool | np.bool_) or (isinstance(value, np.ndarray) and value.ndim != 0):
        refuse(name, value, f"{name} must be a whole number, not {type(value).__name__}")
    try:
        number = operator.index(value[()] if isinstance(value, np.ndarray) else value)  # type: ignore[arg-type]
    except (TypeError, IndexError):
        refuse(name, value, f"{name} must be a whole number, not {type(value).__name__}")
    if (least is not None and number < least) or (most is not None and number > most):
        limits = f"from {least} to {most}" if most is not None else f"at least {least}"
        if least is None:
            limits = f"at most {most}"
        refuse(name, number, f"{name} must be {limits}")
    return number


def choice(name: str, value: object, allowed: Sequence[str]) -> str:
    """Return `value` if it is one of the words `allowed`; the message names the nearest."""
    if isinstance(value, str) and value in allowed:
        return value
    words = ", ".join(f'"{word}"' for word in allowed)
    refuse(name, value, f"{name} must be one of {words}{nearest(value, allowed)}")


def nearest(value: object, allowed: Iterable[str]) -> str:
    """Return ``; did you mean "word"?`` for the allowed word nearest to `value`, or nothing."""
    close = difflib.get_close_matches(str(value), list(allowed), n=1) if isinstance(value, str) else []
    return f'; did you mean "{close[0]}"?' if close else ""


def x_values(name: str, value: object, *, x_min: float | None = None, rounding: float = 0.0) -> Floats:
    """Return momentum fractions: in (0, 1], and not below `x_min` where that is given.

    What lies outside (0, 1] is an `InputError`; what lies in it but below `x_min` a `RangeError`. Values
    below `x_min` by no more than the relative `rounding` are taken for `x_min` itself.
    """
    limits = "(0, 1]" if x_min is None else f"[{show(float(x_min))}, 1]"
    array = _numbers(name, value)
    with np.errstate(over="ignore"):
        floats: Floats = np.require(array, dtype=np.float64, requirements=("C", "A"))
    inside = (floats > 0.0) & (floats <= 1.0)
    refuse_where(name, floats, ~inside, f"{name} must lie in {limits}")
    if x_min is not None:
        least = x_min * (1.0 - rounding)
        refuse_where(name, floats, floats < least, f"{name} must lie in {limits}", error=RangeError)
        if (floats < x_min).any():
            floats = np.maximum(floats, x_min)
    return floats


def scale(name: str, value: object) -> float:
    """Return one squared scale in GeV^2: finite and positive."""
    return real(name, value, above=0.0, unit="GeV^2")


def scales(name: str, value: object) -> Floats:
    """Return squared scales in GeV^2, (scale,): finite, positive, at least one; a number makes one."""
    array = real_array(name, value)
    if array.ndim > 1:
        _refuse_axes(name, array, 1)
    if array.size == 0:
        refuse(name, array, f"{name} must hold at least one scale")
    refuse_where(name, array, array <= 0.0, f"{name} must lie in (0, inf) GeV^2")
    return np.atleast_1d(array)


def flavour_count(name: str, value: object) -> int:
    """Return one number of active flavours, 3 to 6."""
    return whole(name, value, least=3, most=6)


def flavour_counts(name: str, value: object, length: int) -> Integers:
    """Return numbers of active flavours, (length,): 3 to 6; one number stands for all."""
    array = whole_array(name, value)
    if array.ndim > 1 or (array.ndim == 1 and array.size != length):
        refuse(name, array, f"{name} must be one number or {length} of them, one a scale")
    refuse_where(name, array, (array < 3) | (array > 6), f"{name} must be from 3 to 6")
    return np.ascontiguousarray(np.broadcast_to(array, (length,)))


def distinct_scales(name: str, q2: Floats, nf: Integers) -> None:
    """Refuse a scale that is listed twice with the same number of flavours."""
    seen: dict[tuple[float, int], int] = {}
    for index, pair in enumerate(zip(q2.tolist(), nf.tolist(), strict=True)):
        if pair in seen:
            repeated = f"the scale with nf = {pair[1]} stands at index {seen[pair]} already"
            refuse(name, pair[0], repeated, index=index)
        seen[pair] = index


def partons(name: str, value: object) -> tuple[int, ...]:
    """Return PDG numbers, each once: 21 (gluon), 1 to 6 (d, u, s, c, b, t), -1 to -6; at least one."""
    if isinstance(value, str) or (isinstance(value, list | tuple) and any(isinstance(f, str) for f in value)):
        refuse(name, value, f"{name} must be PDG numbers, not names")
    array = whole_array(name, value)
    if array.ndim != 1:
        refuse(name, array, f"{name} must be a list of PDG numbers")
    if array.size == 0:
        refuse(name, (), f"{name} must hold at least one PDG number")
    known = np.isin(array, np.asarray(PARTONS))
    refuse_where(name, array, ~known, "a PDG number must be 21 (gluon), 1 to 6 or -1 to -6")
    numbers = tuple(array.tolist())
    for index, number in enumerate(numbers):
        first = numbers.index(number)
        if first != index:
            refuse(name, number, f"the flavour stands at index {first} already", index=index)
    return numbers


def function(name: str, value: object) -> None:
    """Refuse what cannot be called."""
    if not callable(value):
        refuse(name, value, f"{name} must be callable, not {type(value).__name__}")


def raised(name: str, function: Any, *arguments: object) -> Any:
    """Return what a user's function returns; if it raises, say which and what, as an `InputError`."""
    try:
        return function(*arguments)
    except Exception as error:
        raise InputError(f"{name} raised {type(error).__name__}: {error}") from error


def called(name: str, function: Any, *arguments: object, shape: tuple[int, ...]) -> Floats:
    """Return the finite values of a user's function, with the wanted shape; one number stands for all."""
    result = raised(name, function, *arguments)
    values = real_array(f"value of {name}", result)
    if values.ndim != 0 and values.shape != shape:
        raise InputError(
            f"{name} returned values of shape {values.shape}: the shape must be {shape}, that of x"
        )
    return np.ascontiguousarray(np.broadcast_to(values, shape))
