"""What child processes of the tests run.

In a module of its own: a child that is not forked imports it by its name, and test modules have names that
only pytest knows.
"""


def apply_and_send(send, ops, densities):
    """Send the bits of evolved densities to the parent."""
    send.send_bytes(ops.apply(densities).values.tobytes())
    send.close()
