"""TOML out: plain values, tables and arrays of tables as text that reads back as the same values."""

from __future__ import annotations

import json
import math
import re
from collections.abc import Mapping
from typing import Any

from ..errors import InputError

__all__ = ["toml_text"]

_BARE = re.compile(r"[A-Za-z0-9_-]+\Z")


def toml_text(values: Mapping[str, Any]) -> str:
    """Return `values` as TOML.

    Parameters
    ----------
    values : mapping
        Text, booleans, whole and real numbers, lists and mappings of these; keys are text. Order is kept, but
        that tables come after plain values.

    Returns
    -------
    str
        One line a value; mappings inside lists of lists or of plain values are written inline.

    Raises
    ------
    InputError
        If a value has no form in TOML.
    """
    return "\n".join(_table(values, ())).strip("\n") + "\n"


def _table(values: Mapping[str, Any], path: tuple[str, ...]) -> list[str]:
    """Return the lines of one table: plain values first, then tables below it."""
    plain = {k: v for k, v in values.items() if not isinstance(v, Mapping) and not _is_tables(v)}
    lines = [f"{_key(name)} = {_value(value)}" for name, value in plain.items()]
    for name, value in values.items():
        below = (*path, _key(name))
        if isinstance(value, Mapping):
            lines += ["", f"[{'.'.join(below)}]", *_table(value, below)]
        elif name not in plain:
            for entry in value:
                lines += ["", f"[[{'.'.join(below)}]]", *_table(entry, below)]
    return lines


def _is_tables(value: object) -> bool:
    """Say whether a value is a list of mappings."""
    return isinstance(value, list | tuple) and bool(value) and all(isinstance(v, Mapping) for v in value)


def _key(name: str) -> str:
    return name if _BARE.match(name) else _quoted(name)


def _quoted(text: str) -> str:
    # JSON escapes are TOML escapes, but JSON leaves DEL as it is and TOML forbids it
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _value(value: Any) -> str:
    """Return one value on one line."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int):
        return str(value)
    if isinstance(value, float) and math.isfinite(value):
        return repr(value)
    if isinstance(value, str):
        return _quoted(value)
    if isinstance(value, list | tuple):
        return "[" + ", ".join(map(_value, value)) + "]"
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{_key(k)} = {_value(v)}" for k, v in value.items()) + " }"
    raise InputError(f"{value!r}: has no form in TOML: text, numbers, true and false, lists and mappings do")
