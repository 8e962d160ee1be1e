"""What child processes of the tests run.

In a module of its own: a child that is not forked imports it by its name, and test modules have names that
only pytest knows.
"""

from scalewright.files.whole import write_whole


def keep_writing(path, byte, size, stop):
    """Write a file of `size` equal bytes again and again until told to stop."""
    while not stop.is_set():
        write_whole(path, bytes([byte]) * size)
