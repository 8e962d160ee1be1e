"""The journal of a run: one record a replica, so that a run that was killed goes on where it stopped.

A line of magic, then records: length and CRC-32 of what follows, little endian, then the bytes. The first
record is JSON and says which fit this is; the others are replicas. Records are appended and flushed to the
disk together; what a kill or a full disk cut short is dropped when the journal is opened again.
"""

from __future__ import annotations

import contextlib
import json
import os
import struct
import zlib
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from .._check import Floats
from ..errors import StoreError
from ..files.whole import PathLike, reason, shown

try:
    import fcntl
except ImportError:  # not on Windows
    fcntl = None  # type: ignore[assignment]

__all__ = ["Journal", "Outcome"]

_MAGIC = b"scalewright journal 1\n"
_HEAD = struct.Struct("<II")
_REPLICA = struct.Struct("<qddqqI")  # index, two chi-squares, steps, negative values, length of the reason
#: A record longer than this is damage.
_LONGEST = 2**28
#: Numbers of a fit that is set up again, perhaps on another machine, differ by roundings.
_SAME = 1e-9


@dataclass(frozen=True, eq=False)
class Outcome:
    """One replica.

    Parameters
    ----------
    index : int
        Its number.
    parameters : ndarray, (parameter,)
    chi2 : float
        Of its own pseudo-data and priors.
    chi2_data : float
        Of the data themselves.
    steps : int
        Jacobians that were computed.
    negative : int
        Pseudo-data that are negative.
    reason : str
        Why it failed; empty if it did not.
    """

    index: int
    parameters: Floats
    chi2: float
    chi2_data: float
    steps: int
    negative: int
    reason: str

    def packed(self) -> bytes:
        """Return the bytes of a record."""
        text = self.reason.encode("utf-8", "replace")
        head = _REPLICA.pack(self.index, self.chi2, self.chi2_data, self.steps, self.negative, len(text))
        return head + text + np.ascontiguousarray(self.parameters, dtype="<f8").tobytes()

    @classmethod
    def unpacked(cls, data: bytes) -> Outcome:
        """Return the replica of a record."""
        index, chi2, chi2_data, steps, negative, length = _REPLICA.unpack_from(data)
        start = _REPLICA.size
        text = data[start : start + length].decode("utf-8")
        parameters = np.frombuffer(data, dtype="<f8", offset=start + length).astype(np.float64)
        return cls(index, parameters, chi2, chi2_data, steps, negative, text)


class Journal:
    """An open journal; a context manager.

    Parameters
    ----------
    path : path-like
        Made if it does not exist.
    fit : mapping
        What this fit is, as numbers, texts and lists of them.

    Raises
    ------
    StoreError
        If the file is no journal, belongs to another fit or does not say to which, is in use, or cannot be
        read or written.
    """

    def __init__(self, path: PathLike, fit: Mapping[str, Any]) -> None:
        self._path = path
        self.outcomes: dict[int, Outcome] = {}
        try:
            self._file = os.open(path, os.O_RDWR | os.O_CREAT | getattr(os, "O_BINARY", 0), 0o666)
        except (OSError, ValueError) as error:
            raise StoreError(f"{shown(path)}: cannot be opened: {reason(error)}") from error
        try:
            self._lock()
            self.fit = self._read(dict(fit))
        except BaseException:
            os.close(self._file)
            raise

    def append(self, outcomes: Iterable[Outcome]) -> None:
        """Add replicas, and wait until they are on the disk.

        Raises
        ------
        StoreError
            If they cannot be written; what was there before stays.
        """
        found = list(outcomes)
        self._write(b"".join(_record(outcome.packed()) for outcome in found))
        self.outcomes.update((outcome.index, outcome) for outcome in found)

    def __enter__(self) -> Journal:
        return self

    def __exit__(self, *_: object) -> None:
        os.close(self._file)

    def _lock(self) -> None:
        """Keep a second run out."""
        if fcntl is None:
            return
        try:
            fcntl.flock(self._file, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            raise StoreError(f"{shown(self._path)}: another run writes to this journal") from None
        except OSError:  # a file system without locks
            return

    def _read(self, fit: dict[str, Any]) -> dict[str, Any]:
        """Read what is there, cut off what is not whole, and return the fit as the journal has it."""
        data = self._all()
        if data[: len(_MAGIC)] != _MAGIC[: len(data)]:
            raise StoreError(f"{shown(self._path)}: not a journal of scalewright")
        records = list(_records(data))
        if not records:
            first = _MAGIC + _record(json.dumps(fit).encode())
            if len(data) > len(first):  # no kill while the first record was written leaves so much
                what = "its first record is damaged, so that nobody knows which fit the others are of"
                raise StoreError(f"{shown(self._path)}: {what}")
            self._cut(0)
            self._write(first)
            return fit
        try:
            known = json.loads(records[0][1])
            for _, payload in records[1:]:
                outcome = Outcome.unpacked(payload)
                self.outcomes[outcome.index] = outcome
        except (ValueError, struct.error) as error:
            raise StoreError(f"{shown(self._path)}: sealed, but not as we write it: {error}") from error
        for name in {**known, **fit}:
            if not _same(known.get(name), fit.get(name)):
                raise StoreError(f"{shown(self._path)}: this journal is of another fit: its {name} differs")
        self._cut(records[-1][0])
        return dict(known)

    def _all(self) -> bytes:
        parts = []
        os.lseek(self._file, 0, os.SEEK_SET)
        while part := os.read(self._file, 2**24):
            parts.append(part)
        return b"".join(parts)

    def _cut(self, length: int) -> None:
        os.ftruncate(self._file, length)
        os.lseek(self._file, 0, os.SEEK_END)

    def _write(self, data: bytes) -> None:
        """Append to the file, and wait for the disk; on failure leave it as it was."""
        before = os.lseek(self._file, 0, os.SEEK_END)
        try:
            done = 0
            while done < len(data):
                done += os.write(self._file, data[done:])
            os.fsync(self._file)
        except OSError as error:
            with contextlib.suppress(OSError):
                self._cut(before)
            kept = f"the {len(self.outcomes)} replicas written before are safe"
            raise StoreError(f"{shown(self._path)}: cannot be written: {reason(error)}; {kept}") from error


def _record(payload: bytes) -> bytes:
    return _HEAD.pack(len(payload), zlib.crc32(payload)) + payload


def _records(data: bytes) -> Iterator[tuple[int, bytes]]:
    """Yield the end and the payload of each whole record, up to the first that is not."""
    place = len(_MAGIC)
    while place + _HEAD.size <= len(data):
        length, check = _HEAD.unpack_from(data, place)
        end = place + _HEAD.size + length
        payload = data[place + _HEAD.size : end]
        # zeros, which a power cut leaves where nothing was written yet, would be an empty sealed record
        if not 0 < length <= _LONGEST or end > len(data) or zlib.crc32(payload) != check:
            return
        yield end, payload
        place = end


def _same(one: Any, other: Any) -> bool:
    """Compare descriptions, numbers to rounding."""
    if isinstance(one, list) and isinstance(other, list):
        return len(one) == len(other) and all(_same(a, b) for a, b in zip(one, other, strict=True))
    if isinstance(one, float) and isinstance(other, int | float):
        return one == other or abs(one - other) <= _SAME * max(abs(one), abs(other))
    return bool(one == other)
