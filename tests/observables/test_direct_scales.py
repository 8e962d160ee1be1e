"""F2, FL and xF3 at NNLO with other scales, by adaptive quadrature of the second writing, nested."""

import numpy as np
import pytest
import scalewright as sw
from kernels.second_writing.coefficients import coefficient
from kernels.second_writing.parts import Parts
from kernels.second_writing.splitting_lo_nlo import splitting
from observables import direct

CHARGES2 = np.array([1, 4, 1, 4, 1, 4]) / 9
X, Q2 = 0.05, 80.0
SCALES = [(0.5, 2.0), (4.0, 0.25)]


def of(parts):
    """Return a second writing in the form that `direct.convolved` wants."""
    return lambda z, y: (parts.regular(z, y), parts.plus, parts.local)


def acting(matrix, density, edges, x):
    """Return a matrix of sums of kernels on the components of `density` at x, (row,)."""
    kernels = [(r, c, part) for r, row in enumerate(matrix) for c, parts in enumerate(row) for part in parts]
    made = direct.convolved(density, edges, x, [of(part) for *_, part in kernels])
    result = np.zeros(len(matrix))
    for (r, c, _), values in zip(kernels, made, strict=True):
        result[r] += values[c]
    return result


def singlet_splitting(order, nf):
    """Return the splitting functions of (non-singlet, Sigma, g)."""
    ns, ps, qg, gq, gg = (splitting(order, name, nf) for name in ("ns+", "pure singlet", "qg", "gq", "gg"))
    return [[[ns], [], []], [[], [ns, ps], [qg]], [[], [gq], [gg]]]


def valence_splitting(order, nf):
    """Return the splitting functions of (sum of q + qbar, sum of q - qbar), both non-singlet."""
    return [[[splitting(order, "ns+", nf)], []], [[], [splitting(order, "ns-", nf)]]]


def singlet_row(order, measure, nf, mean):
    """Return F2 or FL of (non-singlet, Sigma, g) as kernels and what multiplies the components."""
    ns, ps, g = (coefficient(order, measure, name, nf) for name in ("ns+", "pure singlet", "gluon"))
    return [[[ns], [ns, ps], [g]]], np.array([1.0, mean, mean])


def xf3(order, name, nf):
    """Return a coefficient of xF3; at a^2 the compiled one: the second writing has an older fit, 4e-6 off."""
    if order < 2:
        return coefficient(order, "F3", name, nf)
    compiled = direct.light_kernel(order, "xF3", name, nf)
    _, plus, local = compiled(np.array([0.5]), np.array([0.5]))
    return Parts(lambda z, y: compiled(z, y)[0], tuple(plus), local)


def shifted(splittings, row, components, grid, nf, mur, muf):
    """Return coefficients of 1, a and a^2, a = a(mu_r), of what `row` says of the components.

    With t = ln(Q^2/mu_f^2), lr = ln(mu_r^2/mu_f^2): C1 = c1 + t c0 P0, C2 = c2 + t (c1 P0 + c0 P1 - b0 c1) +
    t^2/2 (c0 P0 P0 - b0 c0 P0), from d F/d mu_f = 0, and a(mu_f) = a + b0 lr a^2 (W. van Neerven, A. Vogt,
    hep-ph/0006154, eq. 2.17 in other words).
    """

    def density(points):
        return grid.interpolate(components, points)

    # P0 on the densities, at the nodes of a finer grid down to x
    finer = sw.ChebyshevGrid.from_panels([*grid.edges[:3], 1.7, -np.log(X) + 1e-6, 5.0], [22, 26, 22, 22, 4])
    p0, p1 = splittings(0, nf), splittings(1, nf)
    reached = finer.x > 0.9 * X
    made = np.zeros((len(components), finer.nodes))
    made[:, reached] = np.array([acting(p0, density, grid.edges, node) for node in finer.x[reached]]).T

    def once(points):
        return finer.interpolate(made, points)

    def on(order, function, edges):
        kernels, factors = row(order)
        # each kernel acts on its own component, times its factor
        return float(acting(kernels, lambda p: factors[:, None] * function(p), edges, X)[0])

    c0, c1, c2 = (on(order, density, grid.edges) for order in range(3))
    c0p0, c1p0 = (on(order, once, finer.edges) for order in range(2))
    # what is left of c0 is a number times delta(1 - z): P1 and P0 P0 first, then c0
    kernels, factors = row(0)
    local = np.array([sum(part.local for part in parts) for parts in kernels[0]]) * factors
    c0p1 = local @ acting(p1, density, grid.edges, X)
    c0p0p0 = local @ acting(p0, once, finer.edges, X)
    t, lr, b0 = -np.log(muf), np.log(mur / muf), 11 - 2 / 3 * nf
    first = c1 + t * c0p0
    second = c2 + t * (c1p0 + c0p1 - b0 * c1) + t**2 / 2 * (c0p0p0 - b0 * c0p0) + b0 * lr * first
    return np.array([c0, first, second])


@pytest.fixture(scope="module", params=SCALES)
def case(request, grid, start):
    """Theory, evolved densities, their values by flavour, and powers of a."""
    mur, muf = request.param
    theory = sw.Theory(hard_mur2_ratio=mur, hard_muf2_ratio=muf)
    evolved = sw.evolve(theory, start, [muf * Q2]).scale(muf * Q2)
    nf = int(evolved.nf)
    values = dict(zip(evolved.flavours, evolved.values.reshape(len(evolved.flavours), -1), strict=True))
    a = float(theory.alpha_s(mur * Q2, nf)) / (4 * np.pi)
    return theory, evolved, values, nf, a ** np.arange(3), (mur, muf)


def test_f2_and_fl(grid, case):
    theory, evolved, values, nf, powers, scales = case
    plus = np.array([values[q] + values[-q] for q in range(1, nf + 1)])
    mean = CHARGES2[:nf].mean()
    components = np.array([(CHARGES2[:nf] - mean) @ plus, plus.sum(axis=0), values[21]])
    expected, value = {}, {}
    for measure in ("F2", "FL"):

        def row(order, measure=measure):
            return singlet_row(order, measure, nf, mean)

        expected[measure] = powers @ shifted(singlet_splitting, row, components, grid, nf, *scales)
        asked = {"x": X, "q2": Q2, "densities": evolved, "theory": theory, "exchange": "photon"}
        value[measure] = sw.structure_function(measure, **asked)[0]
    for measure, exact in expected.items():
        # what the standard resolution promises
        assert abs(value[measure] - exact) <= 1e-6 * max(abs(exact), 1e-3 * expected["F2"]), measure


@pytest.mark.parametrize("beam", ["nu", "nubar"])
def test_xf3_of_neutrinos(grid, case, beam):
    # xF3(W+) = 2 sum |V|^2 (D - Ubar), xF3(W-) = 2 sum |V|^2 (U - Dbar), pairs of active quarks; as weights
    # of q + qbar and q - qbar
    theory, evolved, values, nf, powers, scales = case
    v2 = np.array(sw.Electroweak.effective().mixing) ** 2
    sign = 1 if beam == "nu" else -1
    even = odd = 0.0
    for i, up in enumerate((2, 4, 6)):
        for j, down in enumerate((1, 3, 5)):
            if max(up, down) <= nf:
                plus_d, plus_u = values[down] + values[-down], values[up] + values[-up]
                even = even + v2[i, j] * sign * (plus_d - plus_u)
                odd = odd + v2[i, j] * (values[down] - values[-down] + values[up] - values[-up])

    def row(order):
        return [[[xf3(order, name, nf)] for name in ("ns+", "ns-")]], np.ones(2)

    expected = powers @ shifted(valence_splitting, row, np.array([even, odd]), grid, nf, *scales)
    asked = {"x": X, "q2": Q2, "densities": evolved, "theory": theory, "current": "charged", "beam": beam}
    value = sw.structure_function("xF3", **asked)[0]
    f2 = sw.structure_function("F2", **asked)[0]
    assert abs(value - expected) <= 1e-6 * max(abs(expected), 1e-3 * f2)  # standard resolution
