"""Structure functions by adaptive quadrature of coefficient functions on densities: no matrix anywhere.

The densities are the evolved ones, as functions of x by the polynomials of the grid; the coefficient
functions come point by point. What is tested with it is everything between: matrices, powers of a, couplings,
transposes of operators.
"""

from __future__ import annotations

import numpy as np
import scalewright as sw
from scalewright import _core
from scipy.integrate import cubature

#: Least ln(1/z).
NEAREST = 1e-12


def convolved(density, edges, x, kernels):
    """Return int_x^1 dz C(z) F(x/z) for each kernel and each flavour, (kernel, flavour).

    `density` takes an array of x and returns (flavour, x); `kernels` are functions of z and 1 - z that return
    regular part, plus coefficients, local part; `edges` are those of the panels in u, where F is not smooth.
    """
    here = density(np.array([x]))[:, 0]
    u = -np.log(x)
    breaks = sorted({u - edge for edge in edges if 0.0 < edge < u} | {u})
    _, plus, local = zip(*(kernel(np.array([0.5]), np.array([0.5])) for kernel in kernels), strict=True)

    def integrand(points):
        # nearer to z = 1 a difference of densities is rounding alone, which 1/(1 - z) blows up; what lies
        # there is 1e-12 times ln^3(1e-12) = 2e4 of a slope
        s = np.maximum(points[:, 0], NEAREST**0.25)
        t = s**4  # takes the logarithms of 1 - z away from the end
        z, y = np.exp(-t), -np.expm1(-t)
        value = density(np.minimum(1.0, np.exp(t - u))).T  # (point, flavour)
        rows = np.empty((s.size, len(kernels), value.shape[1]))
        for place, (kernel, coefficients) in enumerate(zip(kernels, plus, strict=True)):
            singular = sum(c * np.log(y) ** k / y for k, c in enumerate(coefficients)) * np.ones_like(y)
            rows[:, place] = kernel(z, y)[0][:, None] * value + singular[:, None] * (value - here)
        return rows * (z * 4.0 * s**3)[:, None, None]

    total, start = 0.0, 0.0
    for end in breaks:
        part = cubature(integrand, [start], [end**0.25], rtol=1e-10, atol=1e-13, max_subdivisions=2000)
        total, start = total + part.estimate, end**0.25
    for i, (coefficients, at_one) in enumerate(zip(plus, local, strict=True)):
        left = sum(c * np.log1p(-x) ** (k + 1) / (k + 1) for k, c in enumerate(coefficients))
        total[i] += (at_one + left) * here
    return total


def light_kernel(order, function, name, nf):
    """Return a coefficient function in the form that `convolved` wants."""
    return lambda z, y: _core.coefficient_function(order, function, name, nf, z, y)


def light(theory, evolved, function, x, even, odd, highest):
    """Return F2, FL or xF3 with these weights of q + qbar and q - qbar, (6,) each, at mu_r = mu_f = Q."""
    q2, nf = float(np.ravel(evolved.q2)[0]), int(np.ravel(evolved.nf)[0])
    a = float(theory.alpha_s(q2, nf)) / (4 * np.pi)
    names = ("ns+", "ns-", "pure singlet", "gluon")
    kernels = [light_kernel(k, function, name, nf) for k in range(highest + 1) for name in names]
    flavours = list(evolved.flavours)

    def density(points):
        return evolved.grid.interpolate(evolved.values.reshape(len(flavours), -1), points)

    parts = convolved(density, evolved.grid.edges, x, kernels).reshape(highest + 1, 4, len(flavours))
    plus, minus, pure, gluon = np.einsum("k,kcf->cf", a ** np.arange(highest + 1), parts)
    total = 0.0
    for quark in range(1, nf + 1):
        q, anti = flavours.index(quark), flavours.index(-quark)
        total += even[quark - 1] * (plus[q] + plus[anti]) + odd[quark - 1] * (minus[q] - minus[anti])
    if function != "xF3":
        singlet = sum(pure[flavours.index(f)] for q in range(1, nf + 1) for f in (q, -q))
        total += np.mean(even[:nf]) * (singlet + gluon[flavours.index(21)])
    return total


def start(grid, q2=1.5, nf=3):
    """Return the published toy input."""
    from apply.toy import functions

    return sw.Densities.sample(grid, q2=q2, nf=nf, functions=functions())
