"""Evolution operators for parton densities x f(x), as plain numpy arrays.

The public names in the order of a calculation. Importing this package imports numpy and nothing heavier.
"""

from __future__ import annotations

from . import corrections as corrections
from .below import Below
from .build import build_operators, evolve
from .densities import Densities
from .electroweak import Electroweak
from .errors import InputError, InputWarning, RangeError, ResolutionWarning, ScalewrightError, StoreError
from .fitting import shapes as shapes
from .fitting.chi_square import ChiSquare
from .fitting.ensemble import Ensemble
from .fitting.least_squares import fit
from .fitting.replicas import fit_replicas
from .forward import ForwardMap, forward_map
from .grid import ChebyshevGrid
from .kernels import CoefficientFunction, SplittingKernel, matching_element, splitting_function
from .measurements import Measurements
from .moments import moment, sum_rule
from .observables import structure_function
from .operators import Operators
from .parameters import Coupling, QuarkMasses
from .theory import Theory

__all__ = [
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


def __getattr__(name: str) -> str:
    """Look up the version only when it is asked for: the package metadata are slow to read."""
    if name == "__version__":
        from importlib.metadata import version

        return version("scalewright")
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
