"""The compiled module as the type checker sees it; held to the binary by mypy's stubtest.

Everything crosses as scalars, strings, C-ordered float64 and int64 arrays, and frozen handles. Shapes and
finiteness are checked in `_check` first and again by the core, which raises the classes of `errors` itself.
"""

from collections.abc import Callable, Sequence
from typing import final

import numpy as np
from numpy.typing import NDArray

__all__ = [
    "Evolution",
    "Grid",
    "Theory",
    "apply",
    "build",
    "coefficient_function",
    "coefficient_matrix",
    "compose",
    "convolution_matrix",
    "evolve",
    "light_rows",
    "massive_coefficient",
    "massive_rows",
    "matching_element",
    "splitting_function",
    "splitting_matrix",
]

@final
class Grid:
    # Nodes by growing u = ln(1/x): x falls from near 1 to x_min. The node x = 1 is not held: F(1) = 0.
    def __new__(cls, edges: NDArray[np.float64], degrees: NDArray[np.int64]) -> Grid: ...
    @staticmethod
    def preset(x_min: float, resolution: str) -> Grid: ...
    @property
    def edges(self) -> NDArray[np.float64]: ...
    @property
    def degrees(self) -> NDArray[np.int64]: ...
    @property
    def u(self) -> NDArray[np.float64]: ...
    @property
    def x(self) -> NDArray[np.float64]: ...
    # (len(x), nodes): F(x) = cardinals @ values
    def cardinals(self, x: NDArray[np.float64]) -> NDArray[np.float64]: ...
    # (nodes,): sum w F = int_{x_min}^1 x^power F(x) dx/x
    def moment_weights(self, power: float) -> NDArray[np.float64]: ...
    # (rows, nodes) -> (rows, panels): estimated absolute error
    def tails(self, values: NDArray[np.float64]) -> NDArray[np.float64]: ...
    # (points,): z at which the convolution evaluates kernels
    def quadrature_z(self) -> NDArray[np.float64]: ...

@final
class Theory:
    # order 0, 1, 2; masses (3,) in GeV; thresholds_q2 (3,) = mu_thr^2 of charm, bottom, top
    def __new__(
        cls,
        *,
        order: int,
        alpha_s: float,
        alpha_s_q2: float,
        alpha_s_nf: int,
        masses: NDArray[np.float64],
        pole: bool,
        thresholds_q2: NDArray[np.float64],
        fewest: int,
        most: int,
        evolution_mu2_ratio: float,
        running_loops: int,
        compact: bool,
    ) -> Theory: ...
    # at mu_r^2, for the nf given, elementwise
    def alpha_s(self, mu2: NDArray[np.float64], nf: NDArray[np.int64]) -> NDArray[np.float64]: ...
    # with respect to "alpha_s", "charm", "bottom" or "top", thresholds fixed, or "ln_q2", that of mu2
    def alpha_s_derivative(
        self, parameter: str, mu2: NDArray[np.float64], nf: NDArray[np.int64]
    ) -> NDArray[np.float64]: ...
    # of a factorisation scale; a scale on a threshold counts as above
    def nf_at(self, q2: NDArray[np.float64]) -> NDArray[np.int64]: ...

@final
class Evolution:
    # A live set: dense in scale between the lowest and the highest scale built, for each nf on its route.
    @property
    def names(self) -> list[str]: ...
    @property
    def light(self) -> int: ...
    @property
    def flow_names(self) -> list[str]: ...
    @property
    def error(self) -> float: ...
    @property
    def steps(self) -> int: ...
    # (nf, q2 from, q2 to) served
    def ranges(self) -> list[tuple[int, float, float]]: ...
    # blocks (scale, block, node, node); flows (scale, flow, node): what has gone below x_min, by input
    def values(
        self, q2: NDArray[np.float64], nf: NDArray[np.int64], threads: int
    ) -> tuple[NDArray[np.float64], NDArray[np.float64]]: ...
    # with respect to "alpha_s", "charm", "bottom" or "top", thresholds fixed, or "ln_q2", that of the output;
    # served as the set itself
    def derivative(self, parameter: str, threads: int) -> Evolution: ...
    # rows (point, 13, node) as of light_rows, at scales (scale,) of points; protons (point,) the fraction of
    # protons in each target; written to rows `places` (point,) of out (row, flavour, node)
    def pull_back(
        self,
        rows: NDArray[np.float64],
        *,
        q2: NDArray[np.float64],
        nf: NDArray[np.int64],
        scale_of: NDArray[np.int64],
        protons: NDArray[np.float64],
        flavours: NDArray[np.int64],
        places: NDArray[np.int64],
        out: NDArray[np.float64],
        threads: int,
    ) -> None: ...

# intrinsic: heavy flavours above start_nf whose input is allowed; threads 0: all; further: user kernels as
# (order k, nf, channel, regular values at quadrature_z, plus coefficients, local)
def build(
    theory: Theory,
    grid: Grid,
    *,
    start_q2: float,
    start_nf: int,
    q2: NDArray[np.float64],
    nf: NDArray[np.int64],
    intrinsic: Sequence[int],
    tolerance: float,
    threads: int,
    further: Sequence[tuple[int, int, str, NDArray[np.float64], NDArray[np.float64], float]],
    progress: Callable[[int, int], object] | None,
) -> Evolution: ...

# values (scale, block, node, node); densities (replica, flavour, node) -> out (scale, replica, flavour, node)
def apply(
    *,
    names: Sequence[str],
    light: int,
    values: NDArray[np.float64],
    densities: NDArray[np.float64],
    in_flavours: NDArray[np.int64],
    out_flavours: NDArray[np.int64],
    out: NDArray[np.float64],
    threads: int,
) -> None: ...

# second after first; first_values (block, node, node) of one scale, second_values (scale, block, node, node)
def compose(
    *,
    first_names: Sequence[str],
    first_light: int,
    first_values: NDArray[np.float64],
    second_names: Sequence[str],
    second_light: int,
    second_values: NDArray[np.float64],
) -> tuple[list[str], int, NDArray[np.float64]]: ...

# without operators: (scale, replica, flavour, node); gone below x_min: momentum (scale, replica), numbers
# (scale, replica, quark)
def evolve(
    theory: Theory,
    grid: Grid,
    *,
    start_q2: float,
    start_nf: int,
    densities: NDArray[np.float64],
    in_flavours: NDArray[np.int64],
    q2: NDArray[np.float64],
    nf: NDArray[np.int64],
    out_flavours: NDArray[np.int64],
    tolerance: float,
    threads: int,
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]: ...

# regular part, coefficients of [ln^k(1-z)/(1-z)]_+, coefficient of delta(1-z)
def splitting_function(
    order: int, channel: str, nf: int, z: NDArray[np.float64], one_minus_z: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.float64], float]: ...
def matching_element(
    order: int,
    element: str,
    power_of_log: int,
    pole: bool,
    compact: bool,
    z: NDArray[np.float64],
    one_minus_z: NDArray[np.float64],
) -> tuple[NDArray[np.float64], NDArray[np.float64], float]: ...

# light quarks, the coefficient of a^order at mu_r = mu_f = Q, order 0 to 2, of FL to 3
# structure_function: "F2", "FL", "xF3"; coefficient: "ns+", "ns-", "pure singlet", "gluon"
def coefficient_function(
    order: int,
    structure_function: str,
    coefficient: str,
    nf: int,
    z: NDArray[np.float64],
    one_minus_z: NDArray[np.float64],
) -> tuple[NDArray[np.float64], NDArray[np.float64], float]: ...

# heavy quarks, the coefficient of a at mu_r = mu_f = Q; what is one of
# - "F2 gluon", "FL gluon": a pair made by a photon, for charge one;
# - "charged F2 gluon", "charged FL gluon", "charged F3 gluon": F2/2, FL/2, x F3/2 of a single charm quark
#   made by a W, for a mixing element of one;
# - "charged F2 quark", "charged FL quark", "charged F3 quark": the same from the light quark, beyond
#   xi q(xi) times 1, 1 - lambda, lambda, with xi = x/lambda, lambda = Q^2/(Q^2 + m^2).
# The kernel in w, 0 < w < 1, of the rows below: F(x) = int_chi^1 dw K(w) G(chi/w), G(x) = x g(x) or x q(x);
# chi = x (1 + 4 m^2/Q^2) for a pair, x (1 + m^2/Q^2) for a single quark
def massive_coefficient(
    what: str, w: NDArray[np.float64], one_minus_w: NDArray[np.float64], q2: float, mass: float
) -> tuple[NDArray[np.float64], NDArray[np.float64], float]: ...

# (node, node), made once a grid and kept: nodal values of x (P * f)(x), or of a part of F2, FL, xF3, from
# those of x f(x)
def splitting_matrix(grid: Grid, order: int, channel: str, nf: int) -> NDArray[np.float64]: ...
def coefficient_matrix(
    grid: Grid, order: int, structure_function: str, coefficient: str, nf: int
) -> NDArray[np.float64]: ...

# the same of a kernel of the user: regular values at quadrature_z, plus coefficients, local part
def convolution_matrix(
    grid: Grid, regular: NDArray[np.float64], plus: NDArray[np.float64], local: float
) -> NDArray[np.float64]: ...

# (point, node): from nodal values of the gluon or of the light quark to the contribution at each point; x and
# q2 (point,), mass in GeV. RangeError where chi < x_min; zero where chi >= 1
def massive_rows(
    grid: Grid, what: str, x: NDArray[np.float64], q2: NDArray[np.float64], mass: float
) -> NDArray[np.float64]: ...

# matrices (term, node, node), and to each its structure function (0 to 2: F2, FL, xF3), its part (0 to 3:
# "ns+", "ns-", "pure singlet", "gluon") and its column of powers (point, power); f2, fl, xf3 (point, node),
# weights of nodal values; even, odd, even3, odd3 (point, 6), couplings; out (point, 13, node): gluon,
# q + qbar, q - qbar
def light_rows(
    grid: Grid,
    *,
    matrices: NDArray[np.float64],
    functions: NDArray[np.int64],
    parts: NDArray[np.int64],
    orders: NDArray[np.int64],
    f2: NDArray[np.float64],
    fl: NDArray[np.float64],
    xf3: NDArray[np.float64],
    powers: NDArray[np.float64],
    even: NDArray[np.float64],
    odd: NDArray[np.float64],
    even3: NDArray[np.float64],
    odd3: NDArray[np.float64],
    nf: int,
    out: NDArray[np.float64],
) -> None: ...
