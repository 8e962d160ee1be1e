"""Progress: a line that is drawn again on a terminal and below a cell, and nothing anywhere else."""

import io

import pytest
from scalewright import _progress
from scalewright._progress import Line


class Cell(io.StringIO):
    """What a notebook's kernel puts in the place of standard error."""

    __module__ = "ipykernel.iostream"


class Terminal(io.StringIO):
    def isatty(self):
        return True


@pytest.fixture(autouse=True)
def clock(monkeypatch):
    """Let a second pass between two looks at the clock."""
    ticks = iter(range(10, 10_000))
    monkeypatch.setattr(_progress.time, "monotonic", lambda: float(next(ticks)))
    monkeypatch.setenv("TERM", "xterm")


def seen(text):
    """Return what stands on the line after a text: a carriage return goes to its start and erases nothing."""
    line = ""
    for part in text.split("\r"):
        line = part + line[len(part) :]
    return line


def test_a_cell_shows_the_last_state_and_is_left_empty():
    cell = Cell()
    line = Line("replicas", cell)
    line(0, 10)
    assert seen(cell.getvalue()) == "replicas [........................] 0 of 10"  # nobody knows how long
    line(5, 10)
    words = seen(cell.getvalue())
    assert words.startswith("replicas [============............] 5 of 10, ") and words.endswith(" s left")
    line.say("done")
    assert seen(cell.getvalue()).rstrip() == "replicas done"
    line(10, 10)
    assert seen(cell.getvalue()).strip() == ""
    assert "\x1b" not in cell.getvalue()  # a notebook shows no codes of a terminal


def test_a_terminal_erases_and_a_pipe_gets_nothing(monkeypatch):
    terminal, pipe = Terminal(), io.StringIO()
    for stream in (terminal, pipe):
        line = Line("fit", stream)
        line.say("step 1")
        line(10, 10)
    assert terminal.getvalue() == "\r\x1b[Kfit step 1\r\x1b[K"
    assert pipe.getvalue() == ""
    monkeypatch.setenv("TERM", "dumb")
    Line("fit", dumb := Terminal()).say("step 1")
    assert dumb.getvalue() == ""
