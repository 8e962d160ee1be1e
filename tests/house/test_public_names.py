"""The public face: which names there are, and that each is reached from one place."""

from __future__ import annotations

import ast
import subprocess
import sys
from importlib.metadata import version

import scalewright
from house.tree import ROOT

# Adding a name here is a promise to keep it; taking one away breaks somebody's work.
PUBLIC = [
    "Below",
    "ChebyshevGrid",
    "ChiSquare",
    "CoefficientFunction",
    "Coupling",
    "Densities",
    "Electroweak",
    "Ensemble",
    "ForwardMap",
    "InputError",
    "InputWarning",
    "Measurements",
    "Operators",
    "QuarkMasses",
    "RangeError",
    "ResolutionWarning",
    "ScalewrightError",
    "SplittingKernel",
    "StoreError",
    "Theory",
    "build_operators",
    "evolve",
    "fit",
    "fit_replicas",
    "forward_map",
    "matching_element",
    "moment",
    "splitting_function",
    "structure_function",
    "sum_rule",
]
# Loaded when something needs them, not before; the core comes with the first object that needs it.
NOT_AT_IMPORT = ["scipy", "matplotlib", "h5py", "scalewright.cli", "scalewright.plot"]


def test_the_public_names_are_these() -> None:
    assert sorted(scalewright.__all__) == PUBLIC


def test_every_public_name_is_there_and_says_where_it_lives() -> None:
    for name in PUBLIC:
        assert getattr(scalewright, name).__module__.startswith("scalewright."), name


def test_nothing_else_looks_public() -> None:
    # In a fresh process: submodules that other tests import appear as attributes.
    code = "import scalewright, types; print(*[n for n, v in vars(scalewright).items() if n[0] != '_' \
        and n not in scalewright.__all__ and not isinstance(v, types.ModuleType)])"
    assert sorted(_run(code).split()) == ["TYPE_CHECKING", "annotations"]


def test_type_checkers_read_what_is_loaded() -> None:
    tree = ast.parse((ROOT / "python" / "scalewright" / "__init__.py").read_text("utf-8"))
    (checked,) = (node for node in tree.body if isinstance(node, ast.If))
    imports = [node for node in checked.body if isinstance(node, ast.ImportFrom)]
    read = {alias.name: node.module for node in imports for alias in node.names}
    submodules = {"corrections": None, "shapes": "fitting"}
    assert read == scalewright._HOME_OF | submodules
    for name in (*PUBLIC, *submodules, "__version__"):
        assert name in dir(scalewright)


def test_the_version_is_that_of_the_package() -> None:
    assert scalewright.__version__ == version("scalewright")


def test_importing_is_light() -> None:
    code = f"import sys, scalewright; print(*[name for name in {NOT_AT_IMPORT} if name in sys.modules])"
    assert _run(code).split() == []


def _run(code: str) -> str:
    """Return what a fresh interpreter prints, warnings being errors."""
    command = [sys.executable, "-W", "error", "-c", code]
    return subprocess.run(command, capture_output=True, text=True, check=True, timeout=60).stdout
