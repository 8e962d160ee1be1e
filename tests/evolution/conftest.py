"""The second writing of the kernels, as `tests/mellin` provides it."""

from mellin.conftest import kernels  # noqa: F401
