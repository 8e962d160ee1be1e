"""The command itself: help, exit status, terminals and pipes."""

import os
import signal
import subprocess
import sys
import time

import pytest
import scalewright as sw
from cli.conftest import COMMAND
from cli.fit_case import write_case

COMMANDS = ("demo", "evolve", "predict", "fit", "closure", "info")


def test_help_shows_an_example(run):
    assert "example: scalewright demo" in run("--help").stdout
    for command in COMMANDS:
        done = run(command, "--help")
        assert f"example:\n  scalewright {command}" in done.stdout
        assert "--quiet" in done.stdout
        assert done.stderr == ""


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        ([], "the following arguments are required: COMMAND"),
        (["evolv"], "invalid choice: 'evolv'"),
        (["evolve"], "the following arguments are required: JOB.toml"),
        (["info", "a.h5", "b.h5"], "unrecognized arguments: b.h5"),
        (["info", "--loud", "a.h5"], "unrecognized arguments: --loud"),
        (["demo", "--replicas", "few"], "--replicas = 'few': must be a whole number"),
        (["demo", "--replicas", "1"], "--replicas = 1: --replicas must be from 2 to 1000000"),
    ],
)
def test_a_wrong_command_line_ends_with_status_2(run, arguments, says):
    done = run(*arguments, status=2)
    assert says in done.stderr
    assert done.stdout == ""


def test_version(run):
    assert run("--version").stdout.startswith("scalewright ")


def test_info_tells_what_is_in_a_file(run, tmp_path, start):
    done = run("info", "start.h5")
    assert "start.h5: densities, intact" in done.stdout
    assert "1 x 7 x" in done.stdout or "7 x" in done.stdout
    ops = sw.build_operators(sw.Theory(order="LO"), start.grid, start_q2=1.5, start_nf=3, q2=[10.0, 100.0])
    ops.save(tmp_path / "ops.h5")
    done = run("info", "ops.h5")
    assert "ops.h5: operators, intact" in done.stdout
    assert "1.5 GeV^2 (nf = 3)" in done.stdout
    assert run("info", "ops.h5", "--quiet").stdout == ""


def test_info_names_what_is_not_intact(run, tmp_path, start):
    data = bytearray((tmp_path / "start.h5").read_bytes())
    data[len(data) // 2] ^= 4
    (tmp_path / "bad.h5").write_bytes(data)
    assert "bad.h5: damaged: the content does not match its SHA-256" in run("info", "bad.h5", status=1).stderr
    (tmp_path / "cut.h5").write_bytes(data[:700])
    assert "cut.h5: damaged: 700 bytes where" in run("info", "cut.h5", status=1).stderr
    assert "start.csv: not a stored file" in run("info", "start.csv", status=1).stderr
    assert "none: cannot be read" in run("info", "none", status=1).stderr
    os.mkfifo(tmp_path / "pipe")
    assert "pipe: cannot be read: not a plain file" in run("info", "pipe", status=1).stderr


def test_progress_is_drawn_on_a_terminal_and_taken_away(on_terminal, tmp_path):
    write_case(tmp_path)
    text = (tmp_path / "job.toml").read_text().replace('report = "fit.html"', "")
    (tmp_path / "job.toml").write_text(text)
    drawn = on_terminal("fit", "job.toml")
    assert "fit to the data step " in drawn
    assert "replicas [" in drawn and "evolving replicas [" in drawn
    assert drawn.endswith("\r\x1b[K")
    assert "\n" not in drawn
    assert on_terminal("fit", "job.toml", "--quiet") == ""


def test_a_reader_that_leaves_early_is_no_error(tmp_path, start):
    child = subprocess.Popen(
        [*COMMAND, "info", "start.h5"], cwd=tmp_path, stdout=subprocess.PIPE, stderr=subprocess.PIPE
    )
    child.stdout.close()
    said = child.stderr.read().decode()
    child.stderr.close()
    assert child.wait(timeout=60) == 1
    assert said == ""


READY = "import sys; from scalewright.cli.main import main; print('ready', flush=True); sys.exit(main())"


def test_an_interrupt_ends_in_one_line(tmp_path):
    with subprocess.Popen(
        [sys.executable, "-c", READY, "demo", "--replicas", "300000", "--out", "demo"],
        cwd=tmp_path,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        # a shell that runs the tests in the background hands down interrupts as ignored
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.SIG_DFL),
    ) as child:
        assert child.stdout.readline() == b"ready\n"
        time.sleep(1.0)  # into the work, which takes much longer
        child.send_signal(signal.SIGINT)
        out, said = child.communicate(timeout=60)
    assert child.returncode == 1, (out, said)
    assert said.decode() == "scalewright: interrupted\n"
    assert not (tmp_path / "demo" / "fit.h5").exists()


@pytest.mark.parametrize(
    "environment", [{"LC_ALL": "C"}, {"TERM": "dumb"}, {"HOME": "/nonexistent"}, {"PYTHONHASHSEED": "7"}]
)
def test_the_environment_does_not_matter(run, start, environment):
    assert "densities, intact" in run("info", "start.h5", env=os.environ | environment).stdout
