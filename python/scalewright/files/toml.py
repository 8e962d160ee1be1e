"""TOML files of keys that are all known: a wrong key is named with the nearest right one.

A `Section` is a table that knows where it stands, so that a message can begin with the file and the key,
as in ``job.toml: [input] q2: ...``. What a value means is checked by whoever uses it, inside
`Section.blame`.
"""

import contextlib
import os
import tomllib
from collections.abc import Iterator, Mapping
from typing import Any

from .._check import nearest
from ..errors import InputError, RangeError
from .whole import PathLike, read_whole, shown

_REQUIRED = object()


class Section:
    """One table of a TOML file and the place where it stands.

    Parameters
    ----------
    values
        The table.
    file
        The file, as messages show it.
    path
        The keys that lead here from the top.
    """

    def __init__(self, values: Mapping[str, Any], file: str, path: tuple[str, ...] = ()) -> None:
        self._values, self._file, self._path = dict(values), file, path

    def only(self, *known: str) -> "Section":
        """Refuse every key that is not listed.

        Parameters
        ----------
        *known
            The keys that may stand here.

        Returns
        -------
        Section
            Itself.

        Raises
        ------
        InputError
            For the first other key; the nearest known one is named.
        """
        for key in self._values:
            if key not in known:
                allowed = ", ".join(known)
                raise InputError(f"{self.where(key)}: unknown key{nearest(key, known)} (known: {allowed})")
        return self

    def get(self, key: str, default: Any = _REQUIRED) -> Any:
        """Return a value; a key without default must be there.

        Parameters
        ----------
        key
            The key.
        default
            What stands for a key that is absent.

        Returns
        -------
        object
            What TOML makes of it.

        Raises
        ------
        InputError
            If the key is absent and has no default.
        """
        if key in self._values:
            return self._values[key]
        if default is _REQUIRED:
            raise InputError(f"{self.where(key)}: missing")
        return default

    def names(self) -> tuple[str, ...]:
        """Return the keys that stand here, in their order."""
        return tuple(self._values)

    def text(self, key: str, default: Any = _REQUIRED) -> Any:
        """Return a value that must be text; see `get`."""
        value = self.get(key, default)
        if key in self._values and not (isinstance(value, str) and value):
            raise InputError(f"{self.where(key)} = {value!r}: must be text in quotes")
        return value

    def section(self, key: str, default: Any = _REQUIRED) -> "Section":
        """Return a table below this one; see `get`."""
        value = self.get(key, default)
        if not isinstance(value, Mapping):
            raise InputError(f"{self.where(key)} = {value!r}: must be a table")
        return Section(value, self._file, (*self._path, key))

    def where(self, key: str | None = None) -> str:
        """Return the place as messages show it: ``job.toml: [input] q2``."""
        parts = [f"[{'.'.join(self._path)}]"] if self._path else []
        return f"{self._file}: {' '.join([*parts, *([key] if key else [])])}".rstrip(": ")

    @contextlib.contextmanager
    def blame(self, key: str | None = None) -> Iterator[None]:
        """Put the place in front of the message of an input or range error that is raised inside."""
        try:
            yield
        except (InputError, RangeError) as error:
            raise type(error)(f"{self.where(key)}: {error}") from error


def load(path: PathLike) -> Section:
    """Read a TOML file.

    Parameters
    ----------
    path
        The file, UTF-8 with or without byte order mark.

    Returns
    -------
    Section
        Its top table.

    Raises
    ------
    StoreError
        If it cannot be read.
    InputError
        If it is not TOML; line and column are named.
    """
    data = read_whole(path)
    try:
        return Section(tomllib.loads(data.decode("utf-8-sig").replace("\r\n", "\n")), shown(path))
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise InputError(
            f"{shown(path)}: not UTF-8 text (line {line}, byte 0x{data[error.start]:02x})"
        ) from error
    except tomllib.TOMLDecodeError as error:
        said = str(error)
        raise InputError(f"{shown(path)}: not TOML: {said[:1].lower() + said[1:]}") from error
    except RecursionError as error:
        raise InputError(f"{shown(path)}: not TOML that can be read: nested too deeply") from error


def beside(path: PathLike, name: str) -> str:
    """Return a file name of a job relative to the folder of the job.

    Parameters
    ----------
    path
        The job file.
    name
        A file name in it.

    Returns
    -------
    str
        The name, to be opened from anywhere.
    """
    return os.path.join(os.path.dirname(os.fsdecode(path)), name)
