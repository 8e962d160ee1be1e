"""Electroweak inputs: exactly one of three named sets, never mixed, and the quark mixing matrix.

Which one when: `effective` takes the weak mixing angle as measured at the Z, so that the vector couplings are
right to a few parts in a thousand without loops, and is the default; `on_shell` takes (G_F, M_Z, M_W);
`running` takes (G_F, M_Z, alpha(M_Z)). All are Born level. In each set one s2 = sin^2 theta enters all vector
couplings, and photon-Z interference has the strength 1/(4 s2 (1 - s2)), which is G_F M_Z^2/(2 sqrt2 pi alpha)
with the alpha of that set where G_F is one of its inputs. Using G_F beside another alpha would move it by
6 per cent.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._check import Floats

__all__ = ["Electroweak"]

#: Particle Data Group, recalled from memory: 1/alpha(0) and G_F in GeV^-2; masses in GeV; the effective
#: leptonic angle (LEP and SLD, hep-ex/0509008); 1/alpha(M_Z) with five flavours, on shell.
ALPHA_0 = 1.0 / 137.035999
G_FERMI = 1.1663788e-5
Z_MASS = 91.1876
W_MASS = 80.3692
SIN2_EFFECTIVE = 0.23153
ALPHA_Z = 1.0 / 128.93

#: Moduli |V| by rows u, c, t and columns d, s, b: Particle Data Group, global fit, recalled from memory.
MIXING = (
    (0.97435, 0.22501, 0.003732),
    (0.22487, 0.97349, 0.04183),
    (0.00858, 0.04111, 0.999118),
)
#: Where the inputs may lie, in GeV^-2 and GeV: wide, but no other unit (common practice, no source).
_LIMITS = {"g_fermi": (1e-6, 1e-4), "z_mass": (10.0, 1000.0), "w_mass": (10.0, 1000.0)}
#: The rows of a unitary matrix have length 1; printed and measured entries miss it by no more than this
#: (common practice, no source).
_UNITARY = 0.01


@dataclass(frozen=True)
class Electroweak:
    """Electroweak inputs at Born level; made by `effective`, `on_shell` or `running`.

    Parameters
    ----------
    inputs : {"effective", "on shell", "running"}
        Which set it is.
    alpha : float
        The fine-structure constant in the prefactor of neutral currents.
    g_fermi : float
        The Fermi constant in GeV^-2, in the prefactor of charged currents.
    z_mass, w_mass : float
        In GeV, in the propagators.
    sin2 : float
        sin^2 theta in the vector couplings of all fermions.
    mixing : 3 x 3 tuple
        Moduli |V| of the quark mixing matrix: rows u, c, t, columns d, s, b.

    Raises
    ------
    InputError
        If a number lies outside its range, or a row of `mixing` is longer than 1 by over 1 per cent.

    Examples
    --------
    >>> default = Electroweak.effective()
    >>> round(default.interference, 4)
    1.4051
    >>> on_shell = Electroweak.on_shell()
    >>> round(on_shell.sin2, 4), round(1 / on_shell.alpha, 2)
    (0.2232, 132.1)
    """

    inputs: str
    alpha: float
    g_fermi: float
    z_mass: float
    w_mass: float
    sin2: float
    mixing: tuple[tuple[float, float, float], ...] = MIXING

    def __post_init__(self) -> None:
        _check.choice("inputs", self.inputs, ("effective", "on shell", "running"))
        object.__setattr__(self, "alpha", _check.real("alpha", self.alpha, above=0.0, most=1.0))
        for name in _LIMITS:
            object.__setattr__(self, name, _limited(name, getattr(self, name)))
        object.__setattr__(self, "sin2", _check.real("sin2", self.sin2, above=0.0, below=1.0))
        moduli = _check.real_array("mixing", self.mixing, shape=(3, 3))
        _check.refuse_where("mixing", moduli, (moduli < 0.0) | (moduli > 1.0), "|V| must lie in [0, 1]")
        length = (moduli**2).sum(axis=1)
        _check.refuse_where("sum of |V|^2 in a row", length, length > 1.0 + _UNITARY, "must not exceed 1")
        object.__setattr__(self, "mixing", tuple(tuple(row) for row in moduli.tolist()))

    @classmethod
    def effective(
        cls,
        *,
        z_mass: float = Z_MASS,
        sin2: float = SIN2_EFFECTIVE,
        alpha: float = ALPHA_0,
        w_mass: float = W_MASS,
        g_fermi: float = G_FERMI,
        mixing: ArrayLike = MIXING,
    ) -> Electroweak:
        """Return the set (M_Z, sin^2 theta_eff).

        Parameters
        ----------
        z_mass, sin2 : float
            The set itself: M_Z in GeV and the effective angle.
        alpha : float
            In the prefactor of neutral currents: alpha(0), Born level without vacuum polarisation.
        w_mass, g_fermi : float
            In charged currents alone, which share no row with neutral ones.
        mixing : array_like, (3, 3)
            Moduli |V|: rows u, c, t, columns d, s, b.

        Returns
        -------
        Electroweak

        Raises
        ------
        InputError
            If a number lies outside its range.
        """
        return cls("effective", alpha, g_fermi, z_mass, w_mass, sin2, _tuples(mixing))

    @classmethod
    def on_shell(
        cls,
        *,
        g_fermi: float = G_FERMI,
        z_mass: float = Z_MASS,
        w_mass: float = W_MASS,
        mixing: ArrayLike = MIXING,
    ) -> Electroweak:
        """Return the set (G_F, M_Z, M_W): s2 = 1 - M_W^2/M_Z^2, alpha = sqrt2 G_F M_W^2 s2/pi.

        Parameters
        ----------
        g_fermi, z_mass, w_mass : float
            In GeV^-2 and GeV; M_W below M_Z.
        mixing : array_like, (3, 3)
            Moduli |V|: rows u, c, t, columns d, s, b.

        Returns
        -------
        Electroweak

        Raises
        ------
        InputError
            If a number lies outside its range.
        """
        g_fermi, z_mass = _limited("g_fermi", g_fermi), _limited("z_mass", z_mass)
        w_mass = _check.real("w_mass", w_mass, least=_LIMITS["w_mass"][0], below=z_mass)
        sin2 = 1.0 - (w_mass / z_mass) ** 2
        alpha = np.sqrt(2.0) * g_fermi * w_mass**2 * sin2 / np.pi
        return cls("on shell", float(alpha), g_fermi, z_mass, w_mass, sin2, _tuples(mixing))

    @classmethod
    def running(
        cls,
        *,
        g_fermi: float = G_FERMI,
        z_mass: float = Z_MASS,
        alpha: float = ALPHA_Z,
        mixing: ArrayLike = MIXING,
    ) -> Electroweak:
        """Return the set (G_F, M_Z, alpha(M_Z)).

        s2 (1 - s2) = pi alpha/(sqrt2 G_F M_Z^2) and M_W^2 = M_Z^2 (1 - s2).

        Parameters
        ----------
        g_fermi, z_mass : float
            In GeV^-2 and GeV.
        alpha : float
            alpha(M_Z).
        mixing : array_like, (3, 3)
            Moduli |V|: rows u, c, t, columns d, s, b.

        Returns
        -------
        Electroweak

        Raises
        ------
        InputError
            If a number lies outside its range.
        """
        g_fermi, z_mass = _limited("g_fermi", g_fermi), _limited("z_mass", z_mass)
        alpha = _check.real("alpha", alpha, above=0.0, most=1.0)
        product = np.pi * alpha / (np.sqrt(2.0) * g_fermi * z_mass**2)
        if not 0.0 < product < 0.25:
            _check.refuse("pi alpha/(sqrt2 g_fermi z_mass^2)", product, "must lie in (0, 0.25)")
        sin2 = float(0.5 * (1.0 - np.sqrt(1.0 - 4.0 * product)))
        w_mass = float(z_mass * np.sqrt(1.0 - sin2))
        return cls("running", alpha, g_fermi, z_mass, w_mass, sin2, _tuples(mixing))

    @property
    def interference(self) -> float:
        """Strength of photon-Z interference, 1/(4 s2 (1 - s2)); of pure Z its square."""
        return 1.0 / (4.0 * self.sin2 * (1.0 - self.sin2))

    @cached_property
    def mixing2(self) -> Floats:
        """|V|^2, (3, 3), rows u, c, t, columns d, s, b, read-only."""
        squares: Floats = np.asarray(self.mixing) ** 2
        squares.flags.writeable = False
        return squares

    def describe(self) -> str:
        """Return the numbers in force, in words."""
        return (
            f"electroweak inputs: {self.inputs}; sin^2 theta = {self.sin2:.6g}, "
            f"1/alpha = {1.0 / self.alpha:.7g}, G_F = {self.g_fermi:.8g} GeV^-2, "
            f"M_Z = {self.z_mass:.7g} GeV, M_W = {self.w_mass:.7g} GeV; Born level"
        )


def _limited(name: str, value: object) -> float:
    """Return an input within its limits."""
    least, most = _LIMITS[name]
    return _check.real(name, value, least=least, most=most)


def _tuples(mixing: ArrayLike) -> tuple[tuple[float, float, float], ...]:
    """Return a matrix as nested tuples, which can be hashed."""
    array = _check.real_array("mixing", mixing, shape=(3, 3))
    return tuple((float(row[0]), float(row[1]), float(row[2])) for row in array)
