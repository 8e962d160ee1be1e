"""Inputs of known integrals, shared by the tests of densities."""

from scipy.special import beta

#: A x^a (1-x)^b by flavour: invented, with a momentum sum of its own.
POWERS = {
    21: (1.8, -0.1, 5.0),
    1: (1.5, 0.7, 4.0),
    -1: (0.0, 0.0, 1.0),
    2: (3.0, 0.6, 3.0),
    -2: (0.0, 0.0, 1.0),
    3: (0.2, -0.2, 7.0),
    -3: (0.2, -0.2, 7.0),
}


def power(amount, a, b):
    """Return the function amount x^a (1-x)^b."""
    return lambda x: amount * x**a * (1 - x) ** b


FUNCTIONS = {flavour: power(*shape) for flavour, shape in POWERS.items()}

#: Integrals over the whole of 0 < x < 1 by Euler's Beta function.
MOMENTUM = sum(amount * beta(a + 1, b + 1) for amount, a, b in POWERS.values())
NUMBER = {1: 1.5 * beta(0.7, 5.0), 2: 3.0 * beta(0.6, 4.0), 3: 0.0}


def published(flavour, x, q2=2.0):
    """Return the published toy input at 2 GeV^2 (W. Giele et al., hep-ph/0204316, section 1.3)."""
    dbar = 0.1939875 * x**-0.1 * (1 - x) ** 6
    ubar = (1 - x) * dbar
    strange = 0.2 * (ubar + dbar)
    return {
        21: 1.7 * x**-0.1 * (1 - x) ** 5,
        1: 3.064320 * x**0.8 * (1 - x) ** 4 + dbar,
        2: 5.107200 * x**0.8 * (1 - x) ** 3 + ubar,
        -1: dbar,
        -2: ubar,
        3: strange,
        -3: strange,
    }[flavour]


PUBLISHED_FLAVOURS = (21, 1, -1, 2, -2, 3, -3)
