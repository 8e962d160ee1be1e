"""What a table of points may not say, from file to map: each message names file, line and column."""

import warnings
from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw

GRID = sw.ChebyshevGrid.from_panels([0.0, 0.7, 2.5, 9.3], [9, 9, 9])
TOML = """\
title = "Run 1"
points = "run.csv"
s = 101124.0
[columns]
measures = "what"
current = "current"
beam = "lepton"
target = "on"
y = "y"
[[uncertainty]]
name = "a"
size = 1.0
given_in = "percent"
scales_with = "nothing"
"""
HEAD = "x,q2,y,what,current,lepton,on,value\n"
GOOD = "0.0100,101.12,0.1000,reduced_cross_section,neutral,e+,proton,1.0\n"


def read(folder, line):
    (folder / "run.toml").write_text(TOML)
    (folder / "run.csv").write_text(
        HEAD + GOOD.replace("0.0100", "0.0200").replace("0.1000", "0.0500") + line
    )
    return sw.Measurements.read(folder / "run.toml")


def mapped(folder, line):
    return sw.forward_map(sw.Theory(), GRID, start_q2=1.5, start_nf=3, points=read(folder, line))


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("reduced_cross_section", "F5", "line 3, column what = 'F5': must be one of \"reduced_"),
        ("neutral", "weak", "line 3, column current = 'weak': must be one of \"neutral\", \"charged\""),
        ("e+", "mu+", "line 3, column lepton = 'mu+': must be one of \"e-\", \"e+\", \"nu\", \"nubar\""),
        ("proton", "lead", "line 3, column on = 'lead': must be one of \"proton\", \"neutron\""),
        ("101.12", "-3", "line 3, column q2: -3: q2 must lie in (0, inf) GeV^2"),
        ("101.12", "0", "line 3, column q2: 0: q2 must lie in (0, inf) GeV^2"),
        ("0.0100", "1.2", "line 3, column x: 1.2: x must lie in (0, 1]"),
        ("0.1000", "1.3", "line 3, column y: 1.3: y must lie in (0, 1]"),
        ("101.12,0.1000", "1500,0.99", "line 3, column y: 0.99, but x, q2 and s say 1.48334: y must be q2"),
        ("0.0100,101.12", "0.00001,0.10112", "line 3: x = 1e-05: x must lie in [9.14242"),
    ],
)  # fmt: skip
def test_a_bad_point_is_named_by_file_line_and_column(tmp_path, old, new, message):
    assert old in GOOD
    with pytest.raises((sw.InputError, sw.RangeError)) as raised:
        mapped(tmp_path, GOOD.replace(old, new))
    assert f"{tmp_path / 'run.csv'}: {message}" in str(raised.value).replace("run.csv, ", "run.csv: ")


@pytest.mark.parametrize(
    ("digits", "y", "outcome"),
    [
        ("0.0100", "0.1000", None),
        ("0.0100", "0.10", None),
        ("0.0100", "0.103", sw.InputWarning),  # six half units, and half a unit of x is 0.5 per cent
        ("0.010", "0.103", None),  # of x 5 per cent
        ("0.0100", "0.09", sw.InputError),  # 10 per cent, and half a unit of y is 5
        ("0.0100", "0.106", sw.InputError),
        ("0.01", "0.106", sw.InputError),
        ("0.01", "0.2", sw.InputError),
    ],
)
def test_a_y_that_is_not_that_of_x_q2_and_s(tmp_path, digits, y, outcome):
    # x, Q^2 and s say 0.0999969. More than the last digits of y, x and Q^2 explain is a warning,
    # more than 5 per cent another y: however few digits x has, it is x as printed that is predicted at
    line = GOOD.replace("0.0100", digits).replace("0.1000", y)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        if outcome is None:
            table = read(tmp_path, line)
            np.testing.assert_allclose(table.y[1], 101.12 / (0.01 * (101124.0 - 0.93827208816**2)))
            return
        with pytest.raises(outcome, match=r"line 3, column y: .*, but x, q2 and s say 0.0999969"):
            read(tmp_path, line)


def test_densities_of_another_nf_than_that_of_the_point(tmp_path):
    # on a scale of its own the point has four flavours, the densities three
    theory = sw.Theory(order="NLO")
    shape = np.tile(np.sqrt(GRID.x) * (1 - GRID.x) ** 3, (7, 1))
    start = sw.Densities(GRID, q2=10.0, nf=3, flavours=(21, 1, -1, 2, -2, 3, -3), values=shape)
    with pytest.raises(sw.InputError, match=r"densities at 10 GeV\^2 have nf = 3: the points need nf = 4"):
        sw.structure_function("F2", x=0.1, q2=10.0, densities=start, theory=theory, exchange="photon")
    rows = SimpleNamespace(x=[0.1], q2=[10.0], measure="F2", exchange="photon")
    fmap = sw.forward_map(theory, GRID, start_q2=10.0, start_nf=4, points=rows)
    with pytest.raises(sw.InputError, match=r"densities.nf = 3: the map starts from nf = 4"):
        fmap.predict(start)
