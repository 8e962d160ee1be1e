"""What a calculation assumes: order, coupling, quark masses, numbers of flavours, scale ratios.

Conventions: a = alpha_s/(4 pi); d f/d ln mu^2 = sum_k a^(k+1) P_k * f in the MS-bar scheme; scales are
squared and in GeV^2, masses in GeV. The running of the coupling, with its decoupling at thresholds, is done
by the compiled core.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import asdict, dataclass, field, fields
from functools import cached_property
from typing import TYPE_CHECKING, Any, cast

import numpy as np
from numpy.typing import ArrayLike

from . import _check
from ._check import Floats, Integers
from ._describe import conventions, theory_html
from ._display import brief
from .errors import InputError
from .parameters import Coupling, QuarkMasses, set_field

if TYPE_CHECKING:
    from . import _core

__all__ = ["Coupling", "QuarkMasses", "Theory"]

#: The orders by name; the position is the highest k kept in the evolution equation.
ORDERS = ("LO", "NLO", "NNLO")


@dataclass(frozen=True, repr=False)
class Theory:
    """Everything a calculation assumes; frozen, hashable, printable.

    Parameters
    ----------
    order : {"NNLO", "NLO", "LO"}
        Highest k kept in d f/d ln mu^2 = sum_k a^(k+1) P_k * f: 2, 1, 0.
    coupling : Coupling
        alpha_s at one scale; the default is the world average at the Z mass.
    masses : QuarkMasses
        The default are MS-bar masses of the Particle Data Group.
    flavours : int or (int, int)
        Fewest and most active flavours, 3 to 6; one number fixes it.
    threshold_mu2_ratio : float or three of them
        mu_thr^2/m^2 for charm, bottom, top.
    thresholds_q2 : three floats, optional
        The threshold scales mu_thr^2 themselves, in GeV^2, rising; instead of `threshold_mu2_ratio`.
    evolution_mu2_ratio : float
        mu_r^2/mu_f^2 in the splitting functions.
    running_loops : int, optional
        Loops of the running coupling, 1 to 5; by default one more than k of `order`.
    heavy_gluon_element : {"exact", "compact"}
        A_Hg at a^2: the exact expression, or the compact parametrisation of A. Vogt, hep-ph/0408244.
    hard_mur2_ratio, hard_muf2_ratio : float
        mu_r^2/Q^2 and mu_f^2/Q^2 in coefficient functions, each in [0.25, 4].
    heavy_quarks : {"massless", "massive", "matched"}
        In structure functions: active quarks without mass; quarks above a fixed number of flavours made in
        pairs, with their mass, at order a; or both matched (S. Forte et al., arXiv:1001.2312).
    fl_counting : {"absolute", "own"}
        FL up to the same power of a as F2, or one more.

    Raises
    ------
    InputError
        If an option is unknown or outside its range, or two options contradict each other.

    Examples
    --------
    >>> theory = Theory(order="NLO", flavours=4)
    >>> theory
    Theory(order='NLO', alpha_s=0.118 at 8315.178394 GeV^2 for nf = 5, flavours=4)
    >>> theory.nf_at([1.0, 100.0])
    array([4, 4])
    >>> theory == Theory.from_json(theory.to_json())
    True
    """

    order: str = "NNLO"
    coupling: Coupling = field(default_factory=Coupling)
    masses: QuarkMasses = field(default_factory=QuarkMasses)
    flavours: int | tuple[int, int] = (3, 5)
    threshold_mu2_ratio: float | tuple[float, float, float] = 1.0
    thresholds_q2: tuple[float, float, float] | None = None
    evolution_mu2_ratio: float = 1.0
    running_loops: int | None = None
    heavy_gluon_element: str = "exact"
    hard_mur2_ratio: float = 1.0
    hard_muf2_ratio: float = 1.0
    heavy_quarks: str = "massless"
    fl_counting: str = "absolute"

    def __post_init__(self) -> None:
        set_field(self, "order", _check.choice("order", self.order, ORDERS[::-1]))
        for name, kind in (("coupling", Coupling), ("masses", QuarkMasses)):
            given = getattr(self, name)
            if not isinstance(given, kind):
                _check.refuse(name, given, f"{name} must be a {kind.__name__}, not {type(given).__name__}")
        set_field(self, "flavours", _flavour_range(self.flavours))
        set_field(
            self,
            "evolution_mu2_ratio",
            _check.real("evolution_mu2_ratio", self.evolution_mu2_ratio, above=0.0),
        )
        if self.running_loops is not None:
            set_field(
                self, "running_loops", _check.whole("running_loops", self.running_loops, least=1, most=5)
            )
        element = _check.choice("heavy_gluon_element", self.heavy_gluon_element, ("exact", "compact"))
        set_field(self, "heavy_gluon_element", element)
        self._check_thresholds()
        self._check_hard()

    def _check_hard(self) -> None:
        """Check what structure functions are told."""
        for name in ("hard_mur2_ratio", "hard_muf2_ratio"):
            set_field(self, name, _check.real(name, getattr(self, name), least=0.25, most=4.0))
        choices = {"heavy_quarks": ("massless", "massive", "matched"), "fl_counting": ("absolute", "own")}
        for name, known in choices.items():
            set_field(self, name, _check.choice(name, getattr(self, name), known))
        if self.heavy_quarks == "massive" and self.fewest != self.most:
            allowed = 'heavy_quarks="massive" needs a fixed number of flavours, such as flavours=3'
            _check.refuse("flavours", self.flavours, f'{allowed}; "matched" is for a variable one')

    def _check_thresholds(self) -> None:
        """Bring ratios and scales into their stored form; refuse both at once and scales that do not rise."""
        ratios = _check.real_array("threshold_mu2_ratio", self.threshold_mu2_ratio)
        if ratios.shape not in ((), (3,)):
            allowed = "threshold_mu2_ratio must be one number or three (charm, bottom, top)"
            _check.refuse("threshold_mu2_ratio", ratios, allowed)
        _check.refuse_where("threshold_mu2_ratio", ratios, ratios <= 0.0, "a ratio must lie in (0, inf)")
        one = bool((ratios == ratios.flat[0]).all())
        set_field(self, "threshold_mu2_ratio", float(ratios.flat[0]) if one else tuple(ratios.tolist()))
        if self.thresholds_q2 is not None:
            if self.threshold_mu2_ratio != 1.0:
                raise InputError("thresholds_q2 and threshold_mu2_ratio: give one of the two")
            given = _check.real_array("thresholds_q2", self.thresholds_q2, shape=(3,))
            set_field(self, "thresholds_q2", tuple(given.tolist()))
        name = "thresholds_q2" if self.thresholds_q2 is not None else "threshold_mu2_ratio * mass^2"
        scales = np.asarray(self.threshold_scales)
        inside = (scales > 0.0) & np.isfinite(scales)
        _check.refuse_where(name, scales, ~inside, f"{name} must lie in (0, inf) GeV^2")
        fallen = np.concatenate([[False], np.diff(scales) <= 0.0])
        _check.refuse_where(name, scales, fallen, "threshold scales must rise from charm to top")

    @property
    def fewest(self) -> int:
        """Fewest active flavours."""
        return self.flavours if isinstance(self.flavours, int) else self.flavours[0]

    @property
    def most(self) -> int:
        """Most active flavours."""
        return self.flavours if isinstance(self.flavours, int) else self.flavours[1]

    @property
    def threshold_scales(self) -> tuple[float, float, float]:
        """mu_thr^2 of charm, bottom, top in GeV^2, used or not."""
        if self.thresholds_q2 is not None:
            return self.thresholds_q2
        ratios = self.threshold_mu2_ratio
        three = (ratios,) * 3 if isinstance(ratios, float) else ratios
        scales = [ratio * mass**2 for ratio, mass in zip(three, self.masses.values, strict=True)]
        return scales[0], scales[1], scales[2]

    @property
    def loops(self) -> int:
        """Loops of the running coupling."""
        return self.running_loops if self.running_loops is not None else ORDERS.index(self.order) + 1

    def nf_at(self, q2: ArrayLike) -> Integers:
        """Number of active flavours at factorisation scales.

        Parameters
        ----------
        q2 : array_like
            mu_f^2 in GeV^2, any shape. A scale equal to a threshold counts as above it.

        Returns
        -------
        ndarray of int64
            With the shape of `q2`.

        Raises
        ------
        InputError
            If a scale is not positive and finite.
        """
        return self._count(q2, 1.0)

    def start_nf(self, q2: float) -> int:
        """Number of flavours of an input that names none: that of `nf_at`.

        Parameters
        ----------
        q2 : float
            Scale of the input in GeV^2. A scale equal to a threshold counts as above it.

        Returns
        -------
        int

        Raises
        ------
        InputError
            If the scale is not one positive, finite number.
        """
        return int(self.nf_at(_check.scale("start_q2", q2)))

    def _count(self, q2: ArrayLike, ratio: float) -> Integers:
        """Count the thresholds, each times `ratio`, that do not lie above `q2`."""
        scales = _check.real_array("q2", q2)
        _check.refuse_where("q2", scales, scales <= 0.0, "q2 must lie in (0, inf) GeV^2")
        crossed = np.asarray(self.threshold_scales[self.fewest - 3 : self.most - 3]) * ratio
        # side="right": a scale on a threshold has crossed it
        count = np.searchsorted(crossed, scales, side="right")
        return cast(Integers, np.asarray(self.fewest + count, dtype=np.int64))

    def alpha_s(self, q2: ArrayLike, nf: ArrayLike | None = None) -> Floats:
        """Running coupling, with thresholds.

        Parameters
        ----------
        q2 : array_like
            mu_r^2 in GeV^2, any shape.
        nf : array_like of int, optional
            Numbers of flavours, one or one for each of `q2`. By default it changes where mu_f crosses a
            threshold, that is at mu_r^2 = evolution_mu2_ratio mu_thr^2, a scale on it counting as above.

        Returns
        -------
        ndarray
            alpha_s with the shape of `q2`; a scalar for one number.

        Raises
        ------
        InputError
            If a scale is not positive and finite, or `nf` is not from 3 to 6.
        RangeError
            If a scale lies so low that the coupling has no solution there.
        """
        scales = _check.real_array("q2", q2)
        counts = self._count(scales, self.evolution_mu2_ratio)
        if nf is not None:
            given = _check.whole_array("nf", nf)
            _check.refuse_where("nf", given, (given < 3) | (given > 6), "nf must be from 3 to 6")
            if given.shape not in ((), scales.shape):
                _check.refuse("nf", given, "nf must be one number, or one for each q2")
            counts = np.broadcast_to(given, scales.shape)
        flat = self.handle().alpha_s(np.ravel(scales), np.ascontiguousarray(np.ravel(counts)))
        return flat.reshape(scales.shape)[()]

    def handle(self) -> _core.Theory:
        """Return the theory as the compiled core knows it; made once, not pickled."""
        return self._handle

    @cached_property
    def _handle(self) -> _core.Theory:
        from . import _core

        return _core.Theory(
            order=ORDERS.index(self.order),
            alpha_s=self.coupling.alpha_s,
            alpha_s_q2=self.coupling.q2,
            alpha_s_nf=self.coupling.nf,
            masses=np.asarray(self.masses.values),
            pole=self.masses.kind == "pole",
            thresholds_q2=np.asarray(self.threshold_scales),
            fewest=self.fewest,
            most=self.most,
            evolution_mu2_ratio=self.evolution_mu2_ratio,
            running_loops=self.loops,
            compact=self.heavy_gluon_element == "compact",
        )

    def to_dict(self) -> dict[str, Any]:
        """Return the options as plain numbers, words, lists and dictionaries."""
        return asdict(self)

    @classmethod
    def from_dict(cls, options: Mapping[str, Any], where: str = "theory") -> Theory:
        """Make a theory from options by name; `where` stands before each message, as the path of the key.

        Parameters
        ----------
        options : mapping
            As `to_dict` gives it; what is missing takes its default.
        where : str
            Such as "[theory]", for messages.

        Returns
        -------
        Theory

        Raises
        ------
        InputError
            If an option is unknown, with the nearest known one, or wrong.
        """
        given = _known(cls, options, where)
        for name, part in (("coupling", Coupling), ("masses", QuarkMasses)):
            if name in given:
                inner = f"{where}.{name}"
                given[name] = _made(part, _known(part, given[name], inner), inner)
        for name in ("flavours", "threshold_mu2_ratio", "thresholds_q2"):
            if isinstance(given.get(name), list):
                given[name] = tuple(given[name])
        return cast(Theory, _made(cls, given, where))

    def to_json(self) -> str:
        """Write the theory as JSON text; floats keep every bit."""
        return json.dumps(self.to_dict(), sort_keys=True)

    @classmethod
    def from_json(cls, text: str) -> Theory:
        """Read a theory from the text that `to_json` writes.

        Parameters
        ----------
        text : str
            JSON; options that are missing take their defaults.

        Returns
        -------
        Theory

        Raises
        ------
        InputError
            If the text is not JSON, or an option in it is unknown or wrong.
        """
        try:
            options = json.loads(text)
        except (TypeError, ValueError) as error:
            raise InputError(f"theory: not JSON text: {error}") from error
        return cls.from_dict(options)

    def describe(self) -> str:
        """Return one screen of text: every option and every convention in force."""
        return conventions(self)

    def __repr__(self) -> str:
        """One line."""
        coupling = self.coupling
        value = f"alpha_s={brief(coupling.alpha_s)} at {brief(coupling.q2)} GeV^2"
        return f"Theory(order={self.order!r}, {value} for nf = {coupling.nf}, flavours={self.flavours})"

    def __str__(self) -> str:
        """One screen."""
        return self.describe()

    def _repr_html_(self) -> str:
        """Return options and conventions, for notebooks."""
        return theory_html(self)

    def __getstate__(self) -> dict[str, Any]:
        """Leave the handle of the compiled core behind: it is made again when asked for."""
        return {item.name: getattr(self, item.name) for item in fields(self)}


def _flavour_range(value: object) -> int | tuple[int, int]:
    """Return one number of flavours, or fewest and most; equal ones are one."""
    array = _check.whole_array("flavours", value)
    if array.shape not in ((), (2,)):
        _check.refuse("flavours", value, "flavours must be one number, or fewest and most")
    _check.refuse_where("flavours", array, (array < 3) | (array > 6), "flavours must be from 3 to 6")
    if array.shape == ():
        return int(array)
    fewest, most = (int(n) for n in array)
    if fewest > most:
        _check.refuse("flavours", value, "the fewest must come first")
    return fewest if fewest == most else (fewest, most)


def _known(kind: type, options: object, where: str) -> dict[str, Any]:
    """Return the options as a dictionary of their own, every name a field of `kind`."""
    if not isinstance(options, Mapping):
        raise InputError(f"{where}: must be a table of options, not {type(options).__name__}")
    names = [item.name for item in fields(kind)]
    for name in options:
        if name not in names:
            raise InputError(
                f"{where}: unknown option {_check.show(name)}: known are {', '.join(names)}"
                f"{_check.nearest(name, names)}"
            )
    return dict(options)


def _made(kind: type, options: dict[str, Any], where: str) -> object:
    """Make a `kind` from options, the path of the key put before a message."""
    try:
        return kind(**options)
    except InputError as error:
        raise InputError(f"{where}.{error}") from error
