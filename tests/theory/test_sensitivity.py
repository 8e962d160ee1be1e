"""Derivatives of the coupling with respect to what it is given, against mpmath at 30 digits.

The equation is solved there by quadrature and a root, the derivative by differences. Beta function:
W. Caswell; D. Jones (1974); O. Tarasov, A. Vladimirov, A. Zharkov (1980). Decoupling: K. Chetyrkin,
B. Kniehl, M. Steinhauser, hep-ph/9706430. Constants recalled from memory.
"""

import mpmath as mp
import numpy as np
import pytest
from scalewright import Coupling, QuarkMasses, Theory

MASSES, THRESHOLDS = (1.4, 4.5, 170.0), (2.5, 16.0, 4e4)
CONSTANT = {"pole": mp.mpf(14) / 3, "msbar": -mp.mpf(22) / 9}
DOWN, UP = ((8315.0, 5), (2.0, 3)), ((2.0, 3), (1e5, 6))
NUMBERS = {"alpha_s": 0, "charm": 1, "bottom": 2, "top": 3}


def run(a, log, nf, loops):
    """Return a after `log` in ln mu^2."""
    b = [mp.mpf(11) - mp.mpf(2) * nf / 3, mp.mpf(102) - mp.mpf(38) * nf / 3,
         mp.mpf(2857) / 2 - mp.mpf(5033) * nf / 18 + mp.mpf(325) * nf**2 / 54]  # fmt: skip

    def inverse(y):
        return 1 / sum(b[k] * y ** (-k) for k in range(loops))

    return 1 / mp.findroot(lambda y: mp.quad(inverse, [1 / a, y]) - log, 1 / a + b[0] * log)


def up(a, lower, mass, loops, kind):
    """Return a with one more flavour."""
    log = mp.log(THRESHOLDS[lower - 3] / mass**2)
    terms = [1, 2 * log / 3, CONSTANT[kind] + 38 * log / 3 + 4 * log**2 / 9]
    return a * sum(terms[k] * a**k for k in range(loops))


def alpha_s(given, start, end, loops, kind):
    """Return alpha_s at `end` from alpha_s and masses at `start`, each end (q2, nf)."""
    a, (q2, nf) = given[0] / (4 * mp.pi), start
    while nf != end[1]:
        lower = min(nf, nf + (1 if end[1] > nf else -1))
        there, mass = THRESHOLDS[lower - 3], given[lower - 2]
        a = run(a, mp.log(mp.mpf(there) / q2), nf, loops)
        if end[1] > nf:
            a, nf = up(a, lower, mass, loops, kind), nf + 1
        else:
            step = (lower, mass, loops, kind)
            a, nf = mp.findroot(lambda b, a=a, step=step: up(b, *step) - a, a), nf - 1
        q2 = there
    return 4 * mp.pi * run(a, mp.log(mp.mpf(end[0]) / q2), nf, loops)


@pytest.mark.parametrize("parameter", NUMBERS)
@pytest.mark.parametrize(
    ("loops", "kind", "start", "end"),
    [(1, "pole", *UP), (2, "msbar", *UP), (3, "pole", *UP), (3, "pole", *DOWN), (3, "msbar", *DOWN)],
)
def test_the_derivative_is_that_of_the_equation(parameter, loops, kind, start, end):
    given = (0.118 if start[1] == 5 else 0.3, *MASSES)
    theory = Theory(
        ("LO", "NLO", "NNLO")[loops - 1],
        Coupling(given[0], *start),
        QuarkMasses(*MASSES, kind),
        flavours=(3, 6),
        thresholds_q2=THRESHOLDS,
    )
    place = NUMBERS[parameter]
    q2, nf = np.array([end[0]]), np.array([end[1]])
    found = theory.handle().alpha_s_derivative(parameter, q2, nf)[0]
    with mp.workdps(30):
        h = mp.mpf(10) ** -9  # error h^2

        def at(sign):
            moved = [mp.mpf(v) + sign * h * (i == place) for i, v in enumerate(given)]
            return alpha_s(moved, start, end, loops, kind)

        exact = float((at(1) - at(-1)) / (2 * h))
    # five units of rounding in each of some ten factors; a mass that does not enter gives zero
    assert found == pytest.approx(exact, rel=1e-13, abs=1e-18)
