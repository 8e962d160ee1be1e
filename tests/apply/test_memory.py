"""Streaming takes the same memory whatever the number of scales; nothing leaks."""

import os
import platform
import subprocess
import sys

import pytest

PEAK = """
import resource, sys
import numpy as np, scalewright as sw
scales = int(sys.argv[1])
grid = sw.ChebyshevGrid(1e-4)
theory = sw.Theory(order="LO", flavours=4)
ops = sw.build_operators(theory, grid, start_q2=2.0, q2=np.geomspace(3.0, 1e4, scales))
values = np.random.default_rng(0).normal(size=(3000, 9, grid.nodes))
flavours = (21, 1, -1, 2, -2, 3, -3, 4, -4)
many = sw.Densities(grid, q2=2.0, nf=4, flavours=flavours, values=values)
seen = sum(1 for part in ops.stream(many) if np.isfinite(part.values[0, 0, 0]))
assert seen == scales
print(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss)
"""

LEAK = """
import ctypes, gc, pickle, sys
import numpy as np, scalewright as sw
class Mallinfo(ctypes.Structure):
    names = "arena ordblks smblks hblks hblkhd usmblks fsmblks uordblks fordblks keepcost"
    _fields_ = [(name, ctypes.c_size_t) for name in names.split()]
mallinfo = ctypes.CDLL(None).mallinfo2
mallinfo.restype = Mallinfo
def held():
    gc.collect()
    found = mallinfo()
    return found.uordblks + found.hblkhd
grid = sw.ChebyshevGrid(1e-3)
theory = sw.Theory(order="LO", flavours=4)
flavours = (21, 1, -1, 2, -2, 3, -3, 4, -4)
some = sw.Densities(grid, q2=2.0, nf=4, flavours=flavours, values=np.ones((40, 9, grid.nodes)))
def once():
    ops = sw.build_operators(theory, grid, start_q2=2.0, q2=[10.0, 1e4])
    ops.apply(some)
    ops.save(sys.argv[1])
    sw.Operators.load(sys.argv[1]).apply(some)
    pickle.loads(pickle.dumps(ops))
    try:
        ops.apply(some, q2=1e9)
    except sw.RangeError:
        pass
for _ in range(10):
    once()
before = held()
for _ in range(30):
    once()
print(held() - before)
"""


def run(code, *arguments, **environment):
    done = subprocess.run(
        [sys.executable, "-c", code, *map(str, arguments)],
        env=os.environ | environment,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return int(done.stdout)


@pytest.mark.timeout(120)
@pytest.mark.skipif(sys.platform != "linux", reason="ru_maxrss is in kB on Linux only")
def test_memory_of_a_stream_does_not_grow_with_the_scales():
    few, many = run(PEAK, 20), run(PEAK, 60)
    # one scale of the result is 14 MB: 40 of them would be 560 MB; a part holds 9; operators take 0.15 MB
    assert many - few < 40_000, (few, many)


@pytest.mark.timeout(120)
@pytest.mark.skipif(platform.libc_ver()[0] != "glibc", reason="asks glibc what is allocated")
def test_nothing_leaks(tmp_path):
    # What is allocated, not what is resident: that swings by 15 MB. One arena, so that all is counted.
    growth = run(LEAK, tmp_path / "a.h5", MALLOC_ARENA_MAX="1", PYTHONMALLOC="malloc")
    # 30 rounds that keep nothing: a lost set of blocks would be 0.3 MB a round, a lost array of values 0.1 MB
    assert growth < 1_000_000
