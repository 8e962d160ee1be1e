"""Coefficient functions of deep-inelastic scattering, second writing: the front door.

F2/x and FL/x are sum_q g_q C_ns+ (q + qbar) + <g> (C_ps Sigma + C_g g) with the average
<g> = sum_q g_q/nf; F3 is sum_q h_q C_ns- (q - qbar) in neutral current. "ns+" belongs to
even and "ns-" to odd moments. All at mu_r = mu_f = Q.
"""

from __future__ import annotations

from kernels.second_writing.coefficients_charm import charm_gluon, charm_quark
from kernels.second_writing.coefficients_massive import massive_gluon, z_max
from kernels.second_writing.coefficients_nlo import lo, nlo
from kernels.second_writing.coefficients_nnlo import nnlo
from kernels.second_writing.parts import Parts

STRUCTURE_FUNCTIONS = ("F2", "FL", "F3")
NAMES = ("ns+", "ns-", "pure singlet", "gluon")


def coefficient(order: int, sf: str, name: str, nf: int) -> Parts:
    """Coefficient function of a^order, order 0, 1 or 2.

    Raises
    ------
    ValueError
        Unknown structure function, name or order.
    """
    if sf not in STRUCTURE_FUNCTIONS:
        raise ValueError(f"structure function {sf!r} is none of {STRUCTURE_FUNCTIONS}")
    if name not in NAMES:
        raise ValueError(f"coefficient {name!r} is none of {NAMES}")
    if order not in (0, 1, 2):
        raise ValueError(f"order {order} is none of 0, 1, 2")
    if order == 0:
        return lo(sf, name)
    return nlo(sf, name, nf) if order == 1 else nnlo(sf, name, nf)


__all__ = [
    "NAMES",
    "STRUCTURE_FUNCTIONS",
    "charm_gluon",
    "charm_quark",
    "coefficient",
    "massive_gluon",
    "z_max",
]
