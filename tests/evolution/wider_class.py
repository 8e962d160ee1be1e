"""What the grid promises to carry: x^a (1-x)^b (1 + c sqrt x + d x), -0.4 <= a <= 0.8, 1.5 <= b <= 10."""

from __future__ import annotations

import itertools

import numpy as np
from mellin.inputs import Density, shaped

CORNERS = tuple(itertools.product((-0.4, 0.8), (1.5, 10.0)))


def inputs(random: int) -> list[dict[int, Density]]:
    """Return the corners, all flavours alike in shape, and random mixtures with one shape a flavour."""
    made = []
    for a, b in CORNERS:
        shape = {"a": a, "b": b, "root": -0.5, "slope": 2.0}
        made.append({21: shaped(2.0, **shape), 2: shaped(1.0, **shape), -2: shaped(0.3, **shape)})
    rng = np.random.default_rng(20)
    for _ in range(random):
        flavours = (21, 1, -1, 2, -2, 3, -3)
        draws = {
            f: (
                rng.uniform(0.5, 2.0),
                rng.uniform(-0.4, 0.8),
                rng.uniform(1.5, 10.0),
                *rng.uniform(0.0, 3.0, 2),
            )
            for f in flavours
        }
        made.append({f: shaped(*draw) for f, draw in draws.items()})
    return made
