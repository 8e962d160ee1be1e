"""The compiled kernels, through Python, against the second writing, point by point.

The second writing was made from the papers alone, in harmonic polylogarithms where the compiled one has
dilogarithms, with logarithms of matching derived from the renormalisation group and as sparse tables where
the compiled one has nested polynomials. Two writings may share a wrong constant: exact moments and sum rules
are checked in the other files of this folder.
"""

from __future__ import annotations

import numpy as np
import pytest
from kernels.second_writing.matching import matching
from kernels.second_writing.parts import Parts
from kernels.second_writing.splitting_nnlo import splitting
from scalewright.kernels import CHANNELS, ELEMENTS, KernelValues, matching_element, splitting_function

ORDERS = ("LO", "NLO", "NNLO")

#: 1 - z from 1e-9 on, and z from 1e-7 on: what the quadrature sees. The two are complementary to rounding.
_SMALL_Z, _SMALL_REST = np.geomspace(1e-7, 0.5, 400), np.geomspace(1e-9, 0.5, 400)
Z = np.concatenate([_SMALL_Z, 1.0 - _SMALL_REST])
REST = np.concatenate([1.0 - _SMALL_Z, _SMALL_REST])
_BULK = (Z > 0.01) & (REST > 0.01)

#: Both writings add some 20 to 50 terms, which cancel by one or two decades at most: 50 roundings of 2^-53
#: times 20. In units of the value plus the largest in 0.01 < z < 0.99: terms stay where their sum vanishes.
ROUNDING = 1e-13

#: The second writing divides ln z ln(1-z) + Li2(1-z) + Li2(z) - pi^2/6, a sum that vanishes at z = 1, by 1-z.
#: Six roundings of that sum.
DIVIDED = 6 * 2.0**-53

#: delta(1-z) at nf^2 of the NNLO non-singlet: the second writing has the printed 1.13067, the compiled one
#: the exact 64/81 (5 zeta2 - 3 zeta3 - 51/16) = 1.13066637; nf = 6 at most.
PRINTED_LOCAL = 0.5e-5 * 6**2


#: Constants are polynomials in nf with terms up to 5e3: two roundings of that.
CONSTANT = 5e3 * 2 * 2.0**-53


def padded(plus, length):
    return np.pad(np.asarray(plus, dtype=float), (0, length - len(plus)))


def compare(compiled: KernelValues, second: Parts, *, local: float = 0.0, divided: float = 0.0) -> None:
    expected = second.regular(Z, REST)
    size = np.abs(expected) + np.max(np.abs(expected[_BULK]))
    allowed = ROUNDING * size + divided / REST
    difference = np.abs(compiled.regular - expected)
    worst = np.argmax(difference - allowed)
    assert difference[worst] <= allowed[worst], f"z = {Z[worst]}, 1 - z = {REST[worst]}"
    length = max(len(compiled.plus), len(second.plus))
    np.testing.assert_allclose(
        padded(compiled.plus, length), padded(second.plus, length), rtol=0, atol=CONSTANT
    )
    assert compiled.local == pytest.approx(second.local, rel=0, abs=max(CONSTANT, local))


@pytest.mark.parametrize("nf", [3, 4, 5, 6])
@pytest.mark.parametrize("channel", CHANNELS)
@pytest.mark.parametrize("k", [0, 1, 2])
def test_splitting_functions(k: int, channel: str, nf: int) -> None:
    compiled = splitting_function(channel, Z, order=ORDERS[k], nf=nf, one_minus_z=REST)
    # factors of the divided sum: 16 CF^2 = 28 in ns+ and ns-, 16 CA^2 = 144 in gg
    factor = {"ns+": 28.0, "ns-": 28.0, "gg": 144.0}.get(channel, 0.0) if k == 1 else 0.0
    local = PRINTED_LOCAL if k == 2 and channel in ("ns+", "ns-") else 0.0
    compare(compiled, splitting(k, channel, nf), local=local, divided=DIVIDED * factor)


@pytest.mark.parametrize("form", ["exact", "compact"])
@pytest.mark.parametrize("kind", ["pole", "msbar"])
@pytest.mark.parametrize("power", [0, 1, 2])
@pytest.mark.parametrize("element", ELEMENTS)
@pytest.mark.parametrize("k", [1, 2])
def test_matching_elements(k: int, element: str, power: int, kind: str, form: str) -> None:
    compiled = matching_element(
        element,
        Z,
        order=ORDERS[k],
        power_of_log=power,
        kind=kind,
        heavy_gluon_element=form,
        one_minus_z=REST,
    )
    compare(compiled, matching(k, element, power, kind, form))


def test_the_two_disagree_where_they_should() -> None:
    """The comparison sees a constant that is wrong in its sixth digit."""
    compiled = splitting_function("qg", Z, order="NNLO", nf=4, one_minus_z=REST)
    changed = compiled._replace(regular=compiled.regular + 1e-2 * np.log(Z))
    with pytest.raises(AssertionError, match="z ="):
        compare(changed, splitting(2, "qg", 4))


@pytest.mark.parametrize("nf", [3, 6])
def test_quark_number_decides_the_local_term(nf: int) -> None:
    """Of the two writings of nf^2 delta(1-z) the compiled one keeps the quark number exactly.

    The nf^2 part of ns- is exact: its first moment vanishes (S. Moch et al., hep-ph/0403192). The other
    powers are parametrised, hence the second difference in nf, from three of the three to six flavours.
    """
    middle = min(max(nf, 4), 5)
    weights = {middle - 1: 0.5, middle: -1.0, middle + 1: 0.5}
    t, w = _graded()
    z, rest = np.exp(-t), -np.expm1(-t)
    total = 0.0
    for count, weight in weights.items():
        parts = splitting_function("ns-", z, order="NNLO", nf=count, one_minus_z=rest)
        total += weight * (np.sum(w * z * parts.regular) + parts.local)
    # rounding of three numbers of 1e3, each a sum with errors of 1e-13 of it; 1.13067 would give 3.6e-6
    assert abs(total) < 1e-9


def _graded():
    """Gauss-Legendre in t = ln(1/z) on panels that halve towards 0 and end at 60."""
    nodes, weights = np.polynomial.legendre.leggauss(20)
    edges = np.concatenate([[0.0], 60.0 * 0.5 ** np.arange(49, -1, -1)])
    half = np.diff(edges)[:, None] / 2
    t = (edges[:-1, None] + half * (1 + nodes)).ravel()
    return t, (half * weights).ravel()
