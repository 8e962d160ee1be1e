"""Coefficient functions at a^1 for z < 1 from squared matrix elements, by brute force.

Products of Dirac matrices are traced numerically and integrated over the scattering angle,
so nothing is taken from a published coefficient. Kept: current + parton(p, massless) ->
two partons, in the frame where p and the current lie along the z axis.

W^{mu nu} = (-g + q q/q^2) F1 + phat phat/(p q) F2 + i eps p q/(2 p q) F3 + terms with q, and
phat = p - q (p q)/q^2 is orthogonal to q. So F1 is half the transverse trace, F3 the
antisymmetric transverse part, and F2 follows from phat phat W. All are given divided by the
same component of the lowest order, and F2 by z besides, so that each stands in
F(x) = x int dz/z C(z) f(x/z). One power of a is g^2 = 16 pi^2 a.

A collinear pole R/v at v = (1 - cos theta)/2 -> 0 is subtracted: in 4 - 2 epsilon
dimensions phase space carries [(s - m^2)^2/(s mu^2) v (1-v)]^(-epsilon), the residue R is
R_0 + epsilon R_1, and what MS-bar leaves of the pole is R_0 ln((s - m^2)^2/(s mu^2)) - R_1
(G. Altarelli, R. Ellis, G. Martinelli (1979)); R_1/R_0 is that of the splitting functions
CF [(1+z^2)/(1-z) - epsilon (1-z)] and TR [1 - 2 z(1-z)/(1-epsilon)].
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from kernels.second_writing.parts import CF, TR

Complex = np.ndarray

_SIGMA = np.array([[[0, 1], [1, 0]], [[0, -1j], [1j, 0]], [[1, 0], [0, -1]]], dtype=complex)
_ONE = np.eye(2)
METRIC = np.diag([1.0, -1.0, -1.0, -1.0])
GAMMA = np.array([np.kron([[0, 1], [1, 0]], _ONE)] + [np.kron([[0, 1], [-1, 0]], s) for s in _SIGMA])
"""Weyl representation, upper index."""
GAMMA5 = 1j * GAMMA[0] @ GAMMA[1] @ GAMMA[2] @ GAMMA[3]
VECTOR = np.eye(4, dtype=complex)
LEFT = np.eye(4) - GAMMA5
MASSIVE_EDGES = (0.0, 1e-4, 1e-3, 1e-2, 0.1, 0.5)
"""Panels towards an end of v near which the pole of a massive propagator lies."""
MASSLESS_EDGES = (0.0, 0.1, 0.5)
"""Panels where the pole lies at the end itself and is subtracted: 1e-16/v stays small."""
NODES = 16
"""Gauss-Legendre nodes of a panel."""


def slash(momentum: np.ndarray) -> Complex:
    """p_mu gamma^mu."""
    return np.einsum("m,mab->ab", METRIC @ momentum, GAMMA)


def _dot(a: np.ndarray, b: np.ndarray) -> float:
    return float(a @ METRIC @ b)


@dataclass(frozen=True)
class Process:
    """current + parton -> quark (mass m1^2) + second (mass m2^2).

    `gluon_initiated`: the parton is a gluon and the second an antiquark; else the parton is
    a massless quark and the second a gluon. `vertex` is 1 or 1 - gamma5.
    """

    gluon_initiated: bool
    vertex: Complex
    q2: float
    m1: float
    m2: float

    def momenta(self, s: float, v: float) -> tuple[np.ndarray, ...]:
        """q, p, k1, k2 in the centre-of-mass frame; v = (1 - cos(p, k2))/2."""
        root = np.sqrt(s)
        energy = (s + self.q2) / (2 * root)
        p = np.array([energy, 0.0, 0.0, energy])
        q = np.array([root - energy, 0.0, 0.0, -energy])
        kallen = (s - self.m1 - self.m2) ** 2 - 4 * self.m1 * self.m2
        k, cos = np.sqrt(kallen) / (2 * root), 1 - 2 * v
        sin = 2 * np.sqrt(v * (1 - v))
        space = k * np.array([sin, 0.0, cos])
        k2 = np.concatenate(([(s + self.m2 - self.m1) / (2 * root)], space))
        k1 = np.concatenate(([(s + self.m1 - self.m2) / (2 * root)], -space))
        return q, p, k1, k2

    def tensor(self, s: float, v: float) -> Complex:
        """Squared matrix element without coupling and colour, averaged over spin."""
        _, p, k1, k2 = self.momenta(s, v)
        mass1, mass2 = np.sqrt(self.m1), np.sqrt(self.m2)
        current = np.einsum("mab,bc->mac", GAMMA, self.vertex)
        # quark line from `incoming` to k1, the gluon attached after or before the current
        if self.gluon_initiated:
            incoming, gluon = -k2, p
            line = slash(k2) - mass2 * VECTOR
        else:
            incoming, gluon = p, -k2
            line = slash(p)
        late, early = k1 - gluon, incoming + gluon
        after = (slash(late) + mass1 * VECTOR) / (_dot(late, late) - self.m1)
        light = mass2 if self.gluon_initiated else 0.0
        before = (slash(early) + light * VECTOR) / (_dot(early, early) - light**2)
        amplitude = np.einsum("nab,bc,mcd->mnad", GAMMA, after, current)
        amplitude = amplitude + np.einsum("mab,bc,ncd->mnad", current, before, GAMMA)
        adjoint = GAMMA[0] @ _dagger(amplitude) @ GAMMA[0]
        final = slash(k1) + mass1 * VECTOR
        square = np.einsum("mnab,rsba->mnrs", final @ amplitude @ line, adjoint)
        return -0.5 * np.einsum("mnrs,ns->mr", square, METRIC)

    def projections(self, tensor: Complex, p: np.ndarray, q: np.ndarray) -> np.ndarray:
        """F1, F2/2 and F3/2 times a common factor: 1 : 1 : 1 for a current on one quark."""
        pq = _dot(p, q)
        hat = METRIC @ (p + q * pq / self.q2)
        f1 = 0.5 * (tensor[1, 1] + tensor[2, 2]).real
        along = (hat @ tensor @ hat).real
        # phat phat W = (p q)^2/Q^2 [-F1 + (p q)/Q^2 F2]
        f2 = (along * self.q2 / pq**2 + f1) * self.q2 / pq
        f3 = 0.5 * (tensor[1, 2] - tensor[2, 1]).imag
        return np.array([f1, f2 / 2, f3])

    def lowest(self) -> np.ndarray:
        """The same for current + quark -> quark of mass m1, in the Breit frame."""
        root = np.sqrt(self.q2)
        energy = (self.q2 + self.m1) / (2 * root)
        p, q = np.array([energy, 0.0, 0.0, energy]), np.array([0.0, 0.0, 0.0, -root])
        current = np.einsum("mab,bc->mac", GAMMA, self.vertex)
        adjoint = GAMMA[0] @ _dagger(current) @ GAMMA[0]
        left = (slash(p + q) + np.sqrt(self.m1) * VECTOR) @ current @ slash(p)
        return self.projections(0.5 * np.einsum("mab,nba->mn", left, adjoint), p, q)


def _dagger(matrices: Complex) -> Complex:
    return np.conj(np.swapaxes(matrices, -1, -2))


def _half(mass: float) -> tuple[np.ndarray, np.ndarray]:
    x, w = np.polynomial.legendre.leggauss(NODES)
    edges = np.array(MASSIVE_EDGES if mass > 0 else MASSLESS_EDGES)
    half = np.diff(edges)[:, None] / 2
    return (edges[:-1, None] + half * (1 + x)).ravel(), (half * w).ravel()


def _angles(process: Process) -> tuple[np.ndarray, np.ndarray]:
    (low, below), (high, above) = _half(process.m2), _half(process.m1)
    return np.concatenate((low, 1 - high)), np.concatenate((below, above))


def residue(process: Process, z: float) -> tuple[float, float]:
    """R_0 and R_1 of the pole at v = 0: twice the unregularised splitting functions."""
    if process.gluon_initiated:
        return 2 * TR * (z**2 + (1 - z) ** 2), -4 * TR * z * (1 - z)
    return 2 * CF * (1 + z**2) / (1 - z), -2 * CF * (1 - z)


def integrand(process: Process, z: float, v: np.ndarray) -> np.ndarray:
    """F1, F2/(2 xi), F3/2 for each v (rows), in units of the lowest order.

    z = (Q^2 + M^2)/(2 p.q), M = m1 for one massive quark and 0 for a massive pair.
    """
    # the lowest order of a pair is current + massless quark
    heavy = 0.0 if process.m2 > 0 else process.m1
    base = Process(process.gluon_initiated, process.vertex, process.q2, heavy, 0.0)
    s = (process.q2 + heavy) / z - process.q2
    kallen = np.sqrt((s - process.m1 - process.m2) ** 2 - 4 * process.m1 * process.m2)
    q, p, _, _ = process.momenta(s, 0.5)
    values = np.array([process.projections(process.tensor(s, t), p, q) for t in v])
    # (1/4 pi) 16 pi^2 a |M|^2 kallen/(8 pi s) dv over (1/4 pi) 2 pi delta(s - M^2) |M_0|^2
    factor = (TR if process.gluon_initiated else CF) * kallen / s * (process.q2 + heavy)
    unit = base.lowest()
    unit[1] *= z
    parity = np.abs(unit) > 1e-9 * abs(unit[0])
    return np.divide(factor * values, unit, out=np.zeros_like(values), where=parity)


def coefficients(process: Process, z: float, mu2: float) -> np.ndarray:
    """F1, F2/(2 xi), F3/2 at z < 1, MS-bar at mu_f^2 = mu2, in units of the lowest order.

    A massless second parton is collinear to the first at v = 0; a massless first quark from
    a gluon also at v = 1, where the current meets an antiquark and F3 changes sign.
    """
    v, weight = _angles(process)
    values = integrand(process, z, v)
    r0, r1 = residue(process, z)
    heavy = 0.0 if process.m2 > 0 else process.m1
    s = (process.q2 + heavy) / z - process.q2
    finite = r0 * np.log((s - process.m1) ** 2 / (s * mu2)) - r1
    total = weight @ values
    if process.m2 == 0:
        total += finite - weight @ (r0 / v)
    if process.m1 == 0 and process.gluon_initiated:
        total += (finite - weight @ (r0 / (1 - v))) * np.array([1.0, 1.0, -1.0])
    return np.asarray(total)
