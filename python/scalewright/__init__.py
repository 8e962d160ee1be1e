"""Evolution operators for parton densities x f(x), as plain numpy arrays.

The public names in the order of a calculation. Importing this package imports numpy and nothing heavier.
"""

from __future__ import annotations

from .errors import InputError, RangeError, ResolutionWarning, ScalewrightError, StoreError

__all__ = ["InputError", "RangeError", "ResolutionWarning", "ScalewrightError", "StoreError"]
