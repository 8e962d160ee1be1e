"""Replicas through Dask, on a real cluster of two processes of this machine: the bits of a serial run."""

import os
import pathlib
import signal
import subprocess
import sys
from concurrent.futures import Executor

import numpy as np
import pytest
from fitting.runs import COUNT, assert_same_bits, bent_problem, replicas_of
from scalewright import InputError, ScalewrightError
from scalewright.fitting import _dask, _parcel

distributed = pytest.importorskip("distributed", reason="distributed, the extra `dask`, is not installed")

#: Long for two workers of a busy machine, short for a test that hangs.
LIMIT = 60.0


@pytest.fixture(scope="module")
def client():
    """A client with two workers, processes that listen on the loopback only; no dashboard."""
    import dask

    told = {"distributed.comm.timeouts.connect": "20s", "distributed.admin.tick.limit": "1h"}
    with (
        dask.config.set(told),
        distributed.LocalCluster(
            n_workers=2, threads_per_worker=1, processes=True, host="127.0.0.1", dashboard_address=None,
            memory_limit=0, silence_logs=50,
        ) as cluster,
        distributed.Client(cluster) as made,
    ):  # fmt: skip
        yield made


def pids(client):
    return sorted(client.run(os.getpid).values())


def opened():
    """Return where the arrays of the parcel of this process live."""
    (work,) = _parcel._opened.values()
    array = work._problem._whitened[0]
    while isinstance(array.base, np.ndarray):
        array = array.base
    return type(array.base.obj).__name__, array.flags.writeable


def test_bits_are_those_of_a_serial_run_and_the_map_is_one_mapped_file(serial, client):
    assert len(pids(client)) == 2
    assert os.getpid() not in pids(client)
    assert_same_bits(serial, replicas_of(bent_problem(), executor=client, limit=LIMIT))
    assert set(client.run(opened).values()) == {("mmap", False)}


def test_workers_are_counted(client):
    assert _dask.threads(client.get_executor()) == 2


def test_a_killed_worker_costs_nothing_but_time(serial, client):
    before, killed = pids(client), []

    def watch(done, total):
        if done >= 4 and not killed:
            killed.append(before[0])
            os.kill(before[0], signal.SIGKILL)

    with client.get_executor(retries=3) as executor:
        found = replicas_of(bent_problem(), executor=executor, chunk=1, limit=LIMIT, progress=watch)
    assert killed
    assert_same_bits(serial, found)
    client.wait_for_workers(2, timeout=30)
    assert before[0] not in pids(client)


def test_a_killed_run_goes_on_where_it_stopped(serial, client, tmp_path):
    journal, tests = tmp_path / "run.journal", pathlib.Path(__file__).parents[1]
    address = client.scheduler.address
    child = subprocess.run(
        [sys.executable, "-m", "fitting.children", str(journal), "7", address], cwd=tests, check=False,
        capture_output=True, timeout=100,
    )  # fmt: skip
    assert child.returncode == -signal.SIGKILL, child.stderr
    seen = []
    found = replicas_of(
        bent_problem(), executor=client, chunk=1, journal=journal, limit=LIMIT,
        progress=lambda *p: seen.append(p[0]),
    )  # fmt: skip
    assert seen == list(range(7, COUNT + 1))
    assert_same_bits(serial, found)


def test_a_client_that_is_closed_is_an_error_that_names_the_engine(client):
    with distributed.Client(client.scheduler.address) as other:
        pass
    with pytest.raises(ScalewrightError, match="executor ClientExecutor"):
        replicas_of(bent_problem(), replicas=2, executor=other, limit=1.0)


class Odd:
    def get_executor(self, pure):
        return 3


class Broken(Executor):
    """Has a client that cannot say how many workers there are."""

    class _client:
        def nthreads(self):
            raise OSError("gone")

    _client = _client()


def test_what_only_looks_like_a_client_is_refused():
    with pytest.raises(InputError, match=r"get_executor\(\) must return a concurrent.futures.Executor"):
        replicas_of(bent_problem(), replicas=2, executor=Odd())
    assert _dask.threads(Broken()) is None
