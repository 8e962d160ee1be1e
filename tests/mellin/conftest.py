"""The provider of kernels: change `kernels` to test the solution, or a table, with another."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import pytest

from mellin.kernel_moments import Kernels
from mellin.representations import Parts


@dataclass(frozen=True)
class KernelFunctions:
    """Two functions as a provider of kernels."""

    splitting: Callable[[int, str, int], Parts]
    matching: Callable[[int, str, int, str, str], Parts]


@pytest.fixture(scope="session")
def kernels() -> Kernels:
    """The second writing in Python."""
    from kernels.second_writing.matching import matching
    from kernels.second_writing.splitting_nnlo import splitting

    return KernelFunctions(splitting, matching)
