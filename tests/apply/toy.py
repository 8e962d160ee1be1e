"""Input of the published benchmark (W. Giele et al., hep-ph/0204316, section 1.3; recalled from memory)."""

from scipy.special import beta

# x f(x) = norm x^power (1 - x)^fall
U_V, D_V, GLUON, DBAR = (5.1072, 0.8, 3), (3.06432, 0.8, 4), (1.7, -0.1, 5), (0.1939875, -0.1, 6)


def shape(parameters):
    norm, power, fall = parameters
    return lambda x: norm * x**power * (1 - x) ** fall


def moment(parameters, n):
    """Integral of x^(n-1) f(x) from 0 to 1, exact."""
    norm, power, fall = parameters
    return norm * beta(power + n - 1, fall + 1)


def functions():
    u_v, d_v, g, dbar = (shape(p) for p in (U_V, D_V, GLUON, DBAR))
    return {
        21: g,
        1: lambda x: d_v(x) + dbar(x),
        -1: dbar,
        2: lambda x: u_v(x) + (1 - x) * dbar(x),
        -2: lambda x: (1 - x) * dbar(x),
        3: lambda x: 0.2 * (2 - x) * dbar(x),
        -3: lambda x: 0.2 * (2 - x) * dbar(x),
    }


def momentum():
    """Momentum of all of it, exact: (1 - x) x^-0.1 (1 - x)^6 is one more power of 1 - x."""
    norm, power, fall = DBAR
    ubar = (norm, power, fall + 1)
    sea = 2 * moment(DBAR, 2) + 2 * moment(ubar, 2) + 0.4 * (moment(DBAR, 2) + moment(ubar, 2))
    return moment(U_V, 2) + moment(D_V, 2) + moment(GLUON, 2) + sea
