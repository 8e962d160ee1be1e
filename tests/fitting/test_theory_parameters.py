"""The coupling as a parameter of a fit with a real map: its error against refits with maps built anew.

Points and errors: every third of one table of the made-up campaign that ships with the package.
"""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest
import scalewright as sw
from scalewright.cli import campaign
from scalewright.fitting.least_squares import fit
from scalewright.fitting.shapes import PowerLaw, Term

#: Coarse: what is compared is as coarse on both sides.
GRID = sw.ChebyshevGrid.from_panels([0.0, 0.7, 2.5, 9.3], [9, 9, 9])
FREE = ("g.power", "g.fall", "u_v.power", "u_v.fall", "ubar.power", "ubar.c0")
STEPS = np.linspace(-1.0, 1.0, 9)


@cache
def table():
    whole = sw.Measurements.read(campaign.folder() / "nc_positron_high.toml")
    return whole.cut(keep=np.arange(whole.value.size) % 3 == 0)


@cache
def fmap(alpha_s):
    theory = campaign.theory()
    coupling = replace(theory.coupling, alpha_s=alpha_s)
    moved = replace(theory, coupling=coupling)
    return sw.forward_map(moved, GRID, start_q2=1.5, start_nf=3, points=table())


@cache
def shape():
    """Return the law of the campaign with six free parameters."""
    terms = {
        "g": Term(-0.04, 4.8),
        "u_v": Term(0.72, 3.4),
        "d_v": Term(0.78, 4.6),
        "ubar": Term(-0.14, 7.0, [0.15]),
        "dbar": Term(-0.14, 5.5, [0.15]),
    }
    relations, numbers = ("s = 0.5*ubar", "sbar = s"), {"u_v": 2.0, "d_v": 1.0}
    law = PowerLaw(GRID, terms, nf=3, momentum="g", numbers=numbers, relations=relations)
    return law.restricted(fixed=[name for name in law.names if name not in FREE])


def joint(chi2, **options):
    """Return a fit of the shape and alpha_s."""
    result = fit(fmap(0.118), chi2, shape(), theory=["alpha_s"], **options)
    assert result.converged, result.status
    return result


def anew(at):
    """Return the map at another coupling."""
    return fmap(at["alpha_s"])


def curvature(result, chi2):
    """Return half the second derivative of refits at nine alpha_s, in units of the error of the fit."""
    error, start = result.error("alpha_s"), result.parameters[:-1]
    maps = [fmap(result.value("alpha_s") + k * error) for k in STEPS]
    refits = [fit(one, chi2, shape(), start=start).chi2 for one in maps]
    return np.polyfit(STEPS, refits, 4)[2]


def test_the_error_of_the_coupling_is_the_curvature_of_refits():
    # the law itself as data: no residuals, and nothing but first derivatives in the curvature
    law = shape().densities(shape().start, q2=1.5, nf=3)
    chi2 = sw.ChiSquare(table().with_values(fmap(0.118).predict(law)[0]))
    result = joint(chi2)
    assert result.value("alpha_s") == pytest.approx(0.118, rel=1e-8)
    # 1 per cent of the error is 2 of the curvature; what a quartic leaves is a hundredth of that
    assert curvature(result, chi2) == pytest.approx(1.0, rel=2e-4)


def test_it_is_with_residuals_too():
    chi2 = sw.ChiSquare(table())
    result = joint(chi2, rebuild=anew)
    # as above, and a map that bends: differences over 0.1 of the error
    assert curvature(result, chi2) == pytest.approx(1.0, rel=1e-3)
    # a map that moves to first order alone leaves the bending out, times residuals: 4 per cent
    alone = joint(chi2, start=result.parameters)
    assert abs(alone.error("alpha_s") / result.error("alpha_s") - 1.0) > 0.01
