"""Splitting functions and threshold matching, point by point; and kernels of one's own.

A kernel K(z) has three parts, K = regular + sum_k plus[k] [ln^k(1-z)/(1-z)]_+ + local delta(1-z), where the
plus distribution refers to the whole of [0, 1]. Splitting functions are coefficients of a^(k+1),
a = alpha_s/(4 pi), in d f/d ln mu^2; matching elements of a^1 and a^2 in f^(nf+1) = (1 + ...) f^(nf).

=============== ==============================================================
channel         what goes into what
=============== ==============================================================
"ns+"           differences of q + qbar
"ns-"           differences of q - qbar
"ns-sea"        what the valence has beyond "ns-"; begins at NNLO
"pure singlet"  what the singlet has beyond "ns+", of all flavours
"qg"            singlet from the gluon, the sum over 2 nf quarks included
"gq", "gg"      gluon from the singlet; from the gluon
=============== ==============================================================
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._check import Floats

__all__ = [
    "CoefficientFunction",
    "KernelValues",
    "SplittingKernel",
    "matching_element",
    "splitting_function",
]

CHANNELS = ("ns+", "ns-", "ns-sea", "pure singlet", "qg", "gq", "gg")

#: Matching across the threshold of a heavy quark; the heavy density is h + hbar.
ELEMENTS = (
    "heavy<-gluon",
    "heavy<-quark",
    "gluon<-gluon",
    "gluon<-quark",
    "quark<-quark",
    "heavy<-heavy",
    "gluon<-heavy",
)

_ORDERS = ("LO", "NLO", "NNLO")


class KernelValues(NamedTuple):
    """The three parts of a kernel.

    Attributes
    ----------
    regular : ndarray
        The ordinary function, with the shape of z.
    plus : ndarray, (power,)
        Coefficient k multiplies [ln^k(1-z)/(1-z)]_+.
    local : float
        Coefficient of delta(1-z).
    """

    regular: Floats
    plus: Floats
    local: float


def splitting_function(
    channel: str, z: ArrayLike, *, order: str, nf: int, one_minus_z: ArrayLike | None = None
) -> KernelValues:
    """Return the coefficient of a^(k+1) of a splitting function, k = 0, 1, 2 for LO, NLO, NNLO.

    Parameters
    ----------
    channel : str
        As in the table at the head of this module.
    z : array_like
        In (0, 1), any shape.
    order : {"LO", "NLO", "NNLO"}
        That coefficient alone, not the sum up to it.
    nf : int
        Number of active flavours, 3 to 6.
    one_minus_z : array_like, optional
        1 - z, where `z` is so near 1 that the difference loses digits.

    Returns
    -------
    KernelValues

    Raises
    ------
    InputError
        If an argument is unknown or outside its range.

    Examples
    --------
    The quark from a quark at LO, 2 CF [(1+z^2)/(1-z)]_+, CF = 4/3:

    >>> parts = splitting_function("ns+", 0.5, order="LO", nf=4)
    >>> round(float(parts.regular + parts.plus[0] / (1 - 0.5)), 12) == round(8 / 3 * 1.25 / 0.5, 12)
    True
    """
    channel = _check.choice("channel", channel, CHANNELS)
    k = _ORDERS.index(_check.choice("order", order, _ORDERS))
    nf = _check.flavour_count("nf", nf)
    points, rest = _points(z, one_minus_z)
    from . import _core

    regular, plus, local = _core.splitting_function(k, channel, nf, np.ravel(points), np.ravel(rest))
    return KernelValues(regular.reshape(points.shape), plus, float(local))


def matching_element(
    element: str,
    z: ArrayLike,
    *,
    order: str,
    power_of_log: int = 0,
    kind: str = "msbar",
    heavy_gluon_element: str = "exact",
    one_minus_z: ArrayLike | None = None,
) -> KernelValues:
    """Return a coefficient of the matching of densities across a heavy-quark threshold.

    Parameters
    ----------
    element : {"heavy<-gluon", "heavy<-quark", "gluon<-gluon", "gluon<-quark", "quark<-quark",
               "heavy<-heavy", "gluon<-heavy"}
        The target comes first; "heavy" is h + hbar, "quark" as a source the light singlet. Diagonal elements
        are what they have beyond unity.
    z : array_like
        In (0, 1), any shape.
    order : {"NLO", "NNLO"}
        Coefficient of a^1 or a^2, a taken with nf + 1 flavours.
    power_of_log : {0, 1, 2}
        Of L = ln(mu^2/m^2).
    kind : {"msbar", "pole"}
        The mass in L: m(m), or the pole mass.
    heavy_gluon_element : {"exact", "compact"}
        Form of "heavy<-gluon" at a^2.
    one_minus_z : array_like, optional
        1 - z, where `z` is so near 1 that the difference loses digits.

    Returns
    -------
    KernelValues

    Raises
    ------
    InputError
        If an argument is unknown or outside its range.

    Notes
    -----
    M. Buza et al., hep-ph/9612398; compact form: A. Vogt, hep-ph/0408244. For an intrinsic heavy density
    there is nothing at a^2.
    """
    element = _check.choice("element", element, ELEMENTS)
    power = _ORDERS.index(_check.choice("order", order, _ORDERS[1:]))
    logarithm = _check.whole("power_of_log", power_of_log, least=0, most=2)
    pole = _check.choice("kind", kind, ("msbar", "pole")) == "pole"
    form = _check.choice("heavy_gluon_element", heavy_gluon_element, ("exact", "compact"))
    points, rest = _points(z, one_minus_z)
    from . import _core

    regular, plus, local = _core.matching_element(
        power, element, logarithm, pole, form == "compact", np.ravel(points), np.ravel(rest)
    )
    return KernelValues(regular.reshape(points.shape), plus, float(local))


def _points(z: ArrayLike, one_minus_z: ArrayLike | None) -> tuple[Floats, Floats]:
    """Return z and 1 - z, both in (0, 1)."""
    points = _check.real_array("z", z)
    rest = 1.0 - points
    if one_minus_z is not None:
        rest = _check.real_array("one_minus_z", one_minus_z, shape=points.shape)
        wrong = abs(points + rest - 1.0) > 4e-16
        _check.refuse_where("one_minus_z", rest, wrong, "z and one_minus_z must add up to 1")
        _check.refuse_where("one_minus_z", rest, rest <= 0.0, "one_minus_z must lie in (0, 1)")
        _check.refuse_where("z", points, (points <= 0.0) | (points > 1.0), "z must lie in (0, 1]")
    else:
        _check.refuse_where("z", points, (points <= 0.0) | (points >= 1.0), "z must lie in (0, 1)")
    return points, rest


@dataclass(frozen=True)
class _Kernel:
    """A function of z and nf in three parts, of one's own."""

    regular: Callable[[Floats, int], ArrayLike]
    plus: ArrayLike | Callable[[int], ArrayLike] = ()
    local: float | Callable[[int], float] = 0.0

    def __post_init__(self) -> None:
        _check.function("regular", self.regular)
        if not callable(self.plus):
            object.__setattr__(self, "plus", tuple(_coefficients("plus", self.plus).tolist()))
        if not callable(self.local):
            object.__setattr__(self, "local", _check.real("local", self.local))

    def evaluate(self, z: ArrayLike, nf: int) -> KernelValues:
        """Return the three parts at z for a number of flavours.

        Parameters
        ----------
        z : array_like, (n,)
            In (0, 1).
        nf : int
            Number of active flavours, 3 to 6.

        Returns
        -------
        KernelValues

        Raises
        ------
        InputError
            If a callable raises, or returns another shape or values that are not finite.
        """
        nf = _check.flavour_count("nf", nf)
        points = _check.real_array("z", z, ndim=1)
        regular = _check.called("regular", self.regular, points.copy(), nf, shape=points.shape)
        plus, local = self.plus, self.local
        if callable(plus):
            plus = _check.raised("plus", plus, nf)
        if callable(local):
            local = _check.raised("local", local, nf)
        return KernelValues(regular, _coefficients("plus", plus), _check.real("local", local))


@dataclass(frozen=True)
class SplittingKernel(_Kernel):
    """A splitting function of one's own: one channel of one further order.

    Parameters
    ----------
    regular : callable
        ``regular(z, nf)`` with an array z (n,) in (0, 1) and a number of flavours; returns (n,), or one
        number for all. Coefficient of a^(k+1), a = alpha_s/(4 pi).
    plus : sequence of float, or callable of nf
        Coefficient k multiplies [ln^k(1-z)/(1-z)]_+.
    local : float, or callable of nf
        Coefficient of delta(1-z).

    Raises
    ------
    InputError
        If `regular` cannot be called, or `plus` or `local` are neither finite numbers nor callables.

    Examples
    --------
    >>> kernel = SplittingKernel(lambda z, nf: nf * z, plus=(4.0,), local=lambda nf: 0.5 * nf)
    >>> regular, plus, local = kernel.evaluate([0.25, 0.5], 4)
    >>> regular.tolist(), plus.tolist(), local
    ([1.0, 2.0], [4.0], 2.0)
    """


@dataclass(frozen=True)
class CoefficientFunction(_Kernel):
    """A coefficient function of one's own: one part of F2, FL or xF3 at one further order.

    Parameters
    ----------
    regular : callable
        ``regular(z, nf)`` with an array z (n,) in (0, 1) and a number of flavours; returns (n,), or one
        number for all. Coefficient of a^k at mu_r = mu_f = Q, a = alpha_s/(4 pi); what multiplies x f(x) in
        F2, FL and xF3. "pure singlet" and "gluon" have the mean squared charge taken out and nf in.
    plus : sequence of float, or callable of nf
        Coefficient k multiplies [ln^k(1-z)/(1-z)]_+.
    local : float, or callable of nf
        Coefficient of delta(1-z).

    Raises
    ------
    InputError
        If `regular` cannot be called, or `plus` or `local` are neither finite numbers nor callables.

    Examples
    --------
    The gluon in FL at order a, 16 nf TR z (1 - z), TR = 1/2:

    >>> gluon = CoefficientFunction(lambda z, nf: 8 * nf * z * (1 - z))
    >>> gluon.evaluate([0.5], 3).regular.tolist()
    [6.0]
    """


def _coefficients(name: str, value: object) -> Floats:
    """Return coefficients as an array, (power,); there may be none."""
    return _check.real_array(name, value, ndim=1)
