"""What can go wrong, as classes: one base, one class for each thing a caller may handle.

The compiled core raises the same classes. A message says what was given, what is allowed and where, in
lower case and without a full stop: ``x = 1.3 at index 4: x must lie in (0, 1]``.
"""

from __future__ import annotations

__all__ = ["InputError", "InputWarning", "RangeError", "ResolutionWarning", "ScalewrightError", "StoreError"]


class ScalewrightError(Exception):
    """Base of every exception that this package raises on purpose."""


class InputError(ScalewrightError, ValueError):
    """An argument, a key or a table entry that can never be right, or does not fit the others."""


class RangeError(ScalewrightError, ValueError):
    """A sensible question outside the range that was computed: ask inside, or compute more."""


class StoreError(ScalewrightError, OSError):
    """A file that is not ours, is damaged, is of an unknown version, or cannot be read or written."""


class ResolutionWarning(UserWarning):
    """A result that is less accurate, or covers less, than its name promises."""


class InputWarning(UserWarning):
    """An input that is used, but contradicts itself or may not be meant as it stands."""
