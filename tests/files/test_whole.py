"""Writing whole or not at all: each call that can fail is made to fail, writers are killed and race."""

import errno
import multiprocessing
import os
import resource
import signal
import subprocess
import sys
import time

import pytest
from files.children import keep_writing
from scalewright.errors import StoreError
from scalewright.files import whole
from scalewright.files.whole import map_whole, read_whole, write_whole


def test_bytes_arrive(tmp_path):
    for data in (b"", b"a", bytes(range(256)) * 1000):
        write_whole(tmp_path / "a", data)
        assert (tmp_path / "a").read_bytes() == data
        assert read_whole(tmp_path / "a") == data
        assert bytes(map_whole(tmp_path / "a")) == data
    assert os.listdir(tmp_path) == ["a"]


def test_link_is_followed_and_permissions_are_kept(tmp_path):
    (tmp_path / "real").write_bytes(b"old")
    (tmp_path / "real").chmod(0o640)
    (tmp_path / "link").symlink_to("real")
    write_whole(tmp_path / "link", b"new")
    assert (tmp_path / "link").is_symlink()
    assert (tmp_path / "real").read_bytes() == b"new"
    assert (tmp_path / "real").stat().st_mode & 0o777 == 0o640


def test_names_up_to_the_limit_of_the_system(tmp_path):
    name = "é" * 127 + "x"  # 255 bytes
    write_whole(tmp_path / name, b"data")
    assert os.listdir(tmp_path) == [name]


@pytest.mark.parametrize(
    ("target", "says"),
    [
        ("missing/a", "cannot be written: no such file or directory"),
        ("folder", "not a plain file"),
        ("pipe", "not a plain file"),
        ("file/a", "not a directory"),
        ("x" * 300, "file name too long"),
        ("a\0b", "null byte"),
    ],
)
def test_a_place_where_nothing_can_be_written_is_named(tmp_path, target, says):
    (tmp_path / "folder").mkdir()
    (tmp_path / "file").write_bytes(b"old")
    os.mkfifo(tmp_path / "pipe")
    before = sorted(os.listdir(tmp_path))
    with pytest.raises(StoreError, match=says):
        write_whole(tmp_path / target, b"new")
    assert sorted(os.listdir(tmp_path)) == before


# Each call of the system that a save makes, and what it may answer.
CALLS = ["open", "write", "fsync", "replace"]
ANSWERS = [errno.EIO, errno.ENOSPC, errno.EDQUOT, errno.EROFS]


@pytest.mark.parametrize("answer", ANSWERS, ids=errno.errorcode.get)
@pytest.mark.parametrize("call", CALLS)
def test_when_the_nth_call_fails_the_old_file_stays(tmp_path, monkeypatch, call, answer):
    """Calls fail at N = 1, 2, ... until a save succeeds; the flush of the folder comes after the rename."""
    target = tmp_path / "a"
    real = getattr(os, call)
    for n in range(1, 10):
        target.write_bytes(b"old")
        count = 0

        def failing(*args, **kwargs):
            nonlocal count
            count += 1
            if count == n:  # noqa: B023
                raise OSError(answer, os.strerror(answer))
            return real(*args, **kwargs)

        with monkeypatch.context() as patch:
            patch.setattr(whole.os, call, failing)
            try:
                write_whole(target, b"new")
                failed = None
            except StoreError as error:
                failed = str(error)
        assert os.listdir(tmp_path) == ["a"]
        if failed is None:
            assert target.read_bytes() == b"new"
            break
        in_place = "could not be flushed" in failed
        assert target.read_bytes() == (b"new" if in_place else b"old")
        assert os.strerror(answer).lower()[1:] in failed.lower()
    assert n > 1
    assert failed is None


def test_short_writes_are_continued(tmp_path, monkeypatch):
    real = os.write
    monkeypatch.setattr(whole.os, "write", lambda fd, data: real(fd, data[:7]))
    write_whole(tmp_path / "a", bytes(range(200)))
    assert (tmp_path / "a").read_bytes() == bytes(range(200))


def test_an_interrupt_leaves_nothing_behind(tmp_path, monkeypatch):
    def interrupted(fd):
        raise KeyboardInterrupt

    (tmp_path / "a").write_bytes(b"old")
    monkeypatch.setattr(whole.os, "fsync", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write_whole(tmp_path / "a", b"new")
    assert os.listdir(tmp_path) == ["a"]
    assert (tmp_path / "a").read_bytes() == b"old"


def test_file_size_limit_leaves_the_old_file(tmp_path):
    """A real limit of the system, in a child process: what a full disk does."""
    (tmp_path / "a").write_bytes(b"old")
    code = (
        "import sys; from scalewright.files.whole import write_whole\n"
        "from scalewright.errors import StoreError\n"
        "try: write_whole(sys.argv[1], bytes(200_000))\n"
        "except StoreError as error: print(error); sys.exit(7)"
    )

    def limit():
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
        resource.setrlimit(resource.RLIMIT_FSIZE, (100_000, 100_000))

    done = subprocess.run(
        [sys.executable, "-c", code, str(tmp_path / "a")],
        preexec_fn=limit,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 7, done.stderr
    assert "file too large" in done.stdout
    assert os.listdir(tmp_path) == ["a"]
    assert (tmp_path / "a").read_bytes() == b"old"


def test_abandoned_temporary_files_go_and_living_ones_stay(tmp_path):
    import fcntl

    abandoned, living, foreign = (tmp_path / f".a.{tail}" for tail in ("0123abcd", "deadbeef", "backup00"))
    for path in (abandoned, living, foreign, tmp_path / ".ab.0123abcd"):
        path.write_bytes(b"part")
    with living.open("rb") as held:
        fcntl.flock(held, fcntl.LOCK_EX)
        write_whole(tmp_path / "a", b"new")
    assert sorted(os.listdir(tmp_path)) == [".a.backup00", ".a.deadbeef", ".ab.0123abcd", "a"]


WRITER = """
import sys
from scalewright.files.whole import write_whole
print("ready", flush=True)
while True:
    for byte in b"xy":
        write_whole(sys.argv[1], bytes([byte]) * 3_000_000)
"""


def test_a_killed_writer_leaves_a_whole_file(tmp_path):
    target = tmp_path / "a"
    for i in range(12):
        with subprocess.Popen([sys.executable, "-c", WRITER, str(target)], stdout=subprocess.PIPE) as child:
            child.stdout.readline()
            time.sleep(0.01 + 0.0037 * i)  # different moments of the cycle of write, flush, rename
            child.kill()
        if target.exists():
            data = target.read_bytes()
            assert data in (b"x" * 3_000_000, b"y" * 3_000_000)
    write_whole(target, b"last")
    assert os.listdir(tmp_path) == ["a"]


def test_racing_writers_never_mix(tmp_path):
    """Three write, one reads until it has seen each of the three ten times: no clock, no number of cores."""
    target, size = tmp_path / "a", 100_000
    write_whole(target, b"0" * size)
    start = multiprocessing.get_context("spawn")
    stop = start.Event()
    writers = [start.Process(target=keep_writing, args=(target, byte, size, stop)) for byte in b"123"]
    for writer in writers:
        writer.start()
    seen = dict.fromkeys(b"0123", 0)
    try:
        while min(seen[byte] for byte in b"123") < 10:
            data = read_whole(target)
            assert len(data) == size
            assert len(set(data)) == 1
            seen[data[0]] += 1
            assert all(writer.is_alive() for writer in writers)
    finally:
        stop.set()
        for writer in writers:
            writer.join()
    assert [writer.exitcode for writer in writers] == [0, 0, 0]
    assert os.listdir(tmp_path) == ["a"]
