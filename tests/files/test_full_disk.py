"""A disk that is really full: a small file system in memory, where the machine lets us mount one."""

import os
import subprocess

import numpy as np
import pytest
from scalewright.errors import StoreError
from scalewright.files import hdf5


@pytest.fixture
def small_disk(tmp_path):
    place = tmp_path / "disk"
    place.mkdir()
    done = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", "size=1m", "tmpfs", place], capture_output=True, check=False
    )
    if done.returncode:
        pytest.skip("mounting is refused here")
    yield place
    subprocess.run(["umount", place], check=True)


def test_a_full_disk_leaves_the_old_file(small_disk):
    path = small_disk / "a.h5"
    hdf5.write(path, "densities", {"/values": np.arange(100.0)})
    old = path.read_bytes()
    room = os.statvfs(small_disk)
    free = room.f_bavail * room.f_frsize
    failed = 0
    for size in np.linspace(0.2, 3.0, 25) * free:
        try:
            hdf5.write(path, "densities", {"/values": np.arange(size // 8)})
        except StoreError as error:
            failed += 1
            assert "a.h5: cannot be written: no space left on device" in str(error)
            assert path.read_bytes() == old
        else:
            old = path.read_bytes()
            # smaller again, so that the next one has room for old and new
            hdf5.write(path, "densities", {"/values": np.arange(100.0)})
            old = path.read_bytes()
        assert os.listdir(small_disk) == ["a.h5"]
    assert 5 < failed < 25
