"""`scalewright info FILE`: what is in a stored file, and whether it is intact."""

from __future__ import annotations

import argparse
from typing import Any

from ..densities import Densities
from ..files import hdf5
from ..fitting.ensemble import Ensemble
from ..fitting.least_squares import FitResult
from ..forward import ForwardMap
from ..operators import Operators
from .report import Report, size

NAME = "info"
SUMMARY = "say what is in a stored file, and whether every bit of it is intact"
EXAMPLE = "example:\n  scalewright info evolved.h5"

_KINDS: dict[str, Any] = {
    "operators": Operators,
    "densities": Densities,
    "forward map": ForwardMap,
    "ensemble": Ensemble,
    "fit": FitResult,
}


def arguments(parser: argparse.ArgumentParser) -> None:
    """Describe the arguments."""
    parser.add_argument(
        "file",
        metavar="FILE",
        help="what scalewright stored: operators, densities, a forward map, an ensemble, a fit",
    )


def run(options: argparse.Namespace) -> None:
    """Verify and describe; damage is a `StoreError`."""
    report = Report(options.quiet)
    found = hdf5.identify(options.file)
    program = found.attributes.get("program", "an unknown program")
    report.say(f"{found.path}: {found.kind}, intact")
    report.say(f"  {size(found.size)}, format {found.format_version}, written by {program}")
    report.say(f"  SHA-256 {found.sha256}")
    report.say(str(_KINDS[found.kind].load(options.file)))
    report.say("Arrays")
    rows = [[name, element, " x ".join(map(str, shape)) or "one"] for name, element, shape in found.arrays]
    report.table(["name", "type", "shape"], rows)
