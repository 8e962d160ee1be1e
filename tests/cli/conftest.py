"""Running the command as a process of its own, with pipes or on a terminal."""

import os
import pty
import subprocess
import sys
from types import SimpleNamespace

import pytest
import scalewright as sw
from cli.fit_case import write_case

COMMAND = [sys.executable, "-c", "import sys; from scalewright.cli.main import main; sys.exit(main())"]


@pytest.fixture
def run(tmp_path):
    """Run in an empty folder; no traceback may ever be seen."""

    def runner(*arguments, status=0, **options):
        done = subprocess.run(
            [*COMMAND, *map(str, arguments)],
            cwd=tmp_path,
            capture_output=True,
            text=True,
            check=False,
            timeout=120,
            **options,
        )
        assert "Traceback" not in done.stderr, done.stderr
        assert done.returncode == status, (done.returncode, done.stdout, done.stderr)
        return done

    return runner


@pytest.fixture
def on_terminal(tmp_path):
    """Run with standard error on a terminal and give what was drawn there."""

    def runner(*arguments):
        master, slave = pty.openpty()
        child = subprocess.Popen(
            [*COMMAND, *map(str, arguments)],
            cwd=tmp_path,
            stdout=subprocess.DEVNULL,
            stderr=slave,
            env=os.environ | {"TERM": "xterm"},
        )
        os.close(slave)
        drawn = b""
        while True:
            try:
                part = os.read(master, 4096)
            except OSError:  # the other end has closed
                break
            if not part:
                break
            drawn += part
        os.close(master)
        assert child.wait(timeout=120) == 0
        return drawn.decode()

    return runner


@pytest.fixture
def start(tmp_path):
    """A made-up input of three flavours as a table on the nodes of a small grid."""
    grid = sw.ChebyshevGrid(x_min=1e-4)
    functions = {flavour: lambda x: 0.1 * x**-0.1 * (1 - x) ** 6 for flavour in (1, -1, -2, 3, -3)}
    functions |= {21: lambda x: 2.0 * x**-0.1 * (1 - x) ** 5, 2: lambda x: 2.0 * x**0.5 * (1 - x) ** 3}
    densities = sw.Densities.sample(grid, q2=1.5, nf=3, functions=functions)
    densities.to_csv(tmp_path / "start.csv")
    densities.save(tmp_path / "start.h5")
    return densities


@pytest.fixture
def write_fit(tmp_path):
    """Write the case with a job changed as a test asks, and nothing drawn."""

    def written(*changes):
        write_case(tmp_path)
        for old, new in (*changes, ('report = "fit.html"', "")):
            for name in ("job.toml", "run1.toml", "run1.csv"):
                text = (tmp_path / name).read_text()
                (tmp_path / name).write_text(text.replace(old, new))

    return written


@pytest.fixture
def run_here(tmp_path, capsys, monkeypatch):
    """Run in this process, which has loaded everything already, in the folder of the job."""
    from scalewright.cli.main import main

    monkeypatch.chdir(tmp_path)

    def runner(*arguments, status=0):
        found = main(list(arguments))
        out, said = capsys.readouterr()
        assert found == status, (found, out, said)
        return SimpleNamespace(stdout=out, stderr=said)

    return runner
