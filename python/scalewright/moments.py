"""Mellin moments of structure functions, and the sum rules made of them.

All integrals run over [x_min, 1] of the grid: what lies below is not known, and `SumRule.remainder` names it.
With a = alpha_s(mu_r)/(4 pi), for mu_r = mu_f = Q and rows of the mixing matrix of length 1:

===================== ================================================ ===================================
name                  integral                                         value
===================== ================================================ ===================================
Adler                 int dx/(2x) (F2(nubar p) - F2(nu p))             1 at every order
Gross-Llewellyn Smith int dx/(2x) (xF3(nu p) + xF3(nubar p))           3 (1 - 4a - 16 a^2 (55/12 - nf/3))
Bjorken               int dx (F1(nubar p) - F1(nu p)), unpolarised     1 - 8/3 a - 16 a^2 (23/6 - 8 nf/27)
Gottfried             int dx/x (F2(p) - F2(n)), photon exchange        1/3 if ubar = dbar, at LO
===================== ================================================ ===================================

S. Adler, Phys. Rev. 143 (1966) 1144; D. Gross, C. Llewellyn Smith, Nucl. Phys. B14 (1969) 337; J. Bjorken,
Phys. Rev. 163 (1967) 1767; K. Gottfried, Phys. Rev. Lett. 18 (1967) 1174; corrections of order a^2: S. Larin,
J. Vermaseren, Phys. Lett. B259 (1991) 345, and S. Larin, F. Tkachov, J. Vermaseren, Phys. Lett. B273 (1991)
117, recalled from memory.
"""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any, NamedTuple

import numpy as np

from . import _check
from ._check import Floats, show
from ._observed.carried import with_target
from ._observed.couplings import mixing_pairs
from ._observed.measures import FUNCTIONS
from ._observed.point_rows import light_weights
from ._observed.points import Points
from ._observed.problem import Problem
from ._observed.pullback import flavour_rows
from ._observed.rows import light_rows
from .densities import Densities
from .electroweak import Electroweak
from .errors import InputError
from .observables import at_scale
from .theory import ORDERS, Theory

__all__ = ["SUM_RULES", "SumRule", "moment", "sum_rule"]

SUM_RULES = ("Adler", "Gross-Llewellyn Smith", "Bjorken", "Gottfried")


class SumRule(NamedTuple):
    """A sum over [x_min, 1] and what the whole of it should be.

    Attributes
    ----------
    value : ndarray, (replica,)
        The integral from x_min to 1.
    expected : float or None
        Of the integral from 0, for two u and one d valence quark and the mixing matrix in force; None where
        it depends on the sea.
    remainder : str
        What the value lacks.
    """

    value: Floats
    expected: float | None
    remainder: str


def moment(
    measure: str,
    n: float,
    *,
    q2: float,
    densities: Densities,
    theory: Theory,
    current: str = "neutral",
    exchange: str | None = None,
    beam: str | None = None,
    polarisation: float = 0.0,
    target: object = "proton",
    tagged: str | None = None,
    electroweak: Electroweak | None = None,
) -> Floats:
    """Return int dx x^(n-2) F(x) over [x_min, 1] for F = F2, FL or xF3 of massless quarks.

    Parameters
    ----------
    measure : {"F2", "FL", "xF3"}
    n : float
        At least 1 for xF3 and differences that vanish at small x, 2 and more otherwise, for the integral
        from 0 to exist; from 0 to 100 is allowed.
    q2 : float
        Q^2 in GeV^2.
    densities, theory, current, exchange, beam, polarisation, target, tagged, electroweak
        As for `structure_function`.

    Returns
    -------
    ndarray, (replica,)

    Raises
    ------
    InputError
        As for `structure_function`; or if heavy quarks have mass, which leaves no moment of one scale.

    Examples
    --------
    >>> import scalewright as sw
    >>> grid = sw.ChebyshevGrid(x_min=1e-5)
    >>> only_u = sw.Densities(grid, q2=2.0, nf=3, flavours=(21, 1, -1, 2, -2, 3, -3),
    ...     values=np.eye(7)[3][:, None] * grid.x**0.8 * (1 - grid.x) ** 3)
    >>> theory = sw.Theory(order="LO", flavours=3)
    >>> value = sw.moment("F2", 2, q2=2.0, densities=only_u, theory=theory, exchange="photon")
    >>> from scipy.special import beta
    >>> bool(abs(value[0] - 4 / 9 * beta(1.8, 4)) < 1e-6)
    True
    """
    _check.choice("measure", measure, FUNCTIONS)
    n = _check.real("n", n, least=0.0, most=100.0)
    q2 = _check.scale("q2", q2)
    if not isinstance(densities, Densities):
        _check.refuse("densities", densities, f"densities must be Densities, not {type(densities).__name__}")
    rows = SimpleNamespace(
        x=[1.0], q2=[q2], measure=measure, current=current, exchange=exchange, beam=beam,
        polarisation=polarisation, target=target, tagged=tagged,
    )  # fmt: skip
    points = Points.of(rows)
    electroweak = Electroweak.effective() if electroweak is None else electroweak
    problem = Problem(theory, densities.grid, electroweak, points)
    if theory.heavy_quarks != "massless":
        raise InputError(
            f'theory.heavy_quarks = "{theory.heavy_quarks}": moments are those of massless quarks'
        )
    nf = int(problem.nf[0])
    of_nodes = densities.grid.handle().moment_weights(n - 1.0)[np.newaxis]
    weights = light_weights(problem, points, nf, False)
    made = light_rows(problem.setting, {measure: of_nodes}, weights, problem.setting.powers(problem.a), nf)
    flavours = densities.flavours
    row = with_target(flavour_rows(made, flavours), points.protons, flavours)
    values = at_scale(densities, float(problem.muf2[0]), nf)
    return np.asarray(np.einsum("pfn,rfn->r", row, values))


def sum_rule(
    name: str,
    *,
    q2: float,
    densities: Densities,
    theory: Theory,
    electroweak: Electroweak | None = None,
) -> SumRule:
    """Return a sum rule above x_min.

    Parameters
    ----------
    name : {"Adler", "Gross-Llewellyn Smith", "Bjorken", "Gottfried"}
        As in the table at the head of this module.
    q2 : float
        Q^2 in GeV^2.
    densities, theory, electroweak
        As for `structure_function`.

    Returns
    -------
    SumRule

    Raises
    ------
    InputError
        As for `moment`.
    """
    _check.choice("name", name, SUM_RULES)
    electroweak = Electroweak.effective() if electroweak is None else electroweak
    common: dict[str, Any] = {
        "q2": q2, "densities": densities, "theory": theory, "electroweak": electroweak,
    }  # fmt: skip

    def charged(measure: str, beam: str) -> Floats:
        return moment(measure, 1.0, current="charged", beam=beam, **common)

    if name == "Gottfried":
        parts = [moment("F2", 1.0, exchange="photon", target=of, **common) for of in ("proton", "neutron")]
        value = parts[0] - parts[1]
    elif name == "Gross-Llewellyn Smith":
        value = 0.5 * (charged("xF3", "nu") + charged("xF3", "nubar"))
    else:
        value = 0.5 * (charged("F2", "nubar") - charged("F2", "nu"))
        if name == "Bjorken":
            value = value - 0.5 * (charged("FL", "nubar") - charged("FL", "nu"))
    below = f"the integral below x_min = {show(densities.grid.x_min)}"
    return SumRule(value, _expected(name, q2, theory, electroweak), below)


def _expected(name: str, q2: float, theory: Theory, electroweak: Electroweak) -> float | None:
    """Return the value of the whole integral, to the order of the theory; None where it is not fixed."""
    if name == "Gottfried":
        return None
    nf = int(theory.nf_at(q2 * theory.hard_muf2_ratio))
    pairs = mixing_pairs(electroweak, nf, None)
    up, down = 2.0 * float(pairs[0].sum()), float(pairs[:, 0].sum())
    series = {
        "Adler": (up - down, 0.0, 0.0),
        "Gross-Llewellyn Smith": (up + down, -4.0, -16.0 * (55.0 / 12.0 - nf / 3.0)),
        "Bjorken": (up - down, -8.0 / 3.0, -16.0 * (23.0 / 6.0 - 8.0 * nf / 27.0)),
    }[name]
    # a(Q) = a(mu_r) (1 + b0 ln(mu_r^2/Q^2) a)
    a = float(theory.alpha_s(q2 * theory.hard_mur2_ratio, nf)) / (4.0 * np.pi)
    b0 = 11.0 - 2.0 / 3.0 * nf
    second = series[2] + b0 * float(np.log(theory.hard_mur2_ratio)) * series[1]
    terms = (1.0, series[1] * a, second * a**2)
    return series[0] * sum(terms[: ORDERS.index(theory.order) + 1])
