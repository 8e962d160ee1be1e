"""The measured numbers a theory takes: the strong coupling and the masses of the heavy quarks.

The defaults are those of the Particle Data Group, recalled from memory.
"""

from __future__ import annotations

from dataclasses import dataclass

from . import _check

__all__ = ["Coupling", "QuarkMasses"]


@dataclass(frozen=True)
class Coupling:
    """The strong coupling at one scale and one number of flavours.

    Parameters
    ----------
    alpha_s : float
        alpha_s(mu_r), in (0, 1].
    q2 : float
        mu_r^2 in GeV^2.
    nf : int
        Number of active flavours that this value belongs to, 3 to 6.

    Raises
    ------
    InputError
        If a value lies outside its range.

    Examples
    --------
    >>> Coupling(0.118, q2=91.1876**2, nf=5)
    Coupling(alpha_s=0.118, q2=8315.178393760001, nf=5)
    """

    alpha_s: float = 0.118
    q2: float = 91.1876**2
    nf: int = 5

    def __post_init__(self) -> None:
        set_field(self, "alpha_s", _check.real("alpha_s", self.alpha_s, above=0.0, most=1.0))
        set_field(self, "q2", _check.scale("q2", self.q2))
        set_field(self, "nf", _check.flavour_count("nf", self.nf))


@dataclass(frozen=True)
class QuarkMasses:
    """Masses of the heavy quarks.

    Parameters
    ----------
    charm, bottom, top : float
        In GeV, rising, in (0, 1e100).
    kind : {"msbar", "pole"}
        MS-bar masses m(m), or pole masses.

    Raises
    ------
    InputError
        If a mass is not positive, or the masses do not rise.

    Examples
    --------
    >>> QuarkMasses(charm=1.5, bottom=4.8, top=173, kind="pole")
    QuarkMasses(charm=1.5, bottom=4.8, top=173.0, kind='pole')
    """

    charm: float = 1.27
    bottom: float = 4.18
    top: float = 162.5
    kind: str = "msbar"

    def __post_init__(self) -> None:
        for name in ("charm", "bottom", "top"):
            # the square must be a float too
            mass = _check.real(name, getattr(self, name), above=0.0, below=1e100, unit="GeV")
            set_field(self, name, mass)
        set_field(self, "kind", _check.choice("kind", self.kind, ("msbar", "pole")))
        for lighter, heavier in (("charm", "bottom"), ("bottom", "top")):
            if not getattr(self, lighter) < getattr(self, heavier):
                allowed = f"masses must rise, and {lighter} = {_check.show(getattr(self, lighter))}"
                _check.refuse(heavier, getattr(self, heavier), allowed)

    @property
    def values(self) -> tuple[float, float, float]:
        """Charm, bottom, top in GeV."""
        return self.charm, self.bottom, self.top


def set_field(target: object, name: str, value: object) -> None:
    """Store the checked form of a field while a frozen object is made."""
    object.__setattr__(target, name, value)
