"""Functions and programs that the tests of replicas run in other processes."""

import os
import signal
import sys

import numpy as np
from fitting.laws import tilted


def law(x, p):
    """Return all flavours of nf = 3 from three parameters."""
    g, q = tilted(x, p)
    return np.stack([g, q, 0.1 * q, 2 * q, 0.1 * q, 0.05 * g, 0.05 * g])


def fragile(x, p):
    """As `law`; the first process but the tests' own that comes here with a mark to take is killed."""
    mark = os.environ.get("SCALEWRIGHT_TEST_MARK")
    if mark and os.getpid() != int(os.environ["SCALEWRIGHT_TEST_PARENT"]):
        try:
            os.unlink(mark)
        except FileNotFoundError:
            return law(x, p)
        os.kill(os.getpid(), signal.SIGKILL)
    return law(x, p)


def deadly(x, p):
    """As `law`, and the end of any process but the tests' own."""
    if os.getpid() != int(os.environ["SCALEWRIGHT_TEST_PARENT"]):
        os.kill(os.getpid(), signal.SIGKILL)
    return law(x, p)


def moody(x, p):
    """As `law`, but not for gluons that are large."""
    if p[0] > float(os.environ["SCALEWRIGHT_TEST_LIMIT"]):
        raise ArithmeticError("too many gluons")
    return law(x, p)


class Twofold(Exception):
    """Can be sent to another process, but not be read there: it is made from two arguments, kept as one."""

    def __init__(self, first, second):
        super().__init__(f"{first}, {second}")


class Closed:
    """Can be sent to another process, but not be read there."""

    def __getstate__(self):
        return {"needs": "a library"}

    def __setstate__(self, state):
        raise Twofold("no", state["needs"])


def run_and_die(journal, after):
    """Fit replicas, and be killed once so many are done."""
    from fitting.problems import fmap
    from fitting.runs import bent_problem, replicas_of

    def watch(done, total):
        if done >= after:
            os.kill(os.getpid(), signal.SIGKILL)

    replicas_of(bent_problem(), workers=1, journal=journal, progress=watch)
    raise SystemExit(f"{fmap()} was not stopped")


def run_on_dask_and_die(journal, after, address):
    """As `run_and_die`, with the workers of a cluster."""
    from distributed import Client
    from fitting.runs import bent_problem, replicas_of

    def watch(done, total):
        if done >= after:
            os.kill(os.getpid(), signal.SIGKILL)

    with Client(address) as client:
        replicas_of(bent_problem(), executor=client, chunk=1, journal=journal, progress=watch)
    raise SystemExit("the run was not stopped")


if __name__ == "__main__":
    run_and_die(sys.argv[1], int(sys.argv[2])) if len(sys.argv) == 3 else run_on_dask_and_die(
        sys.argv[1], int(sys.argv[2]), sys.argv[3]
    )
