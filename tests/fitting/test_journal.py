"""The journal of a run: equal bits after a kill, a cut at any byte, a damaged record, a full disk."""

import os
import pathlib
import signal
import subprocess
import sys

import numpy as np
import pytest
import scalewright as sw
from fitting.problems import FLAVOURS, GRID, fmap, points, quick_shape, truth
from fitting.runs import COUNT, assert_same_bits, bent_problem, replicas_of
from scalewright import StoreError
from scalewright.fitting import _journal
from scalewright.fitting.shapes import FunctionShape


@pytest.mark.skipif(not hasattr(signal, "SIGKILL"), reason="this system cannot kill")
@pytest.mark.parametrize("after", [1, 13])
def test_a_killed_run_goes_on_where_it_stopped(serial, tmp_path, after):
    journal, tests = tmp_path / "run.journal", pathlib.Path(__file__).parents[1]
    child = subprocess.run(
        [sys.executable, "-m", "fitting.children", str(journal), str(after)], cwd=tests, check=False,
        capture_output=True, timeout=100,
    )  # fmt: skip
    assert child.returncode == -signal.SIGKILL, child.stderr
    seen = []
    found = replicas_of(bent_problem(), workers=1, journal=journal, progress=lambda *p: seen.append(p[0]))
    assert seen == list(range(after, COUNT + 1))  # what was done is not done again
    assert_same_bits(serial, found)


@pytest.fixture(scope="module")
def written(tmp_path_factory):
    path = tmp_path_factory.mktemp("journal") / "run.journal"
    replicas_of(bent_problem(), workers=1, journal=path)
    return path.read_bytes()


def resumed(tmp_path, data, replicas=COUNT):
    path, seen = tmp_path / "cut.journal", []
    path.write_bytes(data)
    found = replicas_of(
        bent_problem(), workers=1, journal=path, progress=lambda *p: seen.append(p[0]), replicas=replicas
    )
    return found, seen[0]


@pytest.mark.parametrize("part", [0.0, 0.001, 0.02, 0.3, 0.5, 0.77, 0.9, 0.999, 1.0])
def test_a_journal_cut_anywhere_is_taken_up_to_its_last_whole_record(serial, written, tmp_path, part):
    found, known = resumed(tmp_path, written[: int(part * len(written))])
    assert_same_bits(serial, found)
    assert known < COUNT or part == 1.0
    assert (tmp_path / "cut.journal").read_bytes() == written


def test_every_cut_gives_whole_records_only(written, tmp_path):
    # the reader alone, at every length: what it takes are the first of the records that were written
    complete = list(_journal._records(written))
    for length in range(len(written)):
        found = list(_journal._records(written[:length]))
        assert found == complete[: len(found)]
        assert len(found) == sum(end <= length for end, _ in complete)


def test_a_damaged_record_and_what_follows_is_computed_again(serial, written, tmp_path):
    flipped = bytearray(written)
    flipped[int(0.8 * len(written))] ^= 0x10
    found, known = resumed(tmp_path, bytes(flipped))
    assert known < COUNT
    assert_same_bits(serial, found)


def small_journal(path):
    """Write a journal of three replicas of no fit in particular."""
    fit = {"seed": 1, "start": [1.0, 2.0]}
    with _journal.Journal(path, fit) as book:
        book.append([_journal.Outcome(i, np.arange(2.0), 1.0, 2.0, 3, 0, "") for i in range(3)])
    return fit, path.read_bytes()


@pytest.mark.parametrize("zeros", [8, 100, 4096])
def test_zeros_that_a_power_cut_left_at_the_end_are_dropped(tmp_path, zeros):
    # eight of them were an empty record of right sum, and the journal could not be opened again
    path = tmp_path / "run.journal"
    fit, whole = small_journal(path)
    path.write_bytes(whole + bytes(zeros))
    with _journal.Journal(path, fit) as book:
        assert sorted(book.outcomes) == [0, 1, 2]
    assert path.read_bytes() == whole


def test_a_journal_whose_first_record_is_damaged_is_refused_and_kept(tmp_path):
    # it was emptied without a word
    path = tmp_path / "run.journal"
    fit, whole = small_journal(path)
    flipped = bytearray(whole)
    flipped[40] ^= 0x10
    path.write_bytes(flipped)
    with pytest.raises(StoreError, match="its first record is damaged"):
        _journal.Journal(path, fit)
    assert path.read_bytes() == flipped


def test_a_full_journal_is_not_computed_again_and_can_be_extended(serial, written, tmp_path):
    found, known = resumed(tmp_path, written)
    assert known == COUNT
    assert_same_bits(serial, found)
    more, known = resumed(tmp_path, written, replicas=COUNT + 2)
    assert (known, more.replicas) == (COUNT, COUNT + 2)
    fewer, _ = resumed(tmp_path, written, replicas=3)
    np.testing.assert_array_equal(fewer.parameters, serial.parameters[:3])


def test_a_journal_of_another_fit_is_refused_and_kept(written, tmp_path):
    path = tmp_path / "run.journal"
    path.write_bytes(written)
    the_map, chi2, shape = bent_problem()
    other = sw.ChiSquare(chi2.measurements.with_values(chi2.measurements.value + 0.01))
    cases = {
        "seed": lambda: replicas_of(bent_problem(), seed=8, workers=1, journal=path),
        "values": lambda: replicas_of((the_map, other, shape), workers=1, journal=path, start=shape.start),
        "names": lambda: replicas_of(
            (the_map, chi2, shape.restricted(fixed=["g.fall"])), workers=1, journal=path),
        "priors": lambda: replicas_of(bent_problem(), workers=1, journal=path, priors={"g.fall": (5, 1)}),
        "evaluations": lambda: replicas_of(bent_problem(), workers=1, journal=path, evaluations=500),
    }  # fmt: skip
    for name, run in cases.items():
        with pytest.raises(StoreError, match="this journal is of another fit"):
            run()
        assert path.read_bytes() == written, name


def other_model(kind="nothing", correlated=True):
    """Return chi-square with a common error of one size and several kinds."""
    x, q2 = points()
    value = truth(quick_shape())
    own = {"name": "own", "size": 0.02, "given_in": "value", "scales_with": "nothing"}
    common = {"column": "common", "given_in": "value", "scales_with": kind, "correlated": correlated}
    about = {"title": "Run 1", "measures": "F2", "exchange": "photon", "uncertainty": [own, common]}
    return sw.ChiSquare(
        sw.Measurements.from_columns(about, {"x": x, "q2": q2, "value": value, "common": 0.05 * value})
    )


def steeper():
    """Return a shape of the names, start and prediction there of another one, but not of its slopes."""
    shape = quick_shape()
    return FunctionShape(
        GRID, FLAVOURS, lambda x, p: 2 * shape(p) - shape(shape.start), shape.start, names=shape.names
    )


@pytest.mark.parametrize(
    ("chi2", "shape"),
    [
        (lambda: other_model("value"), quick_shape),
        (lambda: other_model(correlated=False), quick_shape),
        (other_model, steeper),
    ],
    ids=["multiplicative", "independent", "slopes"],
)
def test_a_journal_of_a_fit_with_other_correlations_or_slopes_is_refused(tmp_path, chi2, shape):
    # equal values, errors, start and prediction there: replicas of two fits were mixed
    path, begin = tmp_path / "run.journal", quick_shape().start
    replicas_of((fmap(), other_model(), quick_shape()), 2, workers=1, journal=path, start=begin)
    with pytest.raises(StoreError, match="this journal is of another fit"):
        replicas_of((fmap(), chi2(), shape()), 4, workers=1, journal=path, start=begin)


def test_a_file_that_is_no_journal_is_refused_and_kept(tmp_path):
    path = tmp_path / "notes.txt"
    path.write_text("dear diary")
    with pytest.raises(StoreError, match="not a journal of scalewright"):
        replicas_of(bent_problem(), replicas=2, workers=1, journal=path)
    assert path.read_text() == "dear diary"
    with pytest.raises(StoreError, match="cannot be opened"):
        replicas_of(bent_problem(), replicas=2, workers=1, journal=tmp_path)


def test_two_runs_do_not_share_a_journal(written, tmp_path):
    pytest.importorskip("fcntl")
    path = tmp_path / "run.journal"
    path.write_bytes(written)
    fit_described = _journal.json.loads(next(_journal._records(written))[1])
    with (
        _journal.Journal(path, fit_described),
        pytest.raises(StoreError, match="another run writes to this journal"),
    ):
        replicas_of(bent_problem(), workers=1, journal=path)


def test_a_full_disk_loses_nothing_that_was_written(serial, tmp_path, monkeypatch):
    path, write, left = tmp_path / "run.journal", os.write, [8]

    def full(descriptor, data):
        if left[0] == 0:
            raise OSError(28, "No space left on device")
        left[0] -= 1
        # the last write is cut short, as a full disk does
        return write(descriptor, data if left[0] else data[: len(data) // 2])

    monkeypatch.setattr(_journal.os, "write", full)
    with pytest.raises(StoreError, match="no space left on device; the 6 replicas written before are safe"):
        replicas_of(bent_problem(), workers=1, journal=path)
    monkeypatch.undo()
    seen = []
    found = replicas_of(bent_problem(), workers=1, journal=path, progress=lambda *p: seen.append(p[0]))
    assert seen[0] == 6
    assert_same_bits(serial, found)
