"""The command `scalewright`: which sub-commands there are, and what becomes of an error.

Exit status: 0 done, 1 could not, 2 asked wrongly. A user's mistake ends in one line, never in a traceback.
"""

from __future__ import annotations

import argparse
import contextlib
import os
import sys
import warnings
from collections.abc import Sequence
from typing import TextIO

from ..errors import InputError, RangeError, ResolutionWarning, ScalewrightError
from . import closure, demo, evolve, fit, info, predict

COMMANDS = (demo, evolve, predict, fit, closure, info)
COULD_NOT, ASKED_WRONGLY = 1, 2


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command.

    Parameters
    ----------
    arguments : sequence of str, optional
        By default those of the process.

    Returns
    -------
    int
        Exit status: 0 done, 1 could not, 2 asked wrongly.
    """
    try:
        options = _parser().parse_args(arguments)
    except SystemExit as leaving:  # argparse has spoken
        return leaving.code if isinstance(leaving.code, int) else ASKED_WRONGLY
    with warnings.catch_warnings():
        warnings.showwarning = _warn
        warnings.simplefilter("always", ResolutionWarning)  # about results: shown whatever Python was told
        try:
            options.run(options)
            sys.stdout.flush()
        except (InputError, RangeError) as error:
            return _failed(error, ASKED_WRONGLY)
        except BrokenPipeError:  # whoever read our output has left; nothing more can be said
            _close_output()
            return COULD_NOT
        except (ScalewrightError, ImportError, OSError, MemoryError) as error:
            return _failed(error, COULD_NOT)
        except KeyboardInterrupt:
            return _failed("interrupted", COULD_NOT)
    return 0


def _parser() -> argparse.ArgumentParser:
    """Describe the command line."""
    parser = argparse.ArgumentParser(
        prog="scalewright",
        description="Evolution of parton densities and predictions from them, LO to NNLO, across thresholds.",
        epilog="example: scalewright demo",
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"scalewright {_version()}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True)
    for command in COMMANDS:
        sub = commands.add_parser(
            command.NAME,
            help=command.SUMMARY,
            description=command.SUMMARY[:1].upper() + command.SUMMARY[1:] + ".",
            epilog=command.EXAMPLE,
            formatter_class=argparse.RawDescriptionHelpFormatter,
            allow_abbrev=False,
        )
        command.arguments(sub)
        sub.add_argument("--quiet", action="store_true", help="print nothing but warnings and errors")
        sub.set_defaults(run=command.run)
    return parser


def _version() -> str:
    """Return the version of the installed package."""
    from importlib import metadata

    try:
        return metadata.version("scalewright")
    except metadata.PackageNotFoundError:
        return "(not installed)"


def _failed(error: object, status: int) -> int:
    """Say in one line what went wrong."""
    said = str(error) or type(error).__name__
    if isinstance(error, MemoryError):
        said = f"not enough memory: {said}"
    print(f"scalewright: {said}", file=sys.stderr)
    return status


def _warn(
    message: Warning | str,
    category: type[Warning],
    filename: str,
    lineno: int,
    file: TextIO | None = None,
    line: str | None = None,
) -> None:
    """Show a warning as one line without the place in our source."""
    print(f"scalewright: warning: {message}", file=sys.stderr)


def _close_output() -> None:
    """Keep the interpreter from flushing into a closed pipe when it ends."""
    with contextlib.suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


if __name__ == "__main__":
    sys.exit(main())
