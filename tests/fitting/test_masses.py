"""A mass of a heavy quark as a parameter: what a fit says of it."""

import numpy as np
import pytest
import scalewright as sw
from cli.fit_case import GRID, shape
from scalewright.fitting.least_squares import fit
from scalewright.fitting.maps import Maps


@pytest.mark.parametrize(
    ("heavy_quarks", "says"),
    [
        ("massive", "WARNING: a mass is free: with massive coefficients of order a this is a study"),
        ("massless", "WARNING: a mass is free, but heavy quarks are massless"),
    ],
)
def test_a_free_mass_is_a_study(heavy_quarks, says):
    x, q2 = np.meshgrid([0.02, 0.1, 0.3], [10.0, 40.0, 160.0])
    points = {"x": x.ravel(), "q2": q2.ravel(), "value": np.full(9, 0.4), "stat": np.full(9, 0.02)}
    stat = {"column": "stat", "given_in": "value", "scales_with": "nothing"}
    table = sw.Measurements.from_columns(
        {"title": "A", "measures": "F2", "exchange": "photon", "uncertainty": [stat]}, points
    )
    theory = sw.Theory(
        order="NLO", coupling=sw.Coupling(0.3, q2=2.0, nf=3), flavours=3, heavy_quarks=heavy_quarks,
        masses=sw.QuarkMasses(charm=1.5, bottom=4.5, top=173.0, kind="pole"),
    )  # fmt: skip
    law = shape().restricted(fixed=[name for name in shape().names if name != "ubar.c0"])
    maps = Maps(theory, GRID, start_q2=2.0, points=table)
    result = fit(maps(), sw.ChiSquare(table), law, theory=["charm"], priors={"charm": (1.5, 0.1)})
    assert any(line.startswith(says) for line in result.status), result.status
    assert says in str(result)
    without = fit(maps(), sw.ChiSquare(table), law)
    assert not any("a mass is free" in line for line in without.status)
