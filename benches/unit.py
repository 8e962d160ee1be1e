"""The unit of every time here: the median of products of two 1000 x 1000 float64 matrices by numpy.

On all processors, in a process of its own in which nothing forces an older kernel of the BLAS library.

    python benches/unit.py
"""

from __future__ import annotations

import os
import subprocess
import sys

from figures import Figure, check, show

SIZE = 1000
PRODUCTS = 31
# Variables that force a kernel or a number of threads: the unit is numpy at its best.
FORCED = (
    "OPENBLAS_CORETYPE",
    "OPENBLAS_L2_SIZE",
    "OPENBLAS_NUM_THREADS",
    "OMP_NUM_THREADS",
    "MKL_NUM_THREADS",
)

_CODE = """
import sys, time
import numpy as np
size, products = int(sys.argv[1]), int(sys.argv[2])
rng = np.random.default_rng(1)
a, b = rng.standard_normal((2, size, size))
times = []
for _ in range(products + 3):  # the first three warm up
    start = time.perf_counter()
    c = a @ b
    times.append(time.perf_counter() - start)
row = sum(a[0, k] * b[k] for k in range(size))
print(np.median(times[3:]), np.max(np.abs(c[0] - row)))
"""


def free_environment() -> dict[str, str]:
    """Return the environment without what holds numpy back."""
    return {name: value for name, value in os.environ.items() if name not in FORCED}


def free_numpy() -> None:
    """Start this process again where something holds numpy back: no bench is to gain by that."""
    if any(name in os.environ for name in FORCED):
        os.execve(sys.executable, [sys.executable, *sys.argv], free_environment())


def seconds(size: int = SIZE, products: int = PRODUCTS) -> float:
    """Return the unit in seconds."""
    command = [sys.executable, "-c", _CODE, str(size), str(products)]
    done = subprocess.run(command, env=free_environment(), capture_output=True, text=True, check=True)
    median, error = map(float, done.stdout.split())
    # Sums of a thousand numbers of order one: rounding of 1e-16 each, at worst all of one sign.
    check("a row of the product", error, 1e-10)
    return median


def measure(small: bool) -> list[Figure]:
    """Return the unit, as an operation rate so that computers can be compared."""
    size = 100 if small else SIZE
    unit = seconds(size)
    rate = 2 * size**3 / unit / 1e9
    return [
        Figure(f"one product of two {size} x {size} matrices", f"{1e3 * unit:.1f} ms, {rate:.0f} GFlop/s")
    ]


if __name__ == "__main__":
    show(measure, __doc__)
