"""What every worker needs, sent once: a file that the workers of one machine map, and bytes for the others.

The object is pickled with its arrays beside it, so that a worker takes them as views of the mapped file. A
worker on another machine does not find the file; it says so, and gets the bytes with its next task.
"""

from __future__ import annotations

import mmap
import os
import pickle
import secrets
import shutil
import struct
import tempfile
from dataclasses import dataclass
from typing import Any

from ..errors import InputError, StoreError
from ..files.whole import reason, shown

__all__ = ["Missing", "Parcel", "Ticket"]

_ALIGNMENT = 64
_SIZES = struct.Struct("<Q")


@dataclass(frozen=True)
class Missing:
    """What a worker returns that does not have the parcel."""


@dataclass(frozen=True)
class Ticket:
    """How a worker finds the parcel: by a name that no other parcel has, at a path, or in these bytes."""

    name: str
    path: str
    data: bytes | None = None


class Parcel:
    """An object on its way to the workers; a context manager that removes the file.

    Parameters
    ----------
    content : object

    Raises
    ------
    InputError
        If it cannot be pickled.
    StoreError
        If the file cannot be written.
    """

    def __init__(self, content: object) -> None:
        buffers: list[pickle.PickleBuffer] = []
        try:
            plain = pickle.dumps(content, protocol=5, buffer_callback=buffers.append)
        except Exception as error:  # pickle raises whatever the parts raise
            raise InputError(
                f"shape: cannot be sent to other processes: {error}; define functions at the top of a "
                "module, or set workers=1"
            ) from error
        parts: list[bytes | memoryview] = [plain, *(buffer.raw() for buffer in buffers)]
        self._folder = tempfile.mkdtemp(prefix="scalewright-")
        path = os.path.join(self._folder, "parcel")
        try:
            with open(path, "wb") as file:
                file.write(_SIZES.pack(len(parts)))
                file.write(b"".join(_SIZES.pack(len(part)) for part in parts))
                for part in parts:
                    file.write(b"\0" * (-file.tell() % _ALIGNMENT))
                    file.write(part)
        except BaseException as error:
            shutil.rmtree(self._folder, ignore_errors=True)
            if isinstance(error, OSError):
                raise StoreError(f"{shown(path)}: cannot be written: {reason(error)}") from error
            raise
        self.ticket = Ticket(secrets.token_hex(16), path)

    def with_bytes(self) -> Ticket:
        """Return a ticket that carries the parcel itself."""
        with open(self.ticket.path, "rb") as file:
            return Ticket(self.ticket.name, self.ticket.path, file.read())

    def __enter__(self) -> Parcel:
        return self

    def __exit__(self, *_: object) -> None:
        shutil.rmtree(self._folder, ignore_errors=True)


#: The last parcel that this process has opened.
_opened: dict[str, Any] = {}


def content(ticket: Ticket) -> Any:
    """Return the object of a ticket, or `Missing`."""
    known = _opened.get(ticket.name)
    if known is not None:
        return known
    if ticket.data is not None:
        data = memoryview(ticket.data)
    else:
        try:
            with open(ticket.path, "rb") as file:
                data = memoryview(mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ))
        except OSError:
            return Missing()
    made = _unpacked(data)
    _opened.clear()  # threads of one worker may meet here: each then has a view of the same
    _opened[ticket.name] = made
    return made


def _unpacked(data: memoryview) -> Any:
    (count,) = _SIZES.unpack_from(data)
    sizes = [_SIZES.unpack_from(data, _SIZES.size * (1 + part))[0] for part in range(count)]
    place, parts = _SIZES.size * (1 + count), []
    for size in sizes:
        place += -place % _ALIGNMENT
        parts.append(data[place : place + size])
        place += size
    return pickle.loads(parts[0], buffers=parts[1:])
