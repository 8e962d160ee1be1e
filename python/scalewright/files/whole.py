"""Files that are written whole or not at all, and read as one block of bytes.

A writer killed at any moment, a full disk or a second writer leaves the old file or the new one, never a
mixture. The data go to a temporary file ``.NAME.xxxxxxxx`` beside the target, are flushed to the disk, and
take the target's place by one rename. A killed writer leaves its temporary file behind; the next save to
the same target removes it. What is in the bytes is not known here.
"""

import contextlib
import errno
import mmap
import os
import stat
import time
from collections.abc import Iterator
from typing import TypeAlias

from ..errors import StoreError

try:
    import fcntl
except ImportError:  # not on Windows
    fcntl = None  # type: ignore[assignment]

PathLike: TypeAlias = str | bytes | os.PathLike[str] | os.PathLike[bytes]

# Where files cannot be locked, a temporary file is taken for an abandoned one after a day.
_ABANDONED_AFTER_S = 86400.0
_SUFFIX_DIGITS = 8
# Systems and file systems on which a folder cannot be flushed answer with one of these; there is nothing to
# wait for.
_NO_FOLDER_FLUSH = (errno.EINVAL, errno.ENOTSUP, errno.EBADF, errno.EACCES, errno.EPERM)


def write_whole(path: PathLike, data: bytes | bytearray | memoryview) -> None:
    """Put `data` at `path`, whole or not at all.

    A link is followed, the permissions of a file that is replaced are kept.

    Parameters
    ----------
    path
        The target; its folder must exist.
    data
        The bytes of the file.

    Raises
    ------
    StoreError
        If the folder does not exist, the disk is full, the target is not a plain file, or the system
        refuses. Whatever stood at `path` is untouched then.
    """
    try:
        _write(os.path.realpath(os.fsdecode(path)), memoryview(data).cast("B"))
    except (OSError, ValueError) as error:
        if isinstance(error, StoreError):
            raise
        raise StoreError(f"{shown(path)}: cannot be written: {reason(error)}") from error


def read_whole(path: PathLike) -> bytes:
    """Read a plain file into memory.

    Parameters
    ----------
    path
        The file; a pipe, a device or a folder is refused without waiting for it.

    Returns
    -------
    bytes
        All of it.

    Raises
    ------
    StoreError
        If it is not a plain file or cannot be read.
    """
    with _opened(path) as (descriptor, size), os.fdopen(descriptor, "rb", closefd=False) as file:
        return file.read(size + 1) if size else b""


def map_whole(path: PathLike) -> memoryview:
    """Map a plain file into memory, read-only; processes that map the same file share its pages.

    Parameters
    ----------
    path
        The file. Our own writer never changes a file in place, so a view stays what it was when the file is
        replaced.

    Returns
    -------
    memoryview
        All of it; it keeps the mapping alive.

    Raises
    ------
    StoreError
        If it is not a plain file or cannot be read.
    """
    with _opened(path) as (descriptor, size):
        if size == 0:  # an empty file cannot be mapped
            return memoryview(b"")
        return memoryview(mmap.mmap(descriptor, size, access=mmap.ACCESS_READ))


def shown(path: PathLike) -> str:
    """Return the path as a message shows it: on one line, whatever characters it has."""
    name = os.fsdecode(path)
    return name if name.isprintable() else ascii(name)


def reason(error: Exception) -> str:
    """Return what the system said, without number and path."""
    said = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
    return said[:1].lower() + said[1:]


@contextlib.contextmanager
def _opened(path: PathLike) -> Iterator[tuple[int, int]]:
    """Open a plain file for reading and give its descriptor and size."""
    try:
        # Without O_NONBLOCK, opening a pipe would wait for somebody to write into it.
        descriptor = os.open(path, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0))
        try:
            status = os.fstat(descriptor)
            if not stat.S_ISREG(status.st_mode):
                raise StoreError(f"{shown(path)}: cannot be read: not a plain file")
            yield descriptor, status.st_size
        finally:
            os.close(descriptor)
    except (OSError, ValueError) as error:
        if isinstance(error, StoreError):
            raise
        raise StoreError(f"{shown(path)}: cannot be read: {reason(error)}") from error


def _write(target: str, data: memoryview) -> None:
    """Write to a temporary file, flush, rename, flush the folder."""
    mode = _mode_of(target)
    folder, name = os.path.split(target)
    _remove_abandoned(folder, _stem(name))
    descriptor, temporary = _create(folder, _stem(name))
    try:
        try:
            if mode is not None:
                with contextlib.suppress(OSError):  # somebody else's file: ours has our rights
                    os.chmod(temporary, mode)
            _write_all(descriptor, data)
            os.fsync(descriptor)
            if fcntl is not None:  # while it is still locked
                os.replace(temporary, target)
        finally:
            os.close(descriptor)
        if fcntl is None:  # Windows renames closed files only
            os.replace(temporary, target)
    except BaseException:
        with contextlib.suppress(OSError):
            os.unlink(temporary)
        raise
    _flush_folder(folder, target)


def _mode_of(target: str) -> int | None:
    """Return the permissions of the file that will be replaced, None if there is none."""
    try:
        status = os.stat(target)
    except FileNotFoundError:
        return None
    if not stat.S_ISREG(status.st_mode):
        raise StoreError(f"{shown(target)}: cannot be written: not a plain file")
    return stat.S_IMODE(status.st_mode)


def _stem(name: str) -> str:
    """Return the part of a temporary name that tells whose it is, short enough for 255 bytes."""
    if not name:
        raise StoreError("cannot be written: the path has no file name")
    room = 255 - _SUFFIX_DIGITS - 2
    return f".{os.fsdecode(os.fsencode(name)[:room])}."


def _create(folder: str, stem: str) -> tuple[int, str]:
    """Create and lock a temporary file that no other writer takes for an abandoned one."""
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0)
    while True:
        temporary = os.path.join(folder, stem + os.urandom(_SUFFIX_DIGITS // 2).hex())
        try:
            descriptor = os.open(temporary, flags, 0o666)
        except FileExistsError:
            continue
        with contextlib.suppress(OSError):
            if fcntl is not None:
                fcntl.flock(descriptor, fcntl.LOCK_EX)
        # Another writer may have removed it between creation and lock.
        if os.path.exists(temporary):
            return descriptor, temporary
        os.close(descriptor)


def _write_all(descriptor: int, data: memoryview) -> None:
    """Write everything, however little the system takes at a time."""
    done = 0
    while done < len(data):
        done += os.write(descriptor, data[done:])


def _remove_abandoned(folder: str, stem: str) -> None:
    """Remove the temporary files of killed writers of the same target; those of living ones are locked."""
    try:
        names = os.listdir(folder)
    except OSError:  # the write itself will tell
        return
    for name in names:
        digits = name.removeprefix(stem)
        if digits != name and len(digits) == _SUFFIX_DIGITS and all(c in "0123456789abcdef" for c in digits):
            with contextlib.suppress(OSError):
                _remove_if_abandoned(os.path.join(folder, name))


def _remove_if_abandoned(temporary: str) -> None:
    descriptor = os.open(temporary, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0))
    try:
        if fcntl is None:
            if time.time() - os.fstat(descriptor).st_mtime < _ABANDONED_AFTER_S:
                return
        else:
            fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)  # fails while its writer lives
        os.unlink(temporary)
    finally:
        os.close(descriptor)


def _flush_folder(folder: str, target: str) -> None:
    """Flush the folder, so that the new name survives a power cut."""
    try:
        descriptor = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
    except OSError as error:
        if error.errno not in _NO_FOLDER_FLUSH:
            raise StoreError(
                f"{shown(target)}: written, but its folder could not be flushed to the disk: {reason(error)}"
            ) from error
