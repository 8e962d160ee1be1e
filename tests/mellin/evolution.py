"""Evolution at fixed nf and fixed N: dE/d ln a = -(sum_k a^k P_k)/(sum_k a^k beta_k) E."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]

NON_SINGLET_NODES = 24
STAGES = 6
STEP = 0.12
"""Largest step in ln a: order 12 in a step this small is at rounding (`test_evolution`)."""


def rescaled(kernels: Sequence[Complex], log_kappa: float, beta: Sequence[float]) -> list[Complex]:
    """Re-expand kernels for the coupling at mu_r^2 = kappa mu_f^2.

    a(mu_f^2) = a + beta0 l a^2 + (beta0^2 l^2 + beta1 l) a^3, l = ln kappa, a = a(mu_r^2).
    """
    p, step = list(kernels), beta[0] * log_kappa
    result = p[:1]
    if len(p) > 1:
        result.append(p[1] + step * p[0])
    if len(p) > 2:
        result.append(p[2] + 2 * step * p[1] + (step**2 + beta[1] * log_kappa) * p[0])
    return result


def _generator(kernels: Sequence[Complex], beta: Sequence[float], a: float) -> Complex:
    upper = sum(a**k * p for k, p in enumerate(kernels))
    return -upper / sum(a**k * b for k, b in enumerate(beta))


def non_singlet(kernels: Sequence[Complex], beta: Sequence[float], a_from: float, a_to: float) -> Complex:
    """Return the factor E, shape (n,): the exponential of an integral over ln a."""
    x, w = np.polynomial.legendre.leggauss(NON_SINGLET_NODES)
    middle, half = (np.log(a_to * a_from)) / 2, np.log(a_to / a_from) / 2
    total = sum(
        weight * _generator(kernels, beta, float(np.exp(middle + half * node)))
        for node, weight in zip(x, w, strict=True)
    )
    return np.exp(half * total)


def _collocation(stages: int) -> tuple[Real, Real, Real]:
    """Gauss-Legendre collocation on [0, 1]: nodes, matrix and weights (J. Butcher, 1964)."""
    x, w = np.polynomial.legendre.leggauss(stages)
    nodes = (x + 1) / 2
    degrees = np.arange(stages)
    powers = nodes[:, None] ** degrees
    integrals = nodes[:, None] ** (degrees + 1) / (degrees + 1)
    return nodes, np.linalg.solve(powers.T, integrals.T).T, w / 2


def singlet(
    kernels: Sequence[Complex],
    beta: Sequence[float],
    a_from: float,
    a_to: float,
    start: Complex,
    step: float = STEP,
) -> Complex:
    """Evolve (Sigma, g), shape (n, 2), with kernels of shape (n, 2, 2)."""
    nodes, matrix, weights = _collocation(STAGES)
    length = np.log(a_to / a_from)
    steps = max(1, int(np.ceil(abs(length) / step)))
    h, state = length / steps, start
    n, size = len(start), 2 * STAGES
    for i in range(steps):
        a = a_from * np.exp(h * (i + nodes))
        generators = np.stack([_generator(kernels, beta, float(v)) for v in a], axis=1)
        coupled = np.einsum("ij,nipq->nipjq", matrix, generators).reshape(n, size, size)
        right = np.einsum("nipq,nq->nip", generators, state).reshape(n, size, 1)
        slopes = np.linalg.solve(np.eye(size) - h * coupled, right).reshape(n, STAGES, 2)
        state = state + h * np.einsum("i,nip->np", weights, slopes)
    return state
