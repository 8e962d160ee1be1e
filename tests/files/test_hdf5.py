"""Stored files: what is written is read back, what was touched is refused.

The other program is plain h5py; seals are also made here, from the description of the format.
"""

import hashlib
import os
import struct
import zlib

import h5py
import numpy as np
import pytest
from scalewright.errors import StoreError
from scalewright.files import hdf5

ARRAYS = {
    "/grid/edges": np.array([0.0, 1.5, 16.1]),
    "/grid/degrees": np.array([8, 20]),
    "/blocks/names": np.array(["gluon<-gluon", "ns+", "é"]),
    "/blocks/values": np.arange(3 * 7 * 7, dtype=float).reshape(1, 3, 7, 7) / 3,
    "/theory": np.array('{"order": "NNLO"}'),
    "/none": np.array([], dtype=str),
    "/zero": np.zeros((0, 4)),
    "/one": np.array(2.5),
}
NOTES = {"units": "GeV^2", "start_q2": 1.5, "start_nf": 3}


@pytest.fixture
def stored(tmp_path):
    path = tmp_path / "set.h5"
    hdf5.write(path, "operators", ARRAYS, NOTES)
    return path


@pytest.mark.parametrize("copy", [False, True])
def test_what_is_written_is_read_back(stored, copy):
    arrays, notes = hdf5.read(stored, "operators", copy=copy)
    assert arrays.keys() == ARRAYS.keys()
    for name, array in ARRAYS.items():
        np.testing.assert_array_equal(arrays[name], array)
        assert arrays[name].shape == array.shape
        assert not arrays[name].flags.writeable
    assert {name: notes[name] for name in NOTES} == NOTES
    assert notes["format_version"] == hdf5.FORMAT_VERSION


def test_foreign_memory_layouts_are_stored_by_value(tmp_path):
    values = np.arange(24.0).reshape(2, 3, 4)
    kinds = {
        "/fortran": np.asfortranarray(values),
        "/big": values.astype(">f8"),
        "/single": values.astype("f4"),
        "/reversed": values[::-1, :, ::2],
        "/small": np.arange(5, dtype="i2"),
    }
    hdf5.write(tmp_path / "a.h5", "densities", kinds, {})
    arrays, _ = hdf5.read(tmp_path / "a.h5", "densities")
    for name, array in kinds.items():
        np.testing.assert_array_equal(arrays[name], array)
        assert arrays[name].flags.c_contiguous


def test_what_has_no_place_in_a_file_is_refused_before_writing(tmp_path):
    with pytest.raises(TypeError, match="complex128 are not stored"):
        hdf5.write(tmp_path / "a.h5", "densities", {"/z": np.array([1j])}, {})
    assert os.listdir(tmp_path) == []


def test_equal_content_makes_equal_bytes(stored, tmp_path):
    again = tmp_path / "again.h5"
    hdf5.write(again, "operators", dict(reversed(ARRAYS.items())), NOTES)
    assert again.read_bytes() == stored.read_bytes()
    arrays, notes = hdf5.read(stored, "operators")
    hdf5.write(again, "operators", arrays, notes)
    assert again.read_bytes() == stored.read_bytes()


def test_plain_h5py_opens_it(stored):
    with h5py.File(stored) as file:
        assert file.userblock_size == 512
        assert file.attrs["units"] == "GeV^2"
        assert file["theory"][()] == b'{"order": "NNLO"}'
        np.testing.assert_array_equal(file["blocks/values"][()], ARRAYS["/blocks/values"])


def test_summary_lists_the_arrays(stored):
    summary = hdf5.identify(stored)
    assert summary.kind == "operators"
    assert summary.size == stored.stat().st_size
    assert ("/blocks/values", "float64", (1, 3, 7, 7)) in summary.arrays
    assert ("/blocks/names", "text", (3,)) in summary.arrays


def test_another_kind_is_refused(stored):
    with pytest.raises(StoreError, match=r"set\.h5: holds operators, not densities"):
        hdf5.read(stored, "densities")


# ---- damage --------------------------------------------------------------------------------------


def is_accepted(path):
    try:
        hdf5.read(path, "operators")
    except StoreError as error:
        assert str(path) in str(error)
        return False
    return True


def refused(path, data):
    path.write_bytes(data)
    return not is_accepted(path)


def test_every_flipped_bit_is_noticed(stored):
    """All bits of the head and of the first and last KiB of the rest, one bit of each byte between them."""
    good = stored.read_bytes()
    accepted, tried = [], 0
    with stored.open("r+b", buffering=0) as file:
        for position, byte in enumerate(good):
            edge = position < 1536 or position >= len(good) - 1024
            for bit in range(8) if edge else (position % 8,):
                os.pwrite(file.fileno(), bytes([byte ^ 1 << bit]), position)
                tried += 1
                if is_accepted(stored):
                    accepted.append((position, bit))
            os.pwrite(file.fileno(), bytes([byte]), position)
    assert not accepted
    assert tried > 16_000
    assert is_accepted(stored)  # the undamaged bytes are, by the same check


def test_every_truncation_and_extension_is_noticed(stored, tmp_path):
    good = stored.read_bytes()
    lengths = [*range(0, 600), *range(600, len(good), 7), len(good) - 1]
    assert all(refused(tmp_path / "bad.h5", good[:length]) for length in lengths)
    assert all(refused(tmp_path / "bad.h5", good + b"\0" * more) for more in (1, 2, 511, 512, 4096))


def test_lost_and_exchanged_pieces_are_noticed(stored, tmp_path):
    good = stored.read_bytes()
    pieces = [good[start : start + 512] for start in range(0, len(good), 512)]
    for i in range(len(pieces)):
        if any(pieces[i]):
            zeroed = [*pieces[:i], bytes(len(pieces[i])), *pieces[i + 1 :]]
            assert refused(tmp_path / "bad.h5", b"".join(zeroed))
        assert refused(tmp_path / "bad.h5", b"".join(pieces[: i + 1] + pieces[i:]))
        if i and pieces[i] != pieces[i - 1]:
            swapped = [*pieces[: i - 1], pieces[i], pieces[i - 1], *pieces[i + 1 :]]
            assert refused(tmp_path / "bad.h5", b"".join(swapped))


def test_random_flips_in_a_large_set_are_noticed(tmp_path):
    rng = np.random.default_rng(20)
    hdf5.write(tmp_path / "big.h5", "operators", {"/blocks/values": rng.normal(size=(4, 15, 61, 61))}, {})
    good = (tmp_path / "big.h5").read_bytes()
    bad = bytearray(good)
    for position in rng.integers(len(good), size=60):
        bad[position] ^= 1 << int(rng.integers(8))
        assert refused(tmp_path / "bad.h5", bad)
        bad[position] = good[position]


# ---- not ours ------------------------------------------------------------------------------------


def foreign_hdf5(path):
    with h5py.File(path, "w") as file:
        file["x"] = np.arange(5.0)


FOREIGN = {
    "empty": (lambda p: p.write_bytes(b""), "it is empty"),
    "text": (lambda p: p.write_text("q2,nf,x\n1,3,0.1\n"), "it looks like text"),
    "picture": (lambda p: p.write_bytes(b"\x89PNG\r\n\x1a\n" + bytes(50)), "unknown content"),
    "hdf5": (foreign_hdf5, "HDF5 file of another origin"),
    "folder": (lambda p: p.mkdir(), "not a plain file"),
    "pipe": (os.mkfifo, "not a plain file"),
    "missing": (lambda p: None, "no such file"),
    "broken link": (lambda p: p.symlink_to("nowhere"), "no such file"),
    "link to itself": (lambda p: p.symlink_to(p.name), "too many levels"),
}


@pytest.mark.timeout(5)
@pytest.mark.parametrize("what", FOREIGN)
@pytest.mark.parametrize("name", ["a.h5", "with space.h5", "line\nbreak", b"\xff\xfe"], ids=ascii)
def test_a_file_that_is_not_ours_is_named(tmp_path, what, name):
    make, says = FOREIGN[what]
    path = tmp_path / os.fsdecode(name)
    make(path)
    with pytest.raises(StoreError, match=says) as caught:
        hdf5.read(path, "operators")
    assert "\n" not in str(caught.value)
    with pytest.raises(StoreError, match=says):
        hdf5.identify(path)


@pytest.mark.timeout(5)
def test_a_device_is_refused():
    with pytest.raises(StoreError, match="/dev/zero: cannot be read: not a plain file"):
        hdf5.read("/dev/zero", "operators")


def test_a_transfer_in_text_mode_is_recognised(stored, tmp_path):
    assert refused(tmp_path / "bad.h5", stored.read_bytes().replace(b"\r\n", b"\n"))
    with pytest.raises(StoreError, match="transfer in text mode"):
        hdf5.read(tmp_path / "bad.h5", "operators")


def signed(payload, version=1):
    """Seal any bytes as the program does, from the description of the format."""
    digest = hashlib.sha256(payload).digest()
    head = struct.pack("<16sIIQ32s", b"\x89SCALEWR\r\n\x1a\n\0\0\0", version, 512, len(payload), digest)
    head = head.ljust(508, b"\0")
    return head + struct.pack("<I", zlib.crc32(head)) + payload


@pytest.mark.parametrize(
    ("version", "says"), [(2, "made by a newer release .format 2"), (99, "newer"), (0, "not known")]
)
def test_another_version_is_named(stored, tmp_path, version, says):
    (tmp_path / "v.h5").write_bytes(signed(stored.read_bytes()[512:], version))
    with pytest.raises(StoreError, match=says):
        hdf5.read(tmp_path / "v.h5", "operators")


def test_the_seal_is_as_described(stored, tmp_path):
    (tmp_path / "v.h5").write_bytes(signed(stored.read_bytes()[512:]))
    arrays, _ = hdf5.read(tmp_path / "v.h5", "operators")
    np.testing.assert_array_equal(arrays["/one"], 2.5)


def chunked(file):
    file.create_dataset("x", data=np.arange(10.0), chunks=(5,))


def soft_link(file):
    file["x"] = h5py.SoftLink("/y")


def external_link(file):
    file["x"] = h5py.ExternalLink("/etc/passwd", "/")


def external_data(file):
    file.create_dataset("x", (4,), "f8", external=[("/etc/passwd", 0, 32)])


def loop(file):
    file.create_group("a")["b"] = file["/"]


def variable_text(file):
    file["x"] = ["some", "text"]


def numbers_of_another_kind(file):
    file["x"] = np.arange(3, dtype="f4")


def unwritten(file):
    file.create_dataset("x", (10,), "f8")


def strange_note(file):
    file.attrs["x"] = np.arange(3)


@pytest.mark.parametrize(
    "make",
    [
        chunked,
        soft_link,
        external_link,
        external_data,
        loop,
        variable_text,
        numbers_of_another_kind,
        unwritten,
        strange_note,
    ],
)
def test_sealed_but_strange_content_is_refused(tmp_path, make):
    with h5py.File(tmp_path / "raw.h5", "w", userblock_size=512) as file:
        file.attrs["kind"] = "operators"
        make(file)
    (tmp_path / "a.h5").write_bytes(signed((tmp_path / "raw.h5").read_bytes()[512:]))
    with pytest.raises(StoreError, match="sealed, but not as we write it"):
        hdf5.read(tmp_path / "a.h5", "operators")


@pytest.mark.parametrize("payload", [b"", b"nonsense" * 100, b"\x89HDF\r\n\x1a\n" + bytes(2000)])
def test_sealed_nonsense_is_refused(tmp_path, payload):
    (tmp_path / "a.h5").write_bytes(signed(payload))
    with pytest.raises(StoreError, match="sealed, but not as we write it"):
        hdf5.read(tmp_path / "a.h5", "operators")


def test_a_view_stays_right_when_the_file_is_replaced_and_deleted(stored):
    arrays, _ = hdf5.read(stored, "operators")
    before = arrays["/blocks/values"].copy()
    hdf5.write(stored, "operators", {"/blocks/values": before + 1}, {})
    stored.unlink()
    np.testing.assert_array_equal(arrays["/blocks/values"], before)
