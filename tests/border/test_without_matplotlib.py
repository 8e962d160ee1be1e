"""matplotlib is optional: nothing but drawing needs it, and drawing says what to install."""

import subprocess
import sys

import pytest

BLOCKED = """
import sys
sys.modules["matplotlib"] = None
import scalewright as sw
"""


def python(code):
    return subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=False, timeout=60
    )


def test_everything_but_drawing_works():
    done = python(
        BLOCKED
        + """
grid = sw.ChebyshevGrid(x_min=1e-3)
start = sw.Densities.sample(grid, q2=2.0, nf=4, functions={21: lambda x: (1 - x) ** 3})
theory = sw.Theory(order="LO", flavours=4)
ops = sw.build_operators(theory, grid, start_q2=2.0, q2=[10.0])
print(ops.apply(start, missing="zero").values.shape[:3])
"""
    )
    assert done.stdout == "(1, 1, 9)\n", done.stderr


def test_drawing_says_what_to_install():
    done = python(
        BLOCKED
        + """
from scalewright.plot import plot_densities
grid = sw.ChebyshevGrid(x_min=1e-3)
start = sw.Densities.sample(grid, q2=2.0, nf=4, functions={21: lambda x: (1 - x) ** 3})
try:
    plot_densities(start, ["g"])
except ImportError as error:
    print(error)
"""
    )
    assert done.stdout == "pictures need matplotlib: pip install 'scalewright[plot]'\n", done.stderr


@pytest.mark.parametrize("module", ["matplotlib", "scipy", "h5py"])
def test_import_does_not_bring(module):
    done = python(f"import sys, scalewright; print({module!r} in sys.modules)")
    assert done.stdout == "False\n", done.stderr


def test_import_raises_no_warning():
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", "import scalewright, scalewright.plot, scalewright.plot_data"],
        capture_output=True,
        text=True,
        check=False,
        timeout=60,
    )
    assert done.returncode == 0, done.stderr
