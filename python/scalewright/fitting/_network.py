"""A small neural network for each set of combinations, in plain numpy, with its derivative.

F_t(x) = N_t x^a (1-x)^b net_t(x, ln x), a and b given, net a chain of layers with tanh between. N_t is 1, or
what a sum rule makes it: the integral is the quadrature of the grid above x_min, and below it that of
x^a times the value at x_min, where the network, fed with ln x, says nothing that data could confirm.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from .. import _check
from .._check import Floats
from ..grid import ChebyshevGrid
from ._basis import Basis
from ._shape import Shape

__all__ = ["Network"]

#: Widest and deepest: beyond, scipy's dense linear algebra is the wrong tool.
_WIDEST, _DEEPEST = 64, 4


class Network(Shape):
    """Neural network times x^a (1-x)^b for combinations of flavours, sum rules imposed.

    Parameters
    ----------
    grid : ChebyshevGrid
        Where x lives.
    terms : mapping
        Combination -> (a, b), the powers of x and of 1-x that multiply the network; they are not fitted.
    nf : int
        Number of active flavours of the input.
    hidden : sequence of int
        Widths of the hidden layers.
    seed : int
        Of the weights that a fit begins with.
    relations, momentum, numbers
        As for `PowerLaw`; a sum rule determines the normalisation of its term, and a number must not be 0.

    Raises
    ------
    InputError
        If an argument is wrong or a sum rule impossible.

    Notes
    -----
    Inputs are 2 x - 1 and 1 + 2 ln(x)/ln(1/x_min), outputs begin near 1; weights begin normal with
    variance 1/(number of inputs). Parameters are "weight[layer, out, in]" and "bias[layer, out]".

    Examples
    --------
    >>> import scalewright as sw
    >>> grid = sw.ChebyshevGrid(x_min=1e-4)
    >>> shape = Network(grid, {"g": (-0.1, 5), "u_v": (0.7, 3), "d_v": (0.7, 4), "sea": (-0.1, 7)}, nf=3,
    ...                 hidden=[4], relations=["dbar = ubar", "s = sbar", "s = 0.5*dbar"],
    ...                 momentum="g", numbers={"u_v": 2, "d_v": 1})
    >>> len(shape.names), shape.start.size
    (32, 32)
    >>> shape.densities(shape.start, q2=2.0, nf=3).momentum().round(12)
    array([1.])
    """

    def __init__(
        self,
        grid: ChebyshevGrid,
        terms: Mapping[str, tuple[float, float]],
        *,
        nf: int,
        hidden: Sequence[int] = (8,),
        seed: int = 0,
        relations: Sequence[str] = (),
        momentum: str | None = None,
        numbers: Mapping[str, float] | None = None,
    ) -> None:
        if not isinstance(grid, ChebyshevGrid):
            _check.refuse("grid", grid, f"grid must be a ChebyshevGrid, not {type(grid).__name__}")
        if not isinstance(terms, Mapping):
            _check.refuse("terms", terms, "terms must map combinations of flavours to two powers")
        self.basis = Basis.of(list(terms), relations, nf)
        self._numbers = self.basis.numbered(numbers or {})
        self._carrier = self.basis.carrier(momentum, self._numbers)
        powers = np.array([_powers(name, pair) for name, pair in terms.items()])
        for place, value in self._numbers.items():
            name = self.basis.terms[place]
            if value == 0.0:
                _check.refuse(f"numbers[{name}]", value, "a normalisation cannot make it 0: leave it out")
            if powers[place, 0] <= 0.0:
                _check.refuse(f"terms[{name}]", powers[place, 0], "with a number the power must be above 0")
        self._layers = _layers(hidden, len(terms))
        self._lay_grid(grid, powers)
        names = [name for layer, shape in enumerate(self._layers) for name in _names(layer, shape)]
        start = self._begin(_check.whole("seed", seed, least=0))
        free = np.full(len(names), np.inf)
        super().__init__(grid, self.basis.flavours, names, start, (-free, free))

    def _lay_grid(self, grid: ChebyshevGrid, powers: Floats) -> None:
        """Compute what does not depend on the weights: inputs, envelopes, integrals."""
        u = np.asarray(grid.u)
        self._inputs = np.stack([2.0 * np.exp(-u) - 1.0, 1.0 - 2.0 * u / u[-1]])
        self._envelope = np.exp(-powers[:, :1] * u + powers[:, 1:] * np.log(-np.expm1(-u)))
        self._above, self._under = [], []
        for s in (0.0, 1.0):
            under = np.zeros((len(powers), u.size))
            converges = powers[:, 0] + s > 0.0
            under[converges, -1] = np.exp(-s * u[-1]) / (powers[converges, 0] + s)
            under[~converges, -1] = np.nan
            self._under.append(under)
            self._above.append(np.asarray(grid.handle().moment_weights(s)) + under)

    def _begin(self, seed: int) -> Floats:
        rng = np.random.default_rng(np.random.SeedSequence(seed))
        parts = []
        for last, (out, into) in enumerate(self._layers, start=1 - len(self._layers)):
            parts.append(rng.normal(size=out * into) / np.sqrt(into) * (0.1 if last == 0 else 1.0))
            parts.append(np.full(out, 1.0) if last == 0 else rng.normal(size=out))
        return np.concatenate(parts)

    # ---- values ----------------------------------------------------------------------------------------

    def __call__(self, parameters: ArrayLike) -> Floats:
        """Return x f(x) at the nodes, (flavour, node)."""
        raw = self._envelope * self._run(self._given(parameters)).outputs[-1]
        return self.basis.matrix @ (self._norms(raw)[:, None] * raw)

    def jacobian(self, parameters: ArrayLike) -> Floats:
        """Return the derivative, (parameter, flavour, node)."""
        run = self._run(self._given(parameters))
        raw = self._envelope * run.outputs[-1]
        change = self._envelope * self._backwards(run)  # (parameter, term, node)
        norms = self._norms(raw)
        of_norms = self._norm_derivatives(raw, change, norms)
        return np.ascontiguousarray(
            self.basis.matrix @ (norms[:, None] * change + of_norms[:, :, None] * raw)
        )

    def below(self, parameters: ArrayLike) -> tuple[float, Floats]:
        """Return momentum and numbers of the six quarks below x_min, as the sum rules take them."""
        raw = self._envelope * self._run(self._given(parameters)).outputs[-1]
        scaled = self._norms(raw)[:, None] * raw
        momenta, numbers = ((self._under[s][:, -1] * scaled[:, -1]) for s in (1, 0))
        counted = self.basis.numbers
        of_quarks = np.where(counted != 0.0, counted * numbers, 0.0).sum(axis=1)
        return float(self.basis.momentum @ momenta), of_quarks

    def _run(self, given: Floats) -> _Run:
        """Run the network on the grid, keeping what each layer gave."""
        weights, outputs, first = [], [self._inputs], 0
        for place, (out, into) in enumerate(self._layers):
            weight = given[first : first + out * into].reshape(out, into)
            bias = given[first + out * into : first + out * (into + 1)]
            first += out * (into + 1)
            signal = weight @ outputs[-1] + bias[:, None]
            outputs.append(signal if place == len(self._layers) - 1 else np.tanh(signal))
            weights.append(weight)
        return _Run(weights, outputs)

    def _backwards(self, run: _Run) -> Floats:
        """Return d outputs by parameters, (parameter, term, node), by the chain rule from the last layer."""
        terms, nodes = run.outputs[-1].shape
        # d final outputs by the signal of the present layer, (signal, term, node)
        signal = np.broadcast_to(np.eye(terms)[:, :, None], (terms, terms, nodes))
        parts: list[Floats] = []
        for place in range(len(self._layers) - 1, -1, -1):
            before = run.outputs[place]
            by_weight = signal[:, None] * before[None, :, None, :]
            parts.append(np.concatenate([by_weight.reshape(-1, terms, nodes), signal]))
            if place > 0:
                back = np.tensordot(run.weights[place], signal, axes=(0, 0))
                signal = back * (1.0 - before**2)[:, None, :]
        return np.concatenate(parts[::-1])

    # ---- sum rules -------------------------------------------------------------------------------------

    def _norms(self, raw: Floats) -> Floats:
        """Return the normalisation of each term, (term,)."""
        norms = np.ones(len(raw))
        for place, value in self._numbers.items():
            norms[place] = value / (self._above[0][place] @ raw[place])
        if self._carrier is not None:
            momenta = self.basis.momentum * norms * np.einsum("tn,tn->t", self._above[1], raw)
            here = momenta[self._carrier]
            norms[self._carrier] = (1.0 - (momenta.sum() - here)) / here
        return norms

    def _norm_derivatives(self, raw: Floats, change: Floats, norms: Floats) -> Floats:
        """Return d norm by parameters, (parameter, term)."""
        result = np.zeros(change.shape[:2])
        for place, value in self._numbers.items():
            result[:, place] = -(norms[place] ** 2) / value * (change[:, place] @ self._above[0][place])
        if self._carrier is not None:
            momenta = np.einsum("tn,tn->t", self._above[1], raw)
            slopes = np.einsum("tn,ptn->pt", self._above[1], change)
            weight, here = self.basis.momentum, self._carrier
            moved = weight * (norms * slopes + result * momenta)  # of the carrier at fixed norm
            result[:, here] = -moved.sum(axis=1) / (weight[here] * momenta[here])
        return result


class _Run(NamedTuple):
    """Weights of each layer, and inputs followed by what each layer gave."""

    weights: list[Floats]
    outputs: list[Floats]


def _layers(hidden: object, outputs: int) -> list[tuple[int, int]]:
    """Return (outputs, inputs) of each layer."""
    widths = _check.whole_array("hidden", hidden, ndim=1)
    if widths.size > _DEEPEST:
        _check.refuse("hidden", widths, f"there must be at most {_DEEPEST} hidden layers")
    _check.refuse_where("hidden", widths, (widths < 1) | (widths > _WIDEST), f"must be from 1 to {_WIDEST}")
    sizes = [2, *widths.tolist(), outputs]
    return list(zip(sizes[1:], sizes[:-1], strict=True))


def _names(layer: int, shape: tuple[int, int]) -> list[str]:
    out, into = shape
    weights = [f"weight[{layer}, {o}, {i}]" for o in range(out) for i in range(into)]
    return weights + [f"bias[{layer}, {o}]" for o in range(out)]


def _powers(name: str, pair: object) -> tuple[float, float]:
    """Return checked powers of x and of 1 - x."""
    array = _check.real_array(f"terms[{name}]", pair, shape=(2,))
    if array[0] <= -1.0 or array[1] <= 0.0:
        _check.refuse(f"terms[{name}]", pair, "powers must be above -1 of x and above 0 of 1 - x")
    return float(array[0]), float(array[1])
