"""An NNLO fit to F2 of the proton as the world measured it: points drawn from a published parametrisation.

H. Abramowicz, A. Levy, hep-ph/9712415, describe F2 of the proton measured before 1997, from fixed targets to
e p colliders, by 23 parameters. Formulas and parameters are recalled from memory; the paper could not be
opened. A stand-in for real measurements, not a substitute: the parametrisation smooths the data, knows
nothing of QCD, and is itself good to a few per cent.

    python benches/world_fit.py
"""

from __future__ import annotations

import time

import numpy as np
import scalewright as sw
from figures import Figure, check, show
from numpy.typing import NDArray
from scalewright.fitting.least_squares import FitResult
from scalewright.fitting.shapes import PowerLaw, Restricted, Term

Floats = NDArray[np.float64]

PROTON_MASS2 = 0.938272**2
START_Q2, START_NF = 1.6, 3
#: Per cent, of each point alone.
ERROR = 3.0
#: GeV^2. Below, what falls faster than powers of Q^2 allow for counts; common practice, no source.
LEAST_W2 = 12.5
#: GeV^2: x, Q^2 and y = Q^2/(x s) of the colliders of the time; beyond, the parametrisation extrapolates.
S, MOST_Y = 90_000.0, 0.9
SEED = 5


def f2(x: Floats, q2: Floats) -> Floats:
    """Return F2 of the proton as parametrised in hep-ph/9712415, section 2 and table 1 (from memory).

    Parameters
    ----------
    x, q2 : ndarray
        q2 in GeV^2.

    Returns
    -------
    ndarray
        The sum of a pomeron and a reggeon term, each c x'^a (1-x)^b, times Q^2/(Q^2 + m0^2).
    """
    lambda2, at_zero = 0.06526, 0.52544
    t = np.log(np.log((q2 + at_zero) / lambda2) / np.log(at_zero / lambda2))

    def rising(first: float, second: float, third: float) -> Floats:
        return np.asarray(first + second * t**third)

    def falling(first: float, second: float, third: float) -> Floats:
        return np.asarray(first + (first - second) * (1.0 / (1.0 + t**third) - 1.0))

    flow = q2 * (1.0 / x - 1.0)  # W^2 - M^2
    at_pomeron, at_reggeon = (1.0 / (1.0 + flow / (q2 + mass2)) for mass2 in (49.457, 0.15052))
    pomeron = falling(0.28067, 0.22291, 2.1979) * at_pomeron ** falling(-0.0808, -0.44812, 1.1709)
    pomeron *= (1.0 - x) ** rising(0.36292, 1.8917, 1.8439)
    reggeon = rising(0.80107, 0.97307, 3.4942) * at_reggeon ** rising(0.58400, 0.37888, 2.6063)
    reggeon *= (1.0 - x) ** rising(0.01147, 3.7582, 0.49338)
    return np.asarray(q2 / (q2 + 0.31985) * (pomeron + reggeon))


def points(small: bool) -> tuple[Floats, Floats]:
    """Return x and Q^2 within what was measured: Q^2 from 3 to 1,000 GeV^2, x from 1e-4 to 0.7."""
    x, q2 = np.meshgrid(
        np.geomspace(1e-4, 0.7, 13 if small else 25), np.geomspace(3.0, 1000.0, 10 if small else 20)
    )
    inside = (q2 <= MOST_Y * S * x) & (q2 * (1.0 / x - 1.0) + PROTON_MASS2 > LEAST_W2)
    return x[inside], q2[inside]


def measured(small: bool) -> sw.ChiSquare:
    """Return the points, each moved by its error."""
    x, q2 = points(small)
    law = f2(x, q2)
    stat = {"column": "stat", "given_in": "value", "scales_with": "nothing"}
    table = sw.Measurements.from_columns(
        {"title": "F2 of the proton", "measures": "F2", "exchange": "photon", "uncertainty": [stat]},
        {"x": x, "q2": q2, "value": law, "stat": ERROR / 100.0 * law},
    )
    return sw.ChiSquare(table.with_values(table.pseudo_data(np.random.default_rng(SEED)).values))


def theory(alpha_s: float) -> sw.Theory:
    """Return NNLO with massless coefficients and thresholds at the masses."""
    return sw.Theory(
        order="NNLO",
        coupling=sw.Coupling(alpha_s, q2=91.1876**2, nf=5),
        masses=sw.QuarkMasses(charm=1.4, bottom=4.75, top=172.5, kind="pole"),
        flavours=(3, 5),
    )


def shape_of(grid: sw.ChebyshevGrid) -> Restricted:
    """Return the shape; what photons on protons cannot tell apart is tied: common practice, no source.

    d valence has the power of u valence and falls about one power faster; ubar and dbar are equal, strange
    quarks half as many; three priors keep valence and sea apart. With freer shapes chi-square falls by up to
    a fifth, and ends in several minima, some of which have sea quarks for valence.
    """
    terms = {
        "g": Term(-0.1, 5.5),
        "u_v": Term(0.65, 3.5, [1.0, 0.0]),
        "d_v": Term(0.65, 4.5),
        "ubar": Term(-0.15, 8.0, [0.2]),
    }
    law = PowerLaw(
        grid, terms, nf=3, relations=["dbar = ubar", "s = 0.5*ubar", "sbar = s"], momentum="g",
        numbers={"u_v": 2, "d_v": 1},
    )  # fmt: skip
    known = {"d_v.fall": (4.5, 0.3), "ubar.fall": (8.0, 1.0), "u_v.power": (0.65, 0.15)}
    return law.restricted(tied={"d_v.power": "u_v.power"}, priors=known)


def map_at(alpha_s: float, table: sw.Measurements) -> sw.ForwardMap:
    """Return the map for a coupling."""
    grid = sw.ChebyshevGrid(x_min=1e-4)
    return sw.forward_map(theory(alpha_s), grid, start_q2=START_Q2, start_nf=START_NF, points=table)


def fitted(chi2: sw.ChiSquare) -> FitResult:
    """Fit shape and alpha_s, with maps built anew until alpha_s settles."""
    table = chi2.measurements
    first = map_at(0.118, table)
    return sw.fit(
        first, chi2, shape_of(first.grid), theory=["alpha_s"],
        rebuild=lambda at: map_at(at["alpha_s"], table),
    )  # fmt: skip


def shares(result: FitResult, q2: float) -> dict[str, float]:
    """Return the parts of the momentum at a scale, in per cent of x = 1e-4 to 1; the sum is checked."""
    densities = result.densities
    operators = sw.build_operators(
        theory(result.value("alpha_s")), densities.grid, start_q2=START_Q2, start_nf=START_NF, q2=[q2]
    )
    evolved = operators.apply(densities)
    # parametrised three-loop kernels keep it to 3e-7 only; quadrature of the standard grid adds to that
    check("the momentum sum", abs(float(np.ravel(evolved.momentum())[0]) - 1.0), 1e-5)
    x, weights = np.polynomial.legendre.leggauss(200)  # in u = ln(1/x): the integral of x f(x) over dx
    u = 0.5 * np.log(1e4) * (x + 1.0)
    measure = 0.5 * np.log(1e4) * weights * np.exp(-u)
    names = {"gluon": "g", "u valence": "u_v", "d valence": "d_v", "all quarks and antiquarks": "singlet"}
    return {
        said: 100.0 * float(evolved.at(q2, np.exp(-u), name)[0] @ measure) for said, name in names.items()
    }


def check_fit(chi2: sw.ChiSquare, result: FitResult) -> None:
    """Compare with plain numpy at the end of the fit, and look for a lower chi-square nearby."""
    assert result.converged, result.status
    fmap = map_at(result.value("alpha_s"), chi2.measurements)
    order = [result.densities.flavours.index(flavour) for flavour in fmap.flavours]
    predicted = fmap.predict(result.densities.values[:, order])[0]
    values, errors = chi2.measurements.value, np.sqrt(np.diagonal(chi2.covariance))
    plain = float((((values - predicted) / errors) ** 2).sum())
    # alpha_s lies within 0.01 of its error of that of the map: 1e-4 of chi-square
    check("chi-square of plain numpy", abs(plain - result.chi2), 1e-2)


def measure(small: bool) -> list[Figure]:
    """Return what the fit found."""
    chi2 = measured(small)
    begin = time.process_time()
    result = fitted(chi2)
    seconds = time.process_time() - begin
    check_fit(chi2, result)
    count, law = len(chi2.measurements), f2(*points(small))
    away = float(np.sqrt(np.mean((result.prediction / law - 1.0) ** 2)))
    alpha_s = f"{result.value('alpha_s'):.4f} +- {result.error('alpha_s'):.4f}"
    parts = ", ".join(f"{name} {share:.1f}" for name, share in shares(result, 10.0).items())
    return [
        Figure(
            "chi-square per point",
            f"{result.chi2 / count:.2f} for {count} points, {len(result.names)} parameters",
        ),
        Figure(
            "distance of the fit from the parametrisation, root of the mean square", f"{100 * away:.1f} %"
        ),
        Figure("alpha_s(M_Z^2), errors as they are drawn", alpha_s),
        Figure("momentum at 10 GeV^2, x above 1e-4, per cent", parts),
        Figure("maps built, CPU of the whole fit", f"{result.rebuilt}, {seconds:.1f} s"),
    ]


if __name__ == "__main__":
    show(measure, __doc__)
