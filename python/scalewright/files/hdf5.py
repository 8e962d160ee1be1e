"""Stored files: HDF5 behind a seal that is checked before a byte of it is believed.

The first 512 bytes, the user block that HDF5 leaves to its owner, hold magic, version of the format, length
and SHA-256 of all that follows, and a CRC-32 of themselves. The HDF5 image is built in memory and written
by `whole.write_whole`; on reading, the file is mapped, the seal verified, and only then does the HDF5
library see the bytes. It never opens the path itself: no locks on network file systems, no half-written
file, no crash on damaged metadata. The seal finds accidents, not forgery. Any HDF5 program opens the
result.

Arrays come back as read-only views of the mapped file, so that the workers of one machine share its pages.
"""

import hashlib
import io
import struct
import zlib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from ..errors import StoreError
from .whole import PathLike, map_whole, read_whole, shown, write_whole

Array: TypeAlias = NDArray[Any]
Attribute: TypeAlias = str | int | float

FORMAT_VERSION = 1
KINDS = ("operators", "densities", "forward map", "ensemble", "fit")

_BLOCK = 512
# The first byte and the two kinds of line end show a transfer that took the file for text.
_MAGIC = b"\x89SCALEWR\r\n\x1a\n\0\0\0"
_HEAD = struct.Struct("<16sIIQ32s")  # magic, format version, size of the block, length and digest of the rest
_NOTE = b"\nscalewright: an HDF5 file with a user block of 512 bytes; `scalewright info FILE` verifies it\n"
# Cache lines; views of such arrays are aligned for every instruction set.
_ALIGNMENT = 64
_DEEPEST = 4
_DTYPES = ("<f8", "<i8", "|S")


@dataclass(frozen=True)
class Summary:
    """What is in a stored file that passed its checks.

    Attributes
    ----------
    path
        The file.
    kind
        "operators", "densities", "forward map", "ensemble" or "fit".
    size
        Bytes.
    format_version
        Version of the layout.
    sha256
        Digest of everything after the user block, as hexadecimal text.
    arrays
        Name, element type and shape of each array, in order of name.
    attributes
        What is noted beside the arrays.
    """

    path: str
    kind: str
    size: int
    format_version: int
    sha256: str
    arrays: tuple[tuple[str, str, tuple[int, ...]], ...]
    attributes: Mapping[str, Attribute]


def write(
    path: PathLike, kind: str, arrays: Mapping[str, Array], attributes: Mapping[str, Attribute] | None = None
) -> None:
    """Store named arrays, whole or not at all.

    Parameters
    ----------
    path
        The target; an old file is replaced only by a complete new one.
    kind
        What the file holds: "operators", "densities", "forward map", "ensemble" or "fit".
    arrays
        HDF5 path ("/grid/edges") to an array of floats, integers or text, of any rank.
    attributes
        Short notes kept at the root of the file. Version of the program and of the format are added.

    Raises
    ------
    StoreError
        If it cannot be written.

    Notes
    -----
    Equal content makes equal bytes.
    """
    notes: dict[str, Attribute] = {
        "kind": kind,
        "format_version": FORMAT_VERSION,
        "program": f"scalewright {_version()}",
    }
    image = _image(arrays, {**(attributes or {}), **notes})
    with image.getbuffer() as whole:
        whole[:_BLOCK] = _seal(whole[_BLOCK:])
        write_whole(path, whole)


def read(path: PathLike, kind: str, copy: bool = False) -> tuple[dict[str, Array], dict[str, Attribute]]:
    """Verify a stored file and give its arrays.

    Parameters
    ----------
    path
        The file.
    kind
        What it must hold.
    copy
        Read it into memory instead of mapping it: for network file systems, where a mapped file that
        somebody changes in place would stop the process.

    Returns
    -------
    dict, dict
        Arrays by HDF5 path, read-only; attributes.

    Raises
    ------
    StoreError
        If the file is not ours, damaged, of another kind or of a newer format.
    """
    data = memoryview(read_whole(path)) if copy else map_whole(path)
    _verify(data, path)
    arrays, attributes = _contents(data, path)
    found = attributes["kind"]
    if found != kind:
        raise StoreError(f"{shown(path)}: holds {found}, not {kind}")
    return arrays, attributes


def identify(path: PathLike) -> Summary:
    """Verify a stored file and say what is in it.

    Parameters
    ----------
    path
        The file.

    Returns
    -------
    Summary
        Kind, size, digest, arrays and attributes.

    Raises
    ------
    StoreError
        If the file is not ours, damaged or of a newer format.
    """
    data = map_whole(path)
    version, digest = _verify(data, path)
    arrays, attributes = _contents(data, path)
    listed = tuple((name, _plain(a.dtype), a.shape) for name, a in sorted(arrays.items()))
    return Summary(shown(path), str(attributes["kind"]), len(data), version, digest.hex(), listed, attributes)


def _library() -> Any:
    """Import h5py where it is used: it takes longer than the rest of the package."""
    import h5py  # type: ignore[import-untyped]

    return h5py


def _version() -> str:
    from importlib import metadata

    try:
        return metadata.version("scalewright")
    except metadata.PackageNotFoundError:  # run from a source tree
        return "unknown"


def _plain(dtype: np.dtype[Any]) -> str:
    return "text" if dtype.kind == "U" else dtype.name


# ---- writing -------------------------------------------------------------------------------------


def _image(arrays: Mapping[str, Array], attributes: Mapping[str, Attribute]) -> io.BytesIO:
    """Build the HDF5 file in memory, with room for the seal."""
    h5py = _library()
    image = io.BytesIO()
    with h5py.File(
        image,
        "w",
        userblock_size=_BLOCK,
        libver=("v110", "v110"),
        alignment_threshold=1,
        alignment_interval=_ALIGNMENT,
    ) as file:
        for name, note in sorted(attributes.items()):
            file.attrs[name] = note
        for name, array in sorted(arrays.items()):
            stored = _storable(np.asarray(array))
            file.create_dataset(name, data=stored, dtype=stored.dtype, track_times=False)
    return image


def _storable(array: Array) -> Array:
    """Return the array in one of the three element types that are stored, whatever machine it comes from."""
    if array.dtype.kind == "U":
        return np.char.encode(array, "utf-8")
    if array.dtype.kind == "f":
        return np.ascontiguousarray(array, dtype="<f8").reshape(array.shape)
    if array.dtype.kind in "iu":
        return np.ascontiguousarray(array, dtype="<i8").reshape(array.shape)
    raise TypeError(f"arrays of type {array.dtype} are not stored")


def _seal(payload: memoryview) -> bytes:
    digest = hashlib.sha256(payload).digest()
    head = _HEAD.pack(_MAGIC, FORMAT_VERSION, _BLOCK, len(payload), digest) + _NOTE
    head = head.ljust(_BLOCK - 4, b"\0")
    return head + struct.pack("<I", zlib.crc32(head))


# ---- reading -------------------------------------------------------------------------------------


def _verify(data: memoryview, path: PathLike) -> tuple[int, bytes]:
    """Check the seal; return version of the format and digest."""
    if len(data) < len(_MAGIC) or data[: len(_MAGIC)] != _MAGIC:
        raise StoreError(f"{shown(path)}: not a stored file of scalewright ({_looks_like(data)})")
    if len(data) < _BLOCK:
        raise StoreError(f"{shown(path)}: damaged: cut off after {len(data)} bytes")
    head = data[: _BLOCK - 4]
    if struct.unpack("<I", data[_BLOCK - 4 : _BLOCK])[0] != zlib.crc32(head):
        raise StoreError(f"{shown(path)}: damaged: the first {_BLOCK} bytes do not match their checksum")
    _, version, block, length, digest = _HEAD.unpack(head[: _HEAD.size])
    if version > FORMAT_VERSION:
        limit = f"this one reads up to {FORMAT_VERSION}"
        raise StoreError(f"{shown(path)}: made by a newer release (format {version}; {limit})")
    if version < 1 or block != _BLOCK:
        raise StoreError(f"{shown(path)}: format {version} with a head of {block} bytes is not known")
    if len(data) - _BLOCK != length:
        raise StoreError(f"{shown(path)}: damaged: {len(data)} bytes where {_BLOCK + length} were written")
    if hashlib.sha256(data[_BLOCK:]).digest() != digest:
        raise StoreError(f"{shown(path)}: damaged: the content does not match its SHA-256")
    return version, digest


def _looks_like(data: memoryview) -> str:
    """Say what a foreign file seems to be."""
    if len(data) == 0:
        return "it is empty"
    start = bytes(data[:1024])
    if start[1:8] == _MAGIC[1:8]:
        return "it was damaged, perhaps by a transfer in text mode"
    if start.startswith(b"\x89HDF\r\n\x1a\n"):
        return "it is an HDF5 file of another origin"
    if b"\0" not in start:
        return "it looks like text"
    return "unknown content"


class _Stream(io.RawIOBase):
    """The mapped bytes as a file that the HDF5 library may read."""

    def __init__(self, data: memoryview) -> None:
        self._data, self._at = data, 0

    def readable(self) -> bool:
        return True

    def seekable(self) -> bool:
        return True

    def seek(self, offset: int, whence: int = io.SEEK_SET) -> int:
        self._at = offset + (0, self._at, len(self._data))[whence]
        return self._at

    def tell(self) -> int:
        return self._at

    def readinto(self, buffer: Any) -> int:
        part = self._data[self._at : self._at + len(buffer)]
        buffer[: len(part)] = part
        self._at += len(part)
        return len(part)


def _contents(data: memoryview, path: PathLike) -> tuple[dict[str, Array], dict[str, Attribute]]:
    """Let HDF5 parse verified bytes. What still goes wrong was made by another program on purpose."""
    h5py = _library()
    try:
        with h5py.File(_Stream(data), "r") as file:
            arrays = {name: _view(data, dataset) for name, dataset in _datasets(file, "", 0)}
            attributes = {str(name): _note(value) for name, value in file.attrs.items()}
            if attributes.get("kind") not in KINDS:
                raise ValueError(f"the kind {attributes.get('kind')!r} is not known")
        return arrays, attributes
    except (OSError, KeyError, ValueError, RuntimeError, TypeError, AttributeError, OverflowError) as error:
        raise StoreError(f"{shown(path)}: sealed, but not as we write it: {error}") from error


def _datasets(group: Any, prefix: str, depth: int) -> Iterator[tuple[str, Any]]:
    """Walk over the datasets; links that lead elsewhere are refused."""
    h5py = _library()
    if depth > _DEEPEST:
        raise ValueError(f"more than {_DEEPEST} groups deep")
    for name in group:
        if not isinstance(group.get(name, getlink=True), h5py.HardLink):
            raise ValueError(f"{prefix}/{name} is a link")
        item = group[name]
        if isinstance(item, h5py.Group):
            yield from _datasets(item, f"{prefix}/{name}", depth + 1)
        elif isinstance(item, h5py.Dataset):
            yield f"{prefix}/{name}", item
        else:
            raise ValueError(f"{prefix}/{name} is neither a group nor a dataset")


def _view(data: memoryview, dataset: Any) -> Array:
    """Return a dataset as a view of the bytes; text is decoded."""
    dtype: np.dtype[Any] = dataset.dtype
    if dtype.str[:2] != "|S" and dtype.str not in _DTYPES:
        raise ValueError(f"{dataset.name} has elements of type {dtype}")
    plist = dataset.id.get_create_plist()
    if plist.get_layout() != _library().h5d.CONTIGUOUS or plist.get_external_count():
        raise ValueError(f"{dataset.name} is not stored in one piece")
    shape = tuple(int(n) for n in dataset.shape)
    count = int(np.prod(shape, dtype=object)) if shape else 1
    # Behind a user block the offset does not tell that nothing was ever written.
    if count and dataset.id.get_storage_size() != count * dtype.itemsize:
        raise ValueError(f"{dataset.name} holds no values")
    offset = dataset.id.get_offset() if count else 0
    array = np.frombuffer(data[: len(data) if count else 0], dtype, count, offset).reshape(shape)
    if dtype.kind == "S":
        array = np.char.decode(array, "utf-8")
        array.flags.writeable = False
    return array


def _note(value: Any) -> Attribute:
    """Return an attribute as a plain Python value."""
    plain = value.item() if isinstance(value, np.generic) else value
    if not isinstance(plain, str | int | float):
        raise ValueError(f"an attribute of type {type(value).__name__}")
    return plain
