"""Corrections of a job file: what they become, and how each mistake is named."""

import re

import numpy as np
import pytest
import scalewright as sw
from scalewright.cli.correction_job import read_corrections
from scalewright.files import toml

TWIST = """[[correction]]
kind = "higher twist"
target = ["proton", "deuteron"]
form = "addition"
structure_function = "FL"
polynomial = { degree = 1, family = "plain", a = 0.5, free = ["a"], start = [0.3, 9.0] }
fixed = { c1 = -1.0 }
bounds = { c0 = [0.0, 2.0] }
"""
FACTOR = """[[correction]]
kind = "target factor"
target = { z = 26, a = 56 }
name = "iron"
current = "charged"
spline = { knots = [1e-4, 0.1, 0.9], start = [0.1, 0.2, 0.3] }
"""
KNOWN = """[[correction]]
kind = "known factor"
target = "deuteron"
file = "factor.csv"
"""


@pytest.fixture
def read(tmp_path):
    (tmp_path / "factor.csv").write_text("x,factor,model\n0.01,1.0,0.0\n0.3,0.9,0.02\n")

    def made(text):
        (tmp_path / "job.toml").write_text(text)
        path = tmp_path / "job.toml"
        return read_corrections(path, toml.load(path))

    return made


def test_each_kind_becomes_what_it_says(read):
    twist, factor, known = read(TWIST + FACTOR + KNOWN)
    assert twist.names == ("H_FL_proton_deuteron.c0", "H_FL_proton_deuteron.a")
    assert [side.tolist() for side in twist.limits] == [[0.3, 0.5], [0.0, -2.0], [2.0, 10.0]]
    at = twist.curve.on(np.array([0.25]), ["here"])
    assert at.value(np.array([0.3, 0.5]))[0] == pytest.approx(0.5 * (0.3 - 0.25), rel=1e-14)
    assert (factor.targets, factor.current) == (("z=26 a=56",), "charged")
    assert factor.names == ("iron.k0", "iron.k1", "iron.k2")
    assert known.names == ("R_deuteron.model",) and known.priors == {"R_deuteron.model": (0.0, 1.0)}
    assert read("") == []


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("[correction]\nkind = 3\n", "correction = {'kind': 3}: must be an array of tables, [[correction]]"),
        ("[[correction]]\n", "[correction 1] kind: missing"),
        (KNOWN.replace("known factor", "factor"), '[correction 1]: kind = \'factor\': kind must be one'),
        (TWIST + KNOWN.replace("file", "files"), '[correction 2] files: unknown key; did you mean "file"?'),
        (KNOWN.replace('file = "factor.csv"', ""), "[correction 1] file: missing"),
        (KNOWN.replace('target = "deuteron"', ""), "[correction 1] target: missing"),
        (KNOWN.replace("deuteron", "deutron"), "[correction 1]: targets = 'deutron': targets must be one of"),
        (KNOWN + "spline = {}\n", "[correction 1] spline: unknown key"),
        (KNOWN + "current = 3\n", "[correction 1] current = 3: must be text in quotes"),
        (FACTOR + "polynomial = { degree = 1 }\n", "[correction 1]: give one of polynomial and spline"),
        (FACTOR.replace("[1e-4, 0.1, 0.9]", "[0.1, 0.9]"), "[correction 1.spline]: knots = [0.1, 0.9]: "),
        (FACTOR.replace("[1e-4, 0.1, 0.9]", '["a"]'), "[correction 1.spline]: knots = "),
        (FACTOR.replace("spline = {", "spline = 3 # {"), "[correction 1] spline = 3: must be a table"),
        (TWIST.replace("degree = 1", "degree = 9"), "[correction 1.polynomial]: degree = 9: degree must"),
        (TWIST.replace("degree = 1, ", ""), "[correction 1.polynomial] degree: missing"),
        (TWIST.replace("start = [0.3, 9.0]", "start = 3"), "[correction 1.polynomial]: start = "),
        (TWIST.replace('["a"]', "3"), "[correction 1.polynomial]: free = 3: free must be a list"),
        (TWIST.replace("c1 = -1.0", "c2 = -1.0"), "[correction 1.fixed] c2: unknown key"),
        (TWIST.replace("[0.0, 2.0]", "3"), "[correction 1]: bounds[c0] = 3: must be two numbers"),
        (TWIST.replace("[0.0, 2.0]", "[1.0, 2.0]"), "[correction 1]: start[c0] = 0.3: must lie in [1, 2]"),
        (TWIST.replace('"addition"', '"sum"'), '[correction 1]: form = \'sum\': form must be'),
        (TWIST.replace('"FL"', '"F1"'), "[correction 1]: structure_function = 'F1': struct"),
    ],
)  # fmt: skip
def test_each_mistake_is_named(read, text, message):
    with pytest.raises(sw.InputError, match=r"job\.toml: " + re.escape(message)):
        read(text)
