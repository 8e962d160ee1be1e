"""Photon-gluon fusion into a heavy pair at a^1, exact in m^2/Q^2.

E. Witten, Nucl. Phys. B104 (1976) 445; M. Glück, E. Reya, Phys. Lett. B83 (1979) 98. Here
in the variables of E. Laenen, S. Riemersma, J. Smith, W. van Neerven, Nucl. Phys. B392
(1993) 162, eqs. (3.2) to (3.4): eta = (s - 4 m^2)/(4 m^2) and xi = Q^2/m^2, transverse and
longitudinal. Recalled from memory; compared in the tests with the integral of the squared
matrix element over phase space.
"""

from __future__ import annotations

import numpy as np
from kernels.second_writing.parts import TR, Array


def z_max(q2: float, m2: float) -> float:
    """Largest z at which a pair can be made, Q^2/(Q^2 + 4 m^2)."""
    return q2 / (q2 + 4 * m2)


def _longitudinal(eta: Array, xi: float) -> Array:
    root = np.sqrt(eta * (1 + eta))
    logarithm = 2 * np.arcsinh(np.sqrt(eta))
    return np.pi / 2 * TR * xi / (1 + eta + xi / 4) ** 3 * (2 * root - logarithm)


def _transverse(eta: Array, xi: float) -> Array:
    beta = np.sqrt(eta / (1 + eta))
    logarithm = 2 * np.arcsinh(np.sqrt(eta))
    total = -2 * ((1 + eta - xi / 4) ** 2 + 1 + eta) * beta
    total += (2 * (1 + eta) ** 2 + xi**2 / 8 + 1 + 2 * eta) * logarithm
    return np.pi / 2 * TR / (1 + eta + xi / 4) ** 3 * total


def massive_gluon(sf: str, z: Array, q2: float, m2: float) -> Array:
    """C of F(x) = x e_h^2 a int_x^{z_max} dz/z C(z, Q^2/m^2) g(x/z).

    The logarithm ln((sqrt(1+eta) + sqrt(eta))/(sqrt(1+eta) - sqrt(eta))) is written
    2 arsinh sqrt(eta), which keeps its digits at threshold.

    Parameters
    ----------
    sf : {"F2", "FL"}
        Structure function.
    z : ndarray
        Any shape, 0 < z < 1; zero beyond `z_max`.
    q2, m2 : float
        Q^2 and heavy-quark mass squared, GeV^2.

    Raises
    ------
    ValueError
        Unknown structure function.
    """
    if sf not in ("F2", "FL"):
        raise ValueError(f"structure function {sf!r} is neither 'F2' nor 'FL'")
    xi = q2 / m2
    # s/(4 m^2) - 1 with s = Q^2 (1-z)/z
    eta = np.maximum(xi * (1 - z) / (4 * z) - 1, 0.0)
    total = _longitudinal(eta, xi)
    if sf == "F2":
        total = total + _transverse(eta, xi)
    return np.where(eta > 0, xi / np.pi * total / z, 0.0)
