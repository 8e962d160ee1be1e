"""`scalewright info FILE`: what is in a stored file, and whether it is intact."""

from __future__ import annotations

import argparse

from ..densities import Densities
from ..files import hdf5
from ..operators import Operators
from .report import Report, size

NAME = "info"
SUMMARY = "say what is in a stored file, and whether every bit of it is intact"
EXAMPLE = "example:\n  scalewright info evolved.h5"


def arguments(parser: argparse.ArgumentParser) -> None:
    """Describe the arguments."""
    parser.add_argument("file", metavar="FILE", help="operators or densities that scalewright stored")


def run(options: argparse.Namespace) -> None:
    """Verify and describe; damage is a `StoreError`."""
    report = Report(options.quiet)
    found = hdf5.identify(options.file)
    program = found.attributes.get("program", "an unknown program")
    report.say(f"{found.path}: {found.kind}, intact")
    report.say(f"  {size(found.size)}, format {found.format_version}, written by {program}")
    report.say(f"  SHA-256 {found.sha256}")
    kind = Operators if found.kind == "operators" else Densities
    report.say(str(kind.load(options.file)))
    report.say("Arrays")
    rows = [[name, element, " x ".join(map(str, shape)) or "one"] for name, element, shape in found.arrays]
    report.table(["name", "type", "shape"], rows)
