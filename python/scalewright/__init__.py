"""Evolution operators for parton densities x f(x), as plain numpy arrays.

The public names in the order of a calculation. Importing this package imports numpy and nothing heavier.
"""

from __future__ import annotations

from .below import Below
from .densities import Densities
from .errors import InputError, RangeError, ResolutionWarning, ScalewrightError, StoreError
from .grid import ChebyshevGrid
from .kernels import SplittingKernel, matching_element, splitting_function
from .parameters import Coupling, QuarkMasses
from .theory import Theory

__all__ = [
    "Below",
    "ChebyshevGrid",
    "Coupling",
    "Densities",
    "InputError",
    "QuarkMasses",
    "RangeError",
    "ResolutionWarning",
    "ScalewrightError",
    "SplittingKernel",
    "StoreError",
    "Theory",
    "matching_element",
    "splitting_function",
]
