"""Ensembles in a stored file: which array is where, besides the densities.

Those are as in `scalewright._stored_densities`.

============================ ======================================
name                         content
============================ ======================================
/replicas/weights, index     (replica,)
/replicas/chi2, chi2_data    (replica,), nan where unknown
/replicas/parameters, names  (replica, parameter), (parameter,)
/failed/index, reasons       (failed,)
/notes/sentences             (sentence,)
============================ ======================================
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from .. import _stored_densities
from ..densities import Densities
from ..errors import InputError, StoreError
from ..files.whole import PathLike, shown

__all__ = ["PARTS", "load", "save"]

#: What an ensemble has besides densities.
PARTS = (
    "parameters", "names", "weights", "index", "chi2", "chi2_data", "data", "failed", "seed", "negative",
    "notes",
)  # fmt: skip
_ARRAYS = ("parameters", "weights", "index", "chi2", "chi2_data")
_NO_SEED = -1


def save(path: PathLike, densities: Densities, parts: Mapping[str, Any]) -> None:
    """Store an ensemble, whole or not at all."""
    from ..files import hdf5

    arrays, attributes = _stored_densities.arrays(densities)
    arrays |= {f"/replicas/{name}": np.asarray(parts[name]) for name in _ARRAYS}
    arrays["/replicas/names"] = np.asarray(parts["names"], dtype=np.str_)
    arrays["/failed/index"] = np.asarray(list(parts["failed"]), dtype=np.int64)
    arrays["/failed/reasons"] = np.asarray(list(parts["failed"].values()), dtype=np.str_)
    arrays["/notes/sentences"] = np.asarray(parts["notes"], dtype=np.str_)
    seed = _NO_SEED if parts["seed"] is None else parts["seed"]
    notes = {"data": parts["data"], "negative": parts["negative"], "seed": str(seed)}
    hdf5.write(path, "ensemble", arrays, {**attributes, **notes})


def load(path: PathLike, copy: bool) -> tuple[Densities, dict[str, Any]]:
    """Return densities and the other arguments of `Ensemble`."""
    from ..files import hdf5

    arrays, attributes = hdf5.read(path, "ensemble", copy=copy)
    densities = Densities(**_stored_densities.arguments(path, arrays, attributes))
    try:
        parts: dict[str, Any] = {name: arrays[f"/replicas/{name}"] for name in _ARRAYS}
        parts["names"] = tuple(arrays["/replicas/names"].tolist())
        indices, reasons = arrays["/failed/index"].tolist(), arrays["/failed/reasons"].tolist()
        parts["failed"] = dict(zip(indices, reasons, strict=True))
        # files of the first release have none
        parts["notes"] = tuple(arrays["/notes/sentences"].tolist()) if "/notes/sentences" in arrays else ()
        parts |= {name: int(attributes[name]) for name in ("data", "negative", "seed")}
    except KeyError as error:
        raise StoreError(f"{shown(path)}: holds no {error.args[0]}") from error
    except (InputError, ValueError) as error:
        raise StoreError(f"{shown(path)}: {error}") from error
    parts["seed"] = None if parts["seed"] == _NO_SEED else parts["seed"]
    return densities, parts
