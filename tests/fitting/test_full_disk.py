"""A disk that is full while a run writes: a real one of 64 kB (tmpfs), and a limit on the size of files."""

import os
import pathlib
import shutil
import subprocess
import sys

import pytest
from fitting.runs import COUNT, assert_same_bits, bent_problem, replicas_of
from scalewright import StoreError
from scalewright.fitting.ensemble import Ensemble

resource = pytest.importorskip("resource", reason="this system has no limits on files")
#: Bytes; a file takes whole pages.
DISK, PAGE = 65536, 4096
TESTS = pathlib.Path(__file__).parents[1]

#: Runs replicas, or saves an ensemble, where files cannot grow beyond so many bytes; prints what is said.
CHILD = """
import resource, signal, sys
from fitting.runs import bent_problem, replicas_of
from scalewright import StoreError
from scalewright.fitting.ensemble import Ensemble
what, path, limit = sys.argv[1], sys.argv[2], int(sys.argv[3])
made = replicas_of(bent_problem(), replicas=2, workers=1) if what == "save" else None
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
resource.setrlimit(resource.RLIMIT_FSIZE, (limit, limit))
try:
    if what == "save":
        made.save(path)
    else:
        replicas_of(bent_problem(), workers=int(what), chunk=1, journal=path)
except StoreError as error:
    print(error)
    raise SystemExit(3)
"""


def limited(what, path, limit):
    """Return what a child process said when it met the limit."""
    command = [sys.executable, "-c", CHILD, str(what), str(path), str(limit)]
    done = subprocess.run(command, cwd=TESTS, capture_output=True, text=True, timeout=100, check=False)
    assert done.returncode == 3, done.stderr
    return done.stdout


def resumed(path, replicas=COUNT):
    """Go on with a journal; return the ensemble and how many replicas were known."""
    seen = []
    found = replicas_of(
        bent_problem(), replicas=replicas, workers=1, journal=path, progress=lambda *p: seen.append(p[0])
    )
    return found, seen[0]


def size_of_journal(path, replicas):
    """Return how long a journal of so many replicas is."""
    replicas_of(bent_problem(), replicas=replicas, workers=1, journal=path)
    return path.stat().st_size


def test_a_journal_that_cannot_grow_keeps_what_it_has(serial, tmp_path):
    path = tmp_path / "run.journal"
    said = limited(1, path, size_of_journal(tmp_path / "other.journal", 6) + 50)  # half of a record
    assert "cannot be written" in said
    assert "the 6 replicas written before are safe" in said
    found, known = resumed(path)
    assert known == 6
    assert_same_bits(serial, found)


def test_workers_without_room_for_the_map_are_an_error_and_leave_nothing(tmp_path, monkeypatch):
    monkeypatch.setenv("TMPDIR", str(tmp_path))
    said = limited(2, tmp_path / "run.journal", 3000)
    assert "cannot be written" in said
    assert [path.name for path in tmp_path.iterdir()] == ["run.journal"]


def test_an_ensemble_that_cannot_be_saved_leaves_the_old_file(tmp_path):
    path = tmp_path / "e.h5"
    old = replicas_of(bent_problem(), replicas=3, workers=1)
    old.save(path)
    assert "cannot be written" in limited("save", path, 1000)
    assert_same_bits(old, Ensemble.load(path))
    assert [one.name for one in tmp_path.iterdir()] == ["e.h5"]


@pytest.fixture
def small_disk(tmp_path):
    """A file system of 64 kB; skips where mounting is refused."""
    if shutil.which("mount") is None or not hasattr(os, "geteuid") or os.geteuid() != 0:
        pytest.skip("only root may mount a file system")
    folder = tmp_path / "disk"
    folder.mkdir()
    done = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", f"size={DISK}", "tmpfs", str(folder)], capture_output=True
    )
    if done.returncode:
        pytest.skip("mounting is refused here")
    yield folder
    subprocess.run(["umount", "-l", str(folder)], check=True)


def test_a_full_disk_loses_nothing(small_disk, tmp_path):
    path, filler, count = small_disk / "run.journal", small_disk / "filler", 80
    whole = replicas_of(bent_problem(), replicas=count, workers=1)
    pages = -(-size_of_journal(tmp_path / "other.journal", 1) // PAGE)  # room for one replica, not for all
    filler.write_bytes(b"x" * (DISK - pages * PAGE))
    with pytest.raises(
        StoreError, match=r"cannot be written: no space left.*replicas written before are safe"
    ):
        replicas_of(bent_problem(), replicas=count, workers=1, journal=path)
    with pytest.raises(StoreError, match="cannot be written"):
        whole.save(small_disk / "e.h5")
    assert sorted(one.name for one in small_disk.iterdir()) == ["filler", "run.journal"]
    filler.unlink()
    found, known = resumed(path, count)
    assert 0 < known < count
    assert_same_bits(whole, found)
