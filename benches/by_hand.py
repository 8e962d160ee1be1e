"""The same job in plain numpy, as someone who knows the field would write it for one paper.

Splitting functions and matching elements are scalewright's, taken pointwise: they are not what is compared;
grid, quadrature, convolution matrices, evolution and thresholds are written here: barycentric interpolation,
Gauss-Legendre on intervals that shrink towards z = 1, fourth-order Runge-Kutta in ln a.

Conventions: u = ln(1/x), F = x f(x), a = alpha_s/(4 pi), d f/d ln mu^2 = sum_k a^(k+1) P_k * f.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
import scalewright as sw
from job import Floats

ORDERS = ("LO", "NLO", "NNLO")
CHANNELS = ("ns+", "ns-", "ns-sea", "pure singlet", "qg", "gq", "gg")
ELEMENTS = ("heavy<-gluon", "heavy<-quark", "gluon<-gluon", "gluon<-quark", "quark<-quark")
LIGHT = 3
# Points of an interval, ratio of neighbouring intervals and smallest t = ln(1/z). Found by trial on the job
# of `plain.py`: 16 points make the answer wrong by 2e-6, 36 with the ratio 0.4 change it by less than 1e-10.
POINTS, RATIO, DEPTH = 24, 0.25, 1e-14
# Longest step in ln a. The answer is off by 3e-7, 2.4e-8, 2.2e-9 with 0.024, 0.012, 0.006: fourth order, as
# it should be, towards scalewright's.
STEP = 0.012


@dataclass
class Grid:
    """Panels in u with Chebyshev points of the second kind; the node x = 1 is left out."""

    edges: Floats
    degrees: list[int]
    u: Floats = field(init=False)

    def __post_init__(self) -> None:
        self.panels = [
            low + (high - low) * (1 - np.cos(np.pi * np.arange(degree + 1) / degree)) / 2
            for low, high, degree in zip(self.edges[:-1], self.edges[1:], self.degrees, strict=True)
        ]
        self.u = np.concatenate([panel[1:] for panel in self.panels])

    def cardinals(self, u: Floats) -> Floats:
        """Return L_j(u), (point, node)."""
        values = np.zeros((u.size, self.u.size + 1))
        offset = 0
        which = np.clip(np.searchsorted(self.edges, u) - 1, 0, len(self.panels) - 1)
        for place, points in enumerate(self.panels):
            inside = which == place
            weights = (-1.0) ** np.arange(points.size)
            weights[[0, -1]] /= 2
            distance = u[inside, None] - points
            hit = distance == 0
            rows = weights / np.where(hit, 1.0, distance)
            rows /= rows.sum(axis=1, keepdims=True)
            rows[hit.any(axis=1)] = hit[hit.any(axis=1)]
            values[inside, offset : offset + points.size] = rows
            offset += points.size - 1
        return values[:, 1:]


@dataclass
class Quadrature:
    """Points of all nodes in one array: z, 1 - z, weights for dz, cardinal values at x/z."""

    z: Floats
    rest: Floats
    weights: Floats
    cardinals: Floats
    bounds: list[int]


def quadrature(grid: Grid) -> Quadrature:
    """Return the points of int_x^1 dz for every node."""
    nodes, weights = np.polynomial.legendre.leggauss(POINTS)
    t_all, w_all, u_all, bounds = [], [], [], [0]
    for u in grid.u:
        # Where x/z crosses a panel edge, and a geometric series towards z = 1; no interval longer than 2.
        cuts = [0.0, u, *(u - grid.edges[(grid.edges > 0) & (grid.edges < u)])]
        smallest = min(cut for cut in cuts if cut > 0)
        depth = int(np.ceil(np.log(smallest / DEPTH) / np.log(1 / RATIO)))
        cuts += list(smallest * RATIO ** np.arange(1, depth))
        long = np.arange(2.0, u, 2.0)
        edges = np.unique(np.concatenate([cuts, long]))
        low, high = edges[:-1, None], edges[1:, None]
        t = ((low + high + (high - low) * nodes) / 2).ravel()
        t_all.append(t)
        w_all.append(((high - low) * weights / 2).ravel())
        u_all.append(u - t)
        bounds.append(bounds[-1] + t.size)
    t, w, u_in = (np.concatenate(part) for part in (t_all, w_all, u_all))
    z = np.exp(-t)
    return Quadrature(z, -np.expm1(-t), w * z, grid.cardinals(np.maximum(u_in, 0.0)), bounds)


def convolved(grid: Grid, points: Quadrature, kernels: list[sw.kernels.KernelValues]) -> Floats:
    """Return the matrices of kernels, (kernel, node, node)."""
    n = grid.u.size
    powers = max(kernel.plus.size for kernel in kernels)
    plus = np.array([[*kernel.plus, *[0.0] * (powers - kernel.plus.size)] for kernel in kernels])
    local = np.array([kernel.local for kernel in kernels])
    singular = np.array([np.log(points.rest) ** k / points.rest for k in range(powers)]).reshape(powers, -1)
    values = np.array([kernel.regular for kernel in kernels])
    values += plus @ singular
    values *= points.weights
    matrices = np.empty((len(kernels), n, n))
    log_rest = np.log(-np.expm1(-grid.u))
    for i, (begin, end) in enumerate(zip(points.bounds[:-1], points.bounds[1:], strict=True)):
        matrices[:, i] = values[:, begin:end] @ points.cardinals[begin:end]
        # What [ ]_+ subtracts: the value at z = 1 over the whole of [0, 1].
        subtracted = plus @ (singular[:, begin:end] @ points.weights[begin:end])
        outside = sum(plus[:, k] * log_rest[i] ** (k + 1) / (k + 1) for k in range(powers))
        matrices[:, i, i] += local - subtracted + outside
    return matrices


@dataclass
class Matrices:
    """Everything that depends on the grid alone."""

    splitting: dict[tuple[int, str], Floats]
    matching: dict[str, Floats]


def all_matrices(grid: Grid) -> Matrices:
    """Return splitting matrices (order, node, node) by nf and channel, and matching at a^2 for mu = m."""
    points = quadrature(grid)
    labels = [(nf, channel) for nf in (3, 4, 5) for channel in CHANNELS]
    kernels = [
        sw.splitting_function(channel, points.z, order=order, nf=nf, one_minus_z=points.rest)
        for nf, channel in labels
        for order in ORDERS
    ]
    kernels += [
        sw.matching_element(
            element,
            points.z,
            order="NNLO",
            kind="pole",
            heavy_gluon_element="compact",
            one_minus_z=points.rest,
        )
        for element in ELEMENTS
    ]
    matrices = convolved(grid, points, kernels)
    count = len(ORDERS)
    splitting = {label: matrices[count * i : count * (i + 1)] for i, label in enumerate(labels)}
    return Matrices(splitting, dict(zip(ELEMENTS, matrices[count * len(labels) :], strict=True)))


def beta(nf: int) -> tuple[float, float, float]:
    """Return beta_0, beta_1, beta_2 (O. Tarasov et al. 1980; S. Larin, J. Vermaseren, hep-ph/9302208)."""
    return 11 - 2 * nf / 3, 102 - 38 * nf / 3, 2857 / 2 - 5033 * nf / 18 + 325 * nf**2 / 54


def equations(matrices: Matrices, nf: int) -> list[Floats]:
    """Return (order, n, n) of the pair (gluon, singlet), ns+, ns- and valence."""
    plus, minus, sea, pure, qg, gq, gg = (matrices.splitting[nf, channel] for channel in CHANNELS)
    pair = np.block([[gg, gq], [qg, plus + pure]])
    return [pair, plus, minus, minus + sea]


def evolve(terms: Floats, nf: int, a: Floats) -> list[Floats]:
    """Return the operators from a[0] to each a."""

    def generator(s: float) -> Floats:
        power = np.exp(s)
        b0, b1, b2 = beta(nf)
        total = terms[0] + power * (terms[1] + power * terms[2])
        return np.asarray(total * (-1 / (b0 + power * (b1 + power * b2))))

    state = np.eye(terms.shape[1])
    results = [state]
    s = np.log(a)
    for begin, end in pairwise(s):
        count = max(1, int(np.ceil(abs(end - begin) / STEP)))
        h = (end - begin) / count
        left = generator(begin)
        for k in range(count):
            middle, right = generator(begin + (k + 0.5) * h), generator(begin + (k + 1) * h)
            k1 = left @ state
            k2 = middle @ (state + h / 2 * k1)
            k3 = middle @ (state + h / 2 * k2)
            k4 = right @ (state + h * k3)
            state = state + h / 6 * (k1 + 2 * (k2 + k3) + k4)
            left = right
        results.append(state)
    return results


Columns = dict[str, Floats]


def advance(columns: Columns, nf: int, pair: Floats, plus: Floats, minus: Floats, valence: Floats) -> Columns:
    """Carry the columns of one stretch: densities by name, each (node, columns of the input)."""
    n = plus.shape[0]
    heavy = ["charm", "bottom"][: nf - LIGHT]
    number = {"light": LIGHT, **dict.fromkeys(heavy, 1)}
    quarks = list(number)
    sigma = sum(columns[f"{quark}+"] for quark in quarks)
    total = sum(columns[f"{quark}-"] for quark in quarks)
    both = pair @ np.vstack([columns["gluon"], sigma])
    after = {**columns, "gluon": both[:n]}
    new_total = valence @ total
    for quark in quarks:
        share = number[quark] / nf
        after[f"{quark}+"] = plus @ (columns[f"{quark}+"] - share * sigma) + share * both[n:]
        after[f"{quark}-"] = minus @ (columns[f"{quark}-"] - share * total) + share * new_total
    after["ns+"], after["ns-"] = plus @ columns["ns+"], minus @ columns["ns-"]
    return after


def cross(columns: Columns, nf: int, matching: dict[str, Floats], a: float) -> Columns:
    """Match at a threshold mu = m (pole mass), from nf to nf + 1 (M. Buza et al., hep-ph/9612398)."""
    heavy = ["charm", "bottom"][: nf - LIGHT]
    sigma = sum(columns[f"{quark}+"] for quark in ["light", *heavy])
    gluon = columns["gluon"]
    after = {name: value + a**2 * (matching["quark<-quark"] @ value) for name, value in columns.items()}
    after["gluon"] = gluon + a**2 * (matching["gluon<-gluon"] @ gluon + matching["gluon<-quark"] @ sigma)
    made = ["charm", "bottom"][nf - LIGHT]
    after[f"{made}+"] = a**2 * (matching["heavy<-gluon"] @ gluon + matching["heavy<-quark"] @ sigma)
    after[f"{made}-"] = np.zeros_like(columns["light-"])
    return after


def operators(matrices: Matrices, theory: sw.Theory, start_q2: float, q2: Floats) -> list[Columns]:
    """Return for each scale what "gluon" and "*+" get from (gluon, light+), "*-" from light-, and "ns+-"."""
    n = matrices.matching["quark<-quark"].shape[0]
    zero, one = np.zeros((n, n)), np.eye(n)
    columns: Columns = {
        "gluon": np.hstack([one, zero]),
        "light+": np.hstack([zero, one]),
        "light-": one,
        "ns+": one,
        "ns-": one,
    }
    thresholds = theory.threshold_scales
    counts = theory.nf_at(q2)
    results: list[Columns] = []
    begin = start_q2
    for nf in range(LIGHT, int(counts.max()) + 1):
        asked = q2[counts == nf]
        last = nf == int(counts.max())
        ends = asked if last else np.append(asked, thresholds[nf - LIGHT])
        a = theory.alpha_s(np.append(begin, ends), nf) / (4 * np.pi)
        solutions = zip(*(evolve(terms, nf, a) for terms in equations(matrices, nf)), strict=True)
        stretch = [advance(columns, nf, *solution) for solution in solutions][1:]
        results += stretch[: asked.size]
        if not last:
            begin = thresholds[nf - LIGHT]
            above = float(theory.alpha_s(begin, nf + 1)) / (4 * np.pi)
            columns = cross(stretch[-1], nf, matrices.matching, above)
    return results
