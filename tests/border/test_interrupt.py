"""Ctrl-C: a long call ends within 200 ms of processor time, and everything works afterwards."""

import os
import signal
import subprocess
import sys
import time

import numpy as np
import pytest

PREPARE = """
import signal, sys, threading, time, os
import numpy as np
import scalewright as sw
signal.signal(signal.SIGINT, signal.default_int_handler)
theory = sw.Theory(order="NLO", coupling=sw.Coupling(0.35, q2=2.0, nf=4))
grid = sw.ChebyshevGrid(1e-4)
ops = sw.build_operators(theory, grid, start_q2=2.0, start_nf=4, q2=[10.0, 1e4])
values = np.random.default_rng(3).normal(size=(5000, 9, grid.nodes))
many = sw.Densities(grid, q2=2.0, nf=4, flavours=(21, 1, -1, 2, -2, 3, -3, 4, -4), values=values)
few = sw.Densities(grid, q2=2.0, nf=4, flavours=many.flavours, values=values[:3])
before = ops.apply(few).values
out = np.zeros((20, 5000, 11, grid.nodes))
def apply():
    ops.apply(many, q2=np.geomspace(3.0, 1e4, 20), out=out)
def build():
    for _ in range(10_000):
        fresh = sw.ChebyshevGrid.from_panels([0, 0.1, 0.9, 6, 9 + np.random.rand()], [22, 28, 32, 24])
        scales = np.geomspace(3.0, 1e4, 50)
        sw.build_operators(theory, fresh, start_q2=2.0, start_nf=4, q2=scales, tolerance=1e-13)
call = {"apply": apply, "build": build}[CALL]
sent = []
def interrupt():
    time.sleep(DELAY)
    sent.append(time.process_time())
    os.kill(os.getpid(), signal.SIGINT)
threading.Thread(target=interrupt).start()
try:
    call()
    print("finished")
except KeyboardInterrupt:
    print("interrupted", time.process_time() - sent[0])
assert np.array_equal(ops.apply(few).values, before)
print("works")
"""


@pytest.mark.timeout(120)
@pytest.mark.parametrize("delay", [0.02, 0.11, 0.23])
@pytest.mark.parametrize("call", ["apply", "build"])
def test_an_interrupt_ends_a_long_call_and_nothing_is_broken(call, delay):
    code = f"CALL = {call!r}\nDELAY = {delay}\n" + PREPARE
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=False, timeout=110
    )
    words = done.stdout.split()
    assert words[-1:] == ["works"], (done.stdout, done.stderr[-2000:])
    if words[0] == "finished":
        pytest.skip(f"the call took less than {delay} s")
    # 200 ms is the promise, on every processor; in processor time, since the machine may be busy with others
    assert float(words[1]) < 0.2 * (os.cpu_count() or 1), words


@pytest.mark.timeout(60)
def test_an_interrupt_between_calls_is_an_ordinary_one():
    code = "CALL = 'none'\n" + PREPARE.split("call = {")[0] + "print('ready', flush=True)\ntime.sleep(30)"
    child = subprocess.Popen(
        [sys.executable, "-c", code], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
    )
    assert child.stdout.readline() == "ready\n"
    child.send_signal(signal.SIGINT)
    began = time.perf_counter()
    _, said = child.communicate(timeout=20)
    assert "KeyboardInterrupt" in said
    assert time.perf_counter() - began < 5.0
    assert np.isfinite(began)
