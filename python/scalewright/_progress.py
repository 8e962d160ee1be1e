"""How far a long call is: one line on the terminal, or a callable of the user's."""

from __future__ import annotations

import os
import sys
import time
from collections.abc import Callable
from typing import TextIO, TypeAlias

from ._check import refuse

Progress: TypeAlias = bool | Callable[[int, int], object] | None

_WIDTH = 24
# Fast enough to look alive, slow enough to cost nothing.
_EVERY_S = 0.1


class Line:
    """A line on standard error that is drawn again as the work goes on; below a cell in a notebook.

    Parameters
    ----------
    label : str
        What is being done.
    stream : text file, optional
        Where to; standard error by default.
    """

    def __init__(self, label: str, stream: TextIO | None = None) -> None:
        self._label = label
        self._stream = stream if stream is not None else sys.stderr
        self._start = time.monotonic()
        self._drawn = 0.0
        self._width = 0
        self._erase = "\x1b[K" if on_terminal(self._stream) else ""
        self._shown = bool(self._erase) or in_notebook(self._stream)

    def __call__(self, done: int, total: int) -> None:
        """Draw the line, if it is time to; clear it at the end."""
        if done >= total:  # said more than once by a build that ends in several steps
            self.clear()
            return
        share = done / total if total else 1.0
        bar = ("=" * int(_WIDTH * share)).ljust(_WIDTH, ".")
        seconds = time.monotonic() - self._start
        left = f", {seconds * (1.0 / share - 1.0):.0f} s left" if share > 0.0 else ""
        self.say(f"[{bar}] {done} of {total}{left}")

    def say(self, words: str) -> None:
        """Draw the label and some words, if it is time to: for work whose end is not known."""
        now = time.monotonic()
        if self._shown and now - self._drawn >= _EVERY_S:
            self._drawn = now
            self._draw(f"{self._label} {words}")

    def clear(self) -> None:
        """Take the line away."""
        if self._shown:
            self._draw("")

    def _draw(self, text: str) -> None:
        """Write over what stands there; a notebook knows no code that erases, but blanks."""
        before, self._width = self._width, len(text)
        blank = "" if self._erase else text.ljust(before)[len(text) :]
        ending = "\r" if blank and not text else ""
        self._stream.write(f"\r{self._erase}{text}{blank}{ending}")
        self._stream.flush()


def in_notebook(stream: TextIO | None) -> bool:
    """Say whether a stream goes below a cell of a notebook, whose kernel puts one of its own in place."""
    return type(stream).__module__.partition(".")[0] == "ipykernel"


def on_terminal(stream: TextIO | None) -> bool:
    """Say whether a stream is a terminal on which a line can be drawn again."""
    try:
        return bool(stream is not None and stream.isatty() and os.environ.get("TERM") != "dumb")
    except ValueError:  # closed
        return False


def watcher(progress: Progress, label: str) -> Callable[[int, int], object] | None:
    """Return what a long call reports to: None, the user's callable, or a line on the terminal.

    Parameters
    ----------
    progress : bool, callable or None
        True for a line on a terminal; a callable takes (done, total).
    label : str
        What is being done.

    Raises
    ------
    InputError
        If it is none of these.
    """
    if progress is None or progress is False:
        return None
    if progress is True:
        return Line(label)
    if not callable(progress):
        refuse("progress", progress, "progress must be True, False or a callable of (done, total)")
    return progress
