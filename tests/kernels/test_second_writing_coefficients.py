"""The second writing of the light coefficient functions: moments, sum rules, limits.

"Rounding" is 1e-12: see `test_second_writing.py`. Parametrisations have tolerances of
their own; each is the accuracy the published fit has for that quantity. Published values
were recalled from memory, then found to agree with the parametrisations here, which are
an independent recollection.
"""

from __future__ import annotations

import numpy as np
import pytest
from kernels.second_writing import coefficient_moments as exact, coefficients_nnlo, coefficients_older_fits
from kernels.second_writing.coefficients import NAMES, STRUCTURE_FUNCTIONS, coefficient
from kernels.second_writing.coefficients_older_fits import add
from kernels.second_writing.matrix_elements import LEFT, VECTOR, Process, coefficients
from kernels.second_writing.moments import moment
from kernels.second_writing.parts import CA, CF, Parts

ROUNDING = 1e-12
INSIDE = np.array([1e-4, 1e-3, 0.05, 0.3, 0.5, 0.7, 0.9])


def coef(order: int, sf: str, name: str, nf: int, n: float) -> float:
    return moment(coefficient(order, sf, name, nf), n)


def by_power_of_nf(sf: str, name: str, n: float) -> tuple[float, float]:
    zero = coef(2, sf, name, 0, n)
    return zero, coef(2, sf, name, 1, n) - zero


def at(parts: Parts, z: float) -> float:
    """Value below z = 1, plus distributions included."""
    y = np.array([1 - z])
    plus = sum(c * np.log(y[0]) ** k / y[0] for k, c in enumerate(parts.plus))
    return float(parts.regular(np.array([z]), y)[0] + plus)


# a^1


@pytest.mark.parametrize("n", range(1, 13))
def test_first_order_moments_are_those_of_bardeen(n: int) -> None:
    """W. Bardeen et al. (1978): harmonic sums, of other origin than the z-space forms."""
    for sf in STRUCTURE_FUNCTIONS:
        for name in ("ns+", "ns-"):
            assert coef(1, sf, name, 4, n) == pytest.approx(exact.quark_nlo(sf, n), abs=ROUNDING)
    for sf in ("F2", "FL"):
        expected = 4 * exact.gluon_nlo(sf, n)
        assert coef(1, sf, "gluon", 4, n) == pytest.approx(expected, abs=ROUNDING)


@pytest.mark.parametrize("z", [0.02, 0.1, 0.3, 0.6, 0.8])
def test_first_order_follows_from_matrix_elements(z: float) -> None:
    """Squared matrix elements over phase space, with MS-bar collinear subtraction.

    1e-9 relative: quadrature nodes begin at v = 5e-4, and 1e-16/v^2 of the amplitude cancels.
    """
    quark = coefficients(Process(False, LEFT, 3.0, 0.0, 0.0), z, 3.0)
    two, long = at(coefficient(1, "F2", "ns+", 3), z), at(coefficient(1, "FL", "ns+", 3), z)
    three = at(coefficient(1, "F3", "ns-", 3), z)
    assert quark == pytest.approx([two - long, two, three], rel=1e-9)
    gluon = coefficients(Process(True, VECTOR, 3.0, 0.0, 0.0), z, 3.0)
    two, long = at(coefficient(1, "F2", "gluon", 1), z), at(coefficient(1, "FL", "gluon", 1), z)
    assert gluon[:2] == pytest.approx([two - long, two], rel=1e-9)
    # a gluon makes q and qbar alike
    assert gluon[2] == pytest.approx(0, abs=1e-9)


def test_what_vanishes_vanishes() -> None:
    """FL begins at a^1, gluons at a^1, pure singlet at a^2, and F3 has neither."""
    zero = [(0, "FL", n) for n in NAMES] + [(0, "F2", n) for n in NAMES[2:]]
    zero += [(1, sf, "pure singlet") for sf in STRUCTURE_FUNCTIONS]
    zero += [(k, "F3", n) for k in (0, 1, 2) for n in NAMES[2:]]
    for order, sf, name in zero:
        parts = coefficient(order, sf, name, 5)
        assert parts.local == 0 and not parts.plus
        assert not parts.regular(INSIDE, 1 - INSIDE).any()
    for sf in ("F2", "F3"):
        assert coef(0, sf, "ns-", 5, 3) == 1.0


def test_unknown_names_are_refused() -> None:
    for arguments in ((3, "F2", "ns+"), (1, "F1", "ns+"), (1, "F2", "singlet")):
        with pytest.raises(ValueError, match=r"none of"):
            coefficient(*arguments, 4)


# Sum rules


@pytest.mark.parametrize("nf", [3, 4, 5, 6])
def test_adler_sum_rule(nf: int) -> None:
    """S. Adler (1966): no correction at any order. a^2: 4e-4, as far as the fit goes."""
    assert coef(0, "F2", "ns-", nf, 1) == 1.0
    assert coef(1, "F2", "ns-", nf, 1) == pytest.approx(0, abs=ROUNDING)
    assert coef(2, "F2", "ns-", nf, 1) == pytest.approx(0, abs=4e-4)


def test_gross_llewellyn_smith_sum_rule() -> None:
    """S. Gorishny, S. Larin (1986): 1 - 4a - 16 a^2 (55/12 - nf/3). a^2: 6e-4, the fit."""
    assert coef(1, "F3", "ns-", 4, 1) == pytest.approx(-4, abs=ROUNDING)
    expected = (-16 * 55 / 12, 16 / 3)
    assert by_power_of_nf("F3", "ns-", 1) == pytest.approx(expected, rel=6e-4)


def test_unpolarised_bjorken_sum_rule() -> None:
    """K. Chetyrkin et al. (1984): F1 has -(2/3) alpha_s/pi - (23/6 - 8 nf/27)(alpha_s/pi)^2.

    With Adler's sum rule it is all in FL. a^2: 6e-6 relative, the fit; nf^1 is exact.
    """
    assert coef(1, "FL", "ns-", 4, 1) == pytest.approx(8 / 3, abs=ROUNDING)
    zero, one = by_power_of_nf("FL", "ns-", 1)
    assert zero == pytest.approx(16 * 23 / 6, rel=6e-6)
    assert one == pytest.approx(-16 * 8 / 27, rel=ROUNDING)


# a^2


@pytest.mark.parametrize(("sf", "n"), exact.NON_SINGLET_NNLO)
def test_second_order_moments_are_those_of_larin(sf: str, n: int) -> None:
    """S. Larin et al., hep-ph/9605317. 6e-5 relative: the fits are good to that."""
    expected = exact.NON_SINGLET_NNLO[sf, n]
    assert by_power_of_nf(sf, "ns+", n) == pytest.approx(expected, rel=6e-5)


def test_second_order_gluon_moment_is_that_of_larin() -> None:
    """The same source, N = 2. 3e-5 relative: the fit."""
    assert coef(2, "F2", "gluon", 1, 2) == pytest.approx(exact.GLUON_F2_NNLO_2, rel=3e-5)


@pytest.mark.parametrize(("sf", "name"), [("F2", "ns+"), ("F2", "ns-"), ("F3", "ns+"), ("F3", "ns-")])
def test_soft_gluon_terms_are_exact(sf: str, name: str) -> None:
    """E. Zijlstra, W. van Neerven (1992), the same for F2 and F3.

    1e-5 relative: at least five printed digits, the last rounded. The delta terms are
    shifted on purpose in the fits, by at most 0.6 (nf^0) and 0.015 (nf^1).
    """
    zero, one = coefficient(2, sf, name, 0), coefficient(2, sf, name, 1)
    assert zero.plus == pytest.approx(exact.SOFT_0, rel=1e-5)
    slopes = np.array(one.plus) - np.array(zero.plus)
    assert slopes == pytest.approx(np.array(exact.SOFT_1), rel=1e-5)
    assert zero.local == pytest.approx(exact.LOCAL[0], abs=0.6)
    assert one.local - zero.local == pytest.approx(exact.LOCAL[1], abs=0.015)


@pytest.mark.parametrize("sf", ["F2", "FL"])
def test_inverse_powers_obey_casimir_scaling(sf: str) -> None:
    """Pure singlet to gluon as CF to CA at z -> 0; values of the same source.

    Printed digits: 1e-5 for 5.2903 (F2), 2.5e-4 for 2.370 (FL); z = 1e-12 leaves
    z ln^3 z = 2e-8.
    """
    z = np.array([1e-12])
    digits = 1.1e-5 if sf == "F2" else 2.5e-4
    value = exact.INVERSE_F2 if sf == "F2" else exact.INVERSE_FL
    ps, gluon = (float(z[0] * coefficient(2, sf, n, 1).regular(z, 1 - z)[0]) for n in NAMES[2:])
    assert ps / gluon == pytest.approx(CF / CA, rel=digits)
    assert ps == pytest.approx(CF * value, rel=digits)


def _of_size(parts: Parts, n: int) -> float:
    """int z^(n-1) |C| of the regular part."""
    return moment(Parts(lambda z, y: np.abs(parts.regular(z, y)), (), 0.0), n)


@pytest.mark.parametrize("sf", ["F2", "FL"])
@pytest.mark.parametrize("n", [2, 3, 4, 6, 10])
def test_two_published_fits_agree_for_even_moments(sf: str, n: int) -> None:
    """hep-ph/0504242 and hep-ph/0411112 against hep-ph/9907472, by power of nf.

    A wrong digit in either shows. Their authors state a part in a thousand each for the
    regular part, hence 2e-3 of int z^(n-1) |C|. Not at larger n, where the shifts of the
    delta terms are left alone.
    """
    old, new = (
        [build(nf) for nf in (0, 1)]
        for build in (
            lambda nf: coefficients_older_fits.non_singlet(sf, "ns+", nf),
            lambda nf: coefficient(2, sf, "ns+", nf),
        )
    )
    flavour = [add(pair[1], pair[0], -1.0) for pair in (old, new)]
    for first, second in ((old[0], new[0]), flavour):
        near = 2e-3 * _of_size(second, n)
        assert moment(first, n) == pytest.approx(moment(second, n), abs=near)


@pytest.mark.parametrize("n", [2, 3, 4, 6, 10])
def test_two_published_fits_agree_for_the_singlet(n: int) -> None:
    """hep-ph/0504242 against hep-ph/0006154, to the same 2e-3 of int z^(n-1) |C|."""
    local = coefficients_older_fits.GLUON_F2_LOCAL
    older = {
        "pure singlet": Parts(coefficients_older_fits.pure_singlet_f2, (), 0.0),
        "gluon": Parts(coefficients_older_fits.gluon_f2, (), local),
    }
    for name, old in older.items():
        new = coefficient(2, "F2", name, 1)
        near = 2e-3 * _of_size(new, n)
        assert moment(old, n) == pytest.approx(moment(new, n), abs=near), name


@pytest.mark.parametrize("n", [2, 3, 4, 6])
def test_pure_singlet_of_fl_is_the_exact_one(n: int) -> None:
    """E. Zijlstra, W. van Neerven (1992), in closed form. 1e-3 of int z^(n-1) |C|: the fit."""
    fit, full = coefficient(2, "FL", "pure singlet", 1), Parts(exact.pure_singlet_fl, (), 0.0)
    near = 1e-3 * _of_size(full, n)
    assert moment(fit, n) == pytest.approx(moment(full, n), abs=near)


@pytest.mark.parametrize("sf", STRUCTURE_FUNCTIONS)
@pytest.mark.parametrize("n", [1, 2, 4])
def test_even_minus_odd_agrees_with_the_later_fit(sf: str, n: int) -> None:
    """arXiv:0708.3731 fits the difference itself; hep-ph/9907472 each part.

    0.07 absolute: a part in a thousand of parts of size 70.
    """
    even = moment(coefficients_older_fits.non_singlet(sf, "ns+", 0), n)
    odd = moment(coefficients_older_fits.non_singlet(sf, "ns-", 0), n)
    assert moment(coefficients_nnlo.DIFFERENCE[sf], n) == pytest.approx(even - odd, abs=0.07)


def test_later_fit_of_the_difference_obeys_the_sum_rules_too() -> None:
    """Even (newer) minus difference: Adler 7e-4 absolute, Bjorken 3e-5 relative: the fits."""
    adler = coef(2, "F2", "ns+", 0, 1) - moment(coefficients_nnlo.DIFFERENCE["F2"], 1)
    assert adler == pytest.approx(0, abs=7e-4)
    bjorken = coef(2, "FL", "ns+", 0, 1) - moment(coefficients_nnlo.DIFFERENCE["FL"], 1)
    assert bjorken == pytest.approx(16 * 23 / 6, rel=3e-5)
