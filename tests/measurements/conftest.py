"""Small made-up tables, as files and as columns."""

import pytest
from scalewright import Measurements

TOML = """\
title    = "Run 1, positrons"
points   = "run1.csv"
measures = "reduced_cross_section"
current  = "neutral"
beam     = "e+"
target   = "proton"
s        = 101124.0
unit     = "1"

[columns]
x = "x"
q2 = "Q2"
value = "sigma"

[[uncertainty]]
column = "stat"
given_in = "percent"
scales_with = "nothing"

[[uncertainty]]
column = "energy scale"
given_in = "percent"
scales_with = "value"
shared_as = "calorimeter"
"""
CSV = """\
x,Q2,sigma,stat,energy scale,remark
0.001,12,1.25,2.0,1.0,first
0.01,12.0,0.80,1.5,-0.5,"second, quoted"
0.1,120,0.50,4,0.25,
"""

STAT = {"column": "stat", "given_in": "value", "scales_with": "nothing"}


@pytest.fixture
def run(tmp_path):
    """The table of the face: a description and its points."""
    (tmp_path / "run1.toml").write_text(TOML)
    (tmp_path / "run1.csv").write_text(CSV)
    return tmp_path / "run1.toml"


@pytest.fixture
def make():
    """Make measurements of columns: F2 by photons unless said otherwise."""

    def made(points=None, matrices=(), **changes):
        description = {"title": "A", "measures": "F2", "exchange": "photon", "uncertainty": [STAT]} | changes
        columns = {"x": [0.1, 0.2, 0.3], "q2": [10.0, 20.0, 30.0], "value": [1.0, 2.0, 4.0]}
        columns |= {"stat": [0.1, 0.2, 0.3]} | (points or {})
        description = {key: value for key, value in description.items() if value is not None}
        return Measurements.from_columns(description, columns, matrices)

    return made
