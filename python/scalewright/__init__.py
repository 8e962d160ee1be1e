"""Evolution operators for parton densities x f(x), as plain numpy arrays.

Importing this package imports nothing: a name is loaded, with what it needs, when it is first asked for.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from . import corrections as corrections
    from .below import Below as Below
    from .build import build_operators as build_operators, evolve as evolve
    from .densities import Densities as Densities
    from .electroweak import Electroweak as Electroweak
    from .errors import (
        InputError as InputError,
        InputWarning as InputWarning,
        RangeError as RangeError,
        ResolutionWarning as ResolutionWarning,
        ScalewrightError as ScalewrightError,
        StoreError as StoreError,
    )
    from .fitting import shapes as shapes
    from .fitting.chi_square import ChiSquare as ChiSquare
    from .fitting.ensemble import Ensemble as Ensemble
    from .fitting.least_squares import fit as fit
    from .fitting.replicas import fit_replicas as fit_replicas
    from .forward import ForwardMap as ForwardMap, forward_map as forward_map
    from .grid import ChebyshevGrid as ChebyshevGrid
    from .kernels import (
        CoefficientFunction as CoefficientFunction,
        SplittingKernel as SplittingKernel,
        matching_element as matching_element,
        splitting_function as splitting_function,
    )
    from .measurements import Measurements as Measurements
    from .moments import moment as moment, sum_rule as sum_rule
    from .observables import structure_function as structure_function
    from .operators import Operators as Operators
    from .parameters import Coupling as Coupling, QuarkMasses as QuarkMasses
    from .theory import Theory as Theory

# Where each public name lives. What type checkers read above says the same: a test holds the two together.
_HOMES = {
    "below": ("Below",),
    "build": ("build_operators", "evolve"),
    "densities": ("Densities",),
    "electroweak": ("Electroweak",),
    "errors": (
        "InputError",
        "InputWarning",
        "RangeError",
        "ResolutionWarning",
        "ScalewrightError",
        "StoreError",
    ),
    "fitting.chi_square": ("ChiSquare",),
    "fitting.ensemble": ("Ensemble",),
    "fitting.least_squares": ("fit",),
    "fitting.replicas": ("fit_replicas",),
    "forward": ("ForwardMap", "forward_map"),
    "grid": ("ChebyshevGrid",),
    "kernels": ("CoefficientFunction", "SplittingKernel", "matching_element", "splitting_function"),
    "measurements": ("Measurements",),
    "moments": ("moment", "sum_rule"),
    "observables": ("structure_function",),
    "operators": ("Operators",),
    "parameters": ("Coupling", "QuarkMasses"),
    "theory": ("Theory",),
}
_HOME_OF = {name: home for home, names in _HOMES.items() for name in names}
_SUBMODULES = {"corrections": "corrections", "shapes": "fitting.shapes"}

__all__ = sorted(_HOME_OF)


def __getattr__(name: str) -> object:
    """Load a public name, or the version; the package metadata are slow to read."""
    from importlib import import_module

    if name in _HOME_OF:
        found: object = getattr(import_module(f".{_HOME_OF[name]}", __name__), name)
    elif name in _SUBMODULES:
        found = import_module(f".{_SUBMODULES[name]}", __name__)
    elif name == "__version__":
        from importlib.metadata import version

        found = version("scalewright")
    else:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    globals()[name] = found
    return found


def __dir__() -> list[str]:
    """List what may be asked for, loaded or not."""
    return sorted({*globals(), *_HOME_OF, *_SUBMODULES, "__version__"})
