"""Threads and processes: the same bits whoever computes, and no hang after a fork."""

import multiprocessing
import os
import pickle
import threading
import time
import warnings
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest
import scalewright as sw
from border.children import apply_and_send


def test_the_number_of_threads_changes_no_bit(ops, densities):
    expected = ops.apply(densities, threads=1).values
    for threads in (2, 3, 4, None):
        np.testing.assert_array_equal(ops.apply(densities, threads=threads).values, expected)


def test_the_number_of_threads_changes_no_block(ops):
    options = {"start_q2": 2.0, "start_nf": 4, "q2": [10.0, 1e4]}
    for threads in (1, 2, 4):
        again = sw.build_operators(ops.theory, ops.grid, threads=threads, **options)
        np.testing.assert_array_equal(again.blocks, ops.blocks)


def test_many_callers_share_one_set(ops, densities):
    expected = ops.apply(densities, q2=[37.0, 1e3]).values
    fresh = sw.build_operators(ops.theory, ops.grid, start_q2=2.0, start_nf=4, q2=[10.0, 1e4])

    def work(_):
        if threading.get_ident() % 2:
            fresh.blocks  # noqa: B018  computed by whoever comes first
        return ops.apply(densities, q2=[37.0, 1e3]).values

    with ThreadPoolExecutor(8) as pool:
        for found in pool.map(work, range(64)):
            np.testing.assert_array_equal(found, expected)
    np.testing.assert_array_equal(fresh.blocks, ops.blocks)


def test_other_threads_run_during_a_long_call(ops, values):
    """The interpreter is not held: a counter goes on counting while replicas are evolved."""
    many = sw.Densities(
        ops.grid, q2=2.0, nf=4, flavours=(21, 1, -1, 2, -2, 3, -3, 4, -4), values=np.tile(values, (800, 1, 1))
    )
    ticks, done = [], threading.Event()

    def count():
        while not done.is_set():
            ticks.append(time.perf_counter())
            time.sleep(0.001)

    counter = threading.Thread(target=count)
    counter.start()
    most = 0
    try:
        for _ in range(20):  # a busy machine may not let the counter run: then once more
            began = time.perf_counter()
            ops.apply(many, q2=np.geomspace(3.0, 1e4, 10), threads=1)
            ended = time.perf_counter()
            most = max(most, sum(began < tick < ended for tick in ticks))
            if most >= 10:
                break
    finally:
        done.set()
        counter.join()
    assert most >= 10  # held throughout, there would be one or two at the ends of the call


@pytest.mark.parametrize("method", ["fork", "spawn", "forkserver"])
def test_children_compute_the_same_bits(ops, densities, method):
    expected = ops.apply(densities, threads=2).values.tobytes()  # the pool of the parent has started
    context = multiprocessing.get_context(method)
    receive, send = context.Pipe(duplex=False)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", DeprecationWarning)  # fork beside threads is what is tested
        process = context.Process(target=apply_and_send, args=(send, ops, densities))
        process.start()
    send.close()
    assert receive.recv_bytes() == expected  # a child that hangs runs into the time limit of the test
    process.join()
    assert process.exitcode == 0


def test_a_fork_during_a_call_of_another_thread_does_not_hang(ops, densities, values):
    expected = ops.apply(densities).values
    stop = threading.Event()

    def busy():
        while not stop.is_set():
            ops.apply(densities, q2=[37.0, 50.0, 1e3], threads=2)

    worker = threading.Thread(target=busy)
    worker.start()
    try:
        for _ in range(8):
            with warnings.catch_warnings():
                warnings.simplefilter("ignore", DeprecationWarning)
                pid = os.fork()
            if pid == 0:
                same = np.array_equal(ops.apply(densities, threads=2).values, expected)
                os._exit(0 if same else 3)
            assert waited(pid, 60.0) == 0
    finally:
        stop.set()
        worker.join()


def waited(pid, seconds):
    """Exit status of a child; one that hangs is ended and counts as -1."""
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        found, status = os.waitpid(pid, os.WNOHANG)
        if found:
            return os.waitstatus_to_exitcode(status)
        time.sleep(0.01)
    os.kill(pid, 9)
    os.waitpid(pid, 0)
    return -1


def test_pickles_cross_processes(ops, densities):
    again, same = pickle.loads(pickle.dumps((ops, densities)))
    np.testing.assert_array_equal(again.apply(same).values, ops.apply(densities).values)
