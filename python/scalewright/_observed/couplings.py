"""Couplings of the quarks to the exchanged boson, for each point, as weights of q + qbar and q - qbar.

A structure function is F2 = sum_q (even_q C+ (q + qbar) + odd_q C- (q - qbar)) + singlet parts with the
mean of `even` over the active quarks, in x times densities; xF3 likewise with weights of its own. Neutral
currents: S. Navas et al. (Particle Data Group), review "Structure functions", recalled from memory; the
signs are derived again in the tests from helicity amplitudes. Charged currents: F2(W-) = 2x sum |V|^2 (U
+ Dbar), xF3(W-) = 2x sum |V|^2 (U - Dbar); W+ is absorbed by D and Ubar.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .._check import Floats
from ..electroweak import Electroweak
from .points import Points

__all__ = ["CHARGES", "Weights", "charged", "neutral", "propagator_w"]

#: Electric charges and weak isospin of d, u, s, c, b, t (PDG order 1 to 6).
CHARGES = np.array([-1.0, 2.0, -1.0, 2.0, -1.0, 2.0]) / 3.0
ISOSPIN = np.array([-0.5, 0.5, -0.5, 0.5, -0.5, 0.5])
#: The electron's.
LEPTON_CHARGE, LEPTON_ISOSPIN = -1.0, -0.5
#: PDG numbers of the tags.
TAGS = {"charm": 4, "bottom": 5}
#: Bosons with W- for the incoming lepton e- and nubar.
NEGATIVE = ("e-", "nubar")


@dataclass(frozen=True)
class Weights:
    """Weights of the six quarks at points, each (point, quark) with quarks in PDG order.

    Parameters
    ----------
    even, odd : ndarray
        Of q + qbar and of q - qbar in F2 and FL.
    even3, odd3 : ndarray
        The same in xF3.
    """

    even: Floats
    odd: Floats
    even3: Floats
    odd3: Floats

    def active(self, nf: int) -> Weights:
        """Return the same with quarks above `nf` left out."""
        keep = np.arange(1, 7) <= nf
        return Weights(self.even * keep, self.odd * keep, self.even3 * keep, self.odd3 * keep)

    def plus(self, other: Weights, factor: float = 1.0) -> Weights:
        """Return the sum with `factor` times other weights."""
        return Weights(
            self.even + factor * other.even,
            self.odd + factor * other.odd,
            self.even3 + factor * other.even3,
            self.odd3 + factor * other.odd3,
        )


def neutral(points: Points, electroweak: Electroweak) -> Weights:
    """Return the weights for neutral currents, zero at other points.

    Parameters
    ----------
    points : Points
        With beam, polarisation and Q^2.
    electroweak : Electroweak

    Returns
    -------
    Weights
        Of all six quarks, tags obeyed.

    Notes
    -----
    F2 = F2(photon) - (gV +- P gA) eta F2(photon-Z) + (gV^2 + gA^2 +- 2 P gV gA) eta^2 F2(Z),
    xF3 = -(gA +- P gV) eta xF3(photon-Z) + (2 gV gA +- P (gV^2 + gA^2)) eta^2 xF3(Z), upper sign e+, with
    eta = Q^2/(Q^2 + M_Z^2)/(4 s2 (1 - s2)).
    """
    sin2, z_mass = electroweak.sin2, electroweak.z_mass
    eta = electroweak.interference * points.q2 / (points.q2 + z_mass**2)
    eta = np.where(points.is_photon, 0.0, eta)
    spin = points.sign * points.polarisation
    v, a = LEPTON_ISOSPIN - 2.0 * LEPTON_CHARGE * sin2, LEPTON_ISOSPIN
    vq, aq = ISOSPIN - 2.0 * CHARGES * sin2, ISOSPIN
    mixed, pure = (-(v + spin * a) * eta)[:, None], ((v * v + a * a + 2.0 * spin * v * a) * eta**2)[:, None]
    even = CHARGES**2 + mixed * 2.0 * CHARGES * vq + pure * (vq**2 + aq**2)
    mixed3 = (-(a + spin * v) * eta)[:, None]
    pure3 = ((2.0 * v * a + spin * (v * v + a * a)) * eta**2)[:, None]
    odd3 = mixed3 * 2.0 * CHARGES * aq + pure3 * 2.0 * vq * aq
    keep = points.is_neutral[:, None] * _tagged(points)
    nothing = np.zeros_like(even)
    return Weights(even * keep, nothing, nothing, odd3 * keep)


def charged(points: Points, electroweak: Electroweak, nf: int, without: int | None = None) -> Weights:
    """Return the weights for charged currents between the quarks up to `nf`, zero at other points.

    Parameters
    ----------
    points : Points
        With beam and tag.
    electroweak : Electroweak
        With the mixing matrix.
    nf : int
        A pair counts where both quarks are active.
    without : int, optional
        PDG number of a quark whose pairs are left out, at points where no other quark is tagged.

    Returns
    -------
    Weights
    """
    weights = [np.zeros((len(points), 6)) for _ in range(4)]
    tags = [None, *TAGS]
    for tag in tags:
        number = None if tag is None else TAGS[tag]
        pairs = mixing_pairs(electroweak, nf, number)
        if without is not None and number in (None, without):
            pairs = pairs - mixing_pairs(electroweak, nf, without)
        up, down = pairs.sum(axis=1), pairs.sum(axis=0)
        for negative in (True, False):
            chosen = points.is_charged & (points.tag == (number or 0))
            chosen &= points.is_negative == negative
            # quark weights and antiquark weights in F2; in xF3 the latter change sign
            quark, anti = np.zeros(6), np.zeros(6)
            (quark if negative else anti)[1::2] = 2.0 * up
            (anti if negative else quark)[0::2] = 2.0 * down
            parts = (quark + anti, quark - anti, quark - anti, quark + anti)
            for array, part in zip(weights, parts, strict=True):
                array[chosen] = 0.5 * part
    return Weights(*weights)


def mixing_pairs(electroweak: Electroweak, nf: int, tag: int | None) -> Floats:
    """Return |V|^2, (3, 3), of the pairs of active quarks, of which one is the tagged one."""
    ups, downs = np.arange(2, 7, 2), np.arange(1, 6, 2)
    keep = (ups <= nf)[:, None] & (downs <= nf)[None, :]
    if tag is not None:
        keep &= (ups == tag)[:, None] | (downs == tag)[None, :]
    return np.asarray(electroweak.mixing2 * keep)


def propagator_w(q2: Floats, electroweak: Electroweak) -> Floats:
    """Return (M_W^2/(Q^2 + M_W^2))^2."""
    w2 = electroweak.w_mass**2
    return (w2 / (q2 + w2)) ** 2


def _tagged(points: Points) -> Floats:
    """Return 1 where a quark counts, (point, quark): all of them, or the tagged one."""
    quarks = np.arange(1, 7)
    return np.asarray((points.tag[:, None] == 0) | (points.tag[:, None] == quarks), dtype=float)
