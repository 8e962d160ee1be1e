"""Exact non-singlet anomalous dimensions in harmonic sums, for integer N.

E. Floratos, D. Ross, C. Sachrajda, Nucl. Phys. B129 (1977) 66 and B152 (1979) 493,
A. Gonzalez-Arroyo, C. Lopez, F. Yndurain, Nucl. Phys. B153 (1979) 161; recalled from
memory. Positive sign for even N, negative for odd N, where the sums need no continuation.
"""

from __future__ import annotations

from kernels.second_writing.parts import CA, CF, TR


def harmonic_sum(k: int, n: int) -> float:
    """S_k(n)."""
    return sum(1.0 / j**k for j in range(1, n + 1))


def _planar_free(n: int, sign: int) -> float:
    """Coefficient of CF^2 - CF CA/2."""
    q = n * (n + 1)
    s1, s2 = harmonic_sum(1, n), harmonic_sum(2, n)
    half = n // 2
    alternating = sum((-1) ** j * harmonic_sum(1, j) / j**2 for j in range(1, n + 1))
    total = 16 * s1 * (2 * n + 1) / q**2
    total += 16 * (2 * s1 - 1 / q) * (s2 - harmonic_sum(2, half))
    total += 64 * alternating + 24 * s2 - 3 - 8 * harmonic_sum(3, half)
    total -= 8 * (3 * n**3 + n**2 - 1) / q**3
    return total - sign * 16 * (2 * n**2 + 2 * n + 1) / q**3


def _planar(n: int) -> float:
    """Coefficient of CF CA."""
    q = n * (n + 1)
    s1, s2 = harmonic_sum(1, n), harmonic_sum(2, n)
    total = s1 * (536 / 9 + 8 * (2 * n + 1) / q**2) - 16 * s1 * s2
    total += s2 * (-52 / 3 + 8 / q) - 43 / 6
    return total - 4 * (151 * n**4 + 263 * n**3 + 97 * n**2 + 3 * n + 9) / (9 * q**3)


def _light(n: int) -> float:
    """Coefficient of CF TR nf."""
    s1, s2 = harmonic_sum(1, n), harmonic_sum(2, n)
    tail = 16 * (11 * n**2 + 5 * n - 3) / (9 * (n * (n + 1)) ** 2)
    return -160 / 9 * s1 + 32 / 3 * s2 + 4 / 3 + tail


def non_singlet_lo(n: int) -> float:
    """Int z^(n-1) P_ns^(0), a-normalised."""
    return CF * (3 + 2 / (n * (n + 1)) - 4 * harmonic_sum(1, n))


def non_singlet_nlo(n: int, nf: int) -> float:
    """Int z^(n-1) P_ns^(1), + for even n and - for odd n, a-normalised."""
    sign = 1 if n % 2 == 0 else -1
    gamma = (CF**2 - CF * CA / 2) * _planar_free(n, sign) + CF * CA * _planar(n)
    return -(gamma + CF * TR * nf * _light(n)) / 2
