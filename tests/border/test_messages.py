"""Every mistake has its class, and a message with what was given, what is allowed and where.

One table: what is done, the class, the whole message. Messages of files stand in tests/files.
"""

import re

import numpy as np
import pytest
from scalewright import (
    Below,
    ChebyshevGrid,
    Coupling,
    Densities,
    InputError,
    QuarkMasses,
    RangeError,
    ScalewrightError,
    SplittingKernel,
    StoreError,
    Theory,
    matching_element,
    splitting_function,
)

NAN, INF = float("nan"), float("inf")


@pytest.fixture(scope="module")
def grid():
    return ChebyshevGrid(x_min=1e-5)


@pytest.fixture(scope="module")
def one(grid):
    return Densities(grid, q2=2.0, nf=3, flavours=(21, 2, -2), values=np.ones((3, grid.nodes)))


class Given:
    """What the entries of the table work with."""

    def __init__(self, grid, one):
        self.grid, self.one, self.nodes = grid, one, grid.nodes

    def densities(self, **changed):
        given = {"q2": 2.0, "nf": 3, "flavours": (21,), "values": np.ones((2, 1, self.nodes))}
        return Densities(self.grid, **(given | changed))

    def sample(self, function):
        return Densities.sample(self.grid, 2.0, 3, {21: function})

    def spoilt(self, value, index):
        values = np.ones((2, 1, self.nodes))
        values[index] = value
        return self.densities(values=values)


def raiser(*_):
    raise ZeroDivisionError("division by zero")


X_ALLOWED = "x must lie in [1e-05, 1]"
PDG = "a PDG number must be 21 (gluon), 1 to 6 or -1 to -6"
ARRAY = "array of shape {} and dtype float64"

THEORY = [
    (lambda g: Theory(order="nnlo"), 'order = \'nnlo\': order must be one of "NNLO", "NLO", "LO"'),
    (lambda g: Theory(order=2), 'order = 2: order must be one of "NNLO", "NLO", "LO"'),
    (lambda g: Theory(flavours=2), "flavours = 2: flavours must be from 3 to 6"),
    (lambda g: Theory(flavours=(3, 7)), "flavours = 7 at index 1: flavours must be from 3 to 6"),
    (lambda g: Theory(flavours=(5, 3)), "flavours = (5, 3): the fewest must come first"),
    (
        lambda g: Theory(flavours=(3, 4, 5)),
        "flavours = (3, 4, 5): flavours must be one number, or fewest and most",
    ),
    (lambda g: Theory(flavours=3.0), "flavours = 3: flavours must be whole numbers, not float64"),
    (lambda g: Theory(coupling=0.118), "coupling = 0.118: coupling must be a Coupling, not float"),
    (lambda g: Theory(masses=None), "masses = None: masses must be a QuarkMasses, not NoneType"),
    (lambda g: Theory(running_loops=6), "running_loops = 6: running_loops must be from 1 to 5"),
    (
        lambda g: Theory(evolution_mu2_ratio=0),
        "evolution_mu2_ratio = 0: evolution_mu2_ratio must lie in (0, inf)",
    ),
    (
        lambda g: Theory(heavy_gluon_element="exakt"),
        'heavy_gluon_element = \'exakt\': heavy_gluon_element must be one of "exact", "compact"; '
        'did you mean "exact"?',
    ),
    (
        lambda g: Theory(threshold_mu2_ratio=(1, 2)),
        "threshold_mu2_ratio = array of shape (2,) and dtype float64: "
        "threshold_mu2_ratio must be one number or three (charm, bottom, top)",
    ),
    (
        lambda g: Theory(threshold_mu2_ratio=(1, -1, 1)),
        "threshold_mu2_ratio = -1 at index 1: a ratio must lie in (0, inf)",
    ),
    (
        lambda g: Theory(thresholds_q2=(2, 2, 9)),
        "thresholds_q2 = 2 at index 1: threshold scales must rise from charm to top",
    ),
    (
        lambda g: Theory(thresholds_q2=(2, NAN, 9)),
        "thresholds_q2 = nan at index 1: thresholds_q2 must be finite",
    ),
    (
        lambda g: Theory(thresholds_q2=(2, 3, 9), threshold_mu2_ratio=2),
        "thresholds_q2 and threshold_mu2_ratio: give one of the two",
    ),
    (lambda g: Coupling(0.0, 2.0, 3), "alpha_s = 0: alpha_s must lie in (0, 1]"),
    (lambda g: Coupling("0.1", 2.0, 3), "alpha_s = '0.1': alpha_s must be real numbers, not text"),
    (lambda g: Coupling(0.3, -2.0, 3), "q2 = -2: q2 must lie in (0, inf) GeV^2"),
    (lambda g: Coupling(0.3, [2.0], 3), f"q2 = {ARRAY.format((1,))}: q2 must be one number"),
    (lambda g: Coupling(0.3, 2.0, 7), "nf = 7: nf must be from 3 to 6"),
    (lambda g: Coupling(0.3, 2.0, True), "nf = True: nf must be a whole number, not bool"),
    (lambda g: QuarkMasses(charm=4.2), "bottom = 4.18: masses must rise, and charm = 4.2"),
    (lambda g: QuarkMasses(top=4), "top = 4: masses must rise, and bottom = 4.18"),
    (lambda g: QuarkMasses(charm=-INF), "charm = -inf: charm must lie in (0, 1e+100) GeV"),
    (
        lambda g: QuarkMasses(kind="MSbar"),
        'kind = \'MSbar\': kind must be one of "msbar", "pole"; did you mean "msbar"?',
    ),
    (lambda g: Theory().nf_at([1.0, 0.0]), "q2 = 0 at index 1: q2 must lie in (0, inf) GeV^2"),
    (lambda g: Theory().nf_at([[1.0], [NAN]]), "q2 = nan at index (1, 0): q2 must be finite"),
    (lambda g: Theory().start_nf(0), "start_q2 = 0: start_q2 must lie in (0, inf) GeV^2"),
    (lambda g: Theory().alpha_s(2.0, nf=2), "nf = 2: nf must be from 3 to 6"),
    (
        lambda g: Theory().alpha_s([2.0, 3.0], nf=[3, 4, 5]),
        "nf = array of shape (3,) and dtype int64: nf must be one number, or one for each q2",
    ),
    (lambda g: Theory().alpha_s(-1), "q2 = -1: q2 must lie in (0, inf) GeV^2"),
]

GRID = [
    (lambda g: ChebyshevGrid(0.0), "x_min = 0: x_min must lie in [1e-09, 0.01]"),
    (
        lambda g: ChebyshevGrid(1e-7, "high"),
        'resolution = \'high\': resolution must be one of "standard", "fine"',
    ),
    (
        lambda g: ChebyshevGrid.from_panels([0.1, 1], [5]),
        "edges = 0.1 at index 0: the first edge must be 0 (x = 1)",
    ),
    (lambda g: ChebyshevGrid.from_panels([0, 2, 2], [5, 5]), "edges = 2 at index 2: edges must rise"),
    (
        lambda g: ChebyshevGrid.from_panels([0, 2], [1]),
        "degrees = 1 at index 0: a degree must be from 2 to 64",
    ),
    (
        lambda g: ChebyshevGrid.from_panels([0, 2], [5, 5]),
        "degrees = array of shape (2,) and dtype int64: there must be one degree for each of 1 panels",
    ),
    (
        lambda g: ChebyshevGrid.from_panels([0], []),
        f"edges = {ARRAY.format((1,))}: edges must hold at least two values",
    ),
    (lambda g: g.grid.cardinals([0.1, 1.3]), f"x = 1.3 at index 1: {X_ALLOWED}"),
    (lambda g: g.grid.cardinals(0.0), f"x = 0: {X_ALLOWED}"),
    (lambda g: g.grid.cardinals([[0.5], [NAN]]), f"x = nan at index (1, 0): {X_ALLOWED}"),
    (lambda g: g.grid.cardinals("x"), "x = 'x': x must be real numbers, not text"),
    (
        lambda g: g.grid.interpolate(np.ones(4), 0.5),
        f"values = {ARRAY.format((4,))}: the last axis must have the {{nodes}} nodes of the grid",
    ),
]

DENSITIES = [
    (
        lambda g: Densities("grid", q2=2, nf=3, flavours=(21,), values=[]),
        "grid = 'grid': grid must be a ChebyshevGrid, not str",
    ),
    (lambda g: g.densities(q2=0), "q2 = 0: q2 must lie in (0, inf) GeV^2"),
    (lambda g: g.densities(q2=None), "q2 = None: q2 must be given"),
    (lambda g: g.densities(q2=[]), f"q2 = {ARRAY.format((0,))}: q2 must hold at least one scale"),
    (
        lambda g: g.densities(q2=[2.0, 3.0, 2.0]),
        "q2 = 2 at index 2: the scale with nf = 3 stands at index 0 already",
    ),
    (lambda g: g.densities(nf=2), "nf = 2: nf must be from 3 to 6"),
    (lambda g: g.densities(nf=4.0), "nf = 4: nf must be whole numbers, not float64"),
    (lambda g: g.densities(nf=[3]), "nf = [3]: nf must be one number where q2 is one"),
    (
        lambda g: g.densities(q2=[2.0, 3.0], nf=[3, 4, 5]),
        "nf = array of shape (3,) and dtype int64: nf must be one number or 2 of them, one a scale",
    ),
    (lambda g: g.densities(flavours=(22,)), f"flavours = 22 at index 0: {PDG}"),
    (lambda g: g.densities(flavours=(21, 0)), f"flavours = 0 at index 1: {PDG}"),
    (
        lambda g: g.densities(flavours=(2, 2)),
        "flavours = 2 at index 1: the flavour stands at index 0 already",
    ),
    (lambda g: g.densities(flavours=()), "flavours = (): flavours must hold at least one PDG number"),
    (lambda g: g.densities(flavours=21), "flavours = 21: flavours must be a list of PDG numbers"),
    (
        lambda g: g.densities(flavours=("g",)),
        "flavours = ('g',): flavours must be PDG numbers, not names",
    ),
    (
        lambda g: g.densities(values=np.ones((2, 1, 5))),
        f"values = {ARRAY.format((2, 1, 5))}: "
        "the axes must be (replica, flavour, node) = (any, 1, {nodes}) for one q2",
    ),
    (
        lambda g: g.densities(q2=[2.0], values=np.ones((1, 1, g.nodes))),
        "values = array of shape (1, 1, {nodes}) and dtype float64: "
        "the axes must be (scale, replica, flavour, node) = (1, any, 1, {nodes}) for a list of q2",
    ),
    (lambda g: g.spoilt(NAN, (1, 0, 7)), "values = nan at index (1, 0, 7): values must be finite"),
    (lambda g: g.spoilt(-INF, (0, 0, 0)), "values = -inf at index (0, 0, 0): values must be finite"),
    (
        lambda g: g.densities(values=np.ones((2, 1, 3), complex)),
        "values = array of shape (2, 1, 3) and dtype complex128: values must be real numbers, not complex",
    ),
    (
        lambda g: g.densities(values=np.ones((2, 1), bool)),
        "values = array of shape (2, 1) and dtype bool: values must be real numbers, not bool",
    ),
    (
        lambda g: g.densities(values=[[1.0, 2.0], [3.0]]),
        "values = [[1.0, 2.0], [3.0]]: values must be an array: its rows differ in length",
    ),
    (lambda g: g.densities(values=None), "values = None: values must be given"),
    (
        lambda g: g.densities(values=np.ma.masked_less(np.ones((2, 1)), 2)),
        f"values = {ARRAY.format((2, 1))}: values must not have masked entries: fill or drop them first",
    ),
    (lambda g: g.densities(below=0.1), "below = 0.1: below must be a Below or None, not float"),
    (
        lambda g: g.densities(below=Below(np.ones((1, 3)), np.ones((1, 3, 6)))),
        "below of shape (1, 3): below must have 1 scales and 2 replicas, as values have",
    ),
    (
        lambda g: Below(np.ones(3), np.ones((3, 6))),
        "below: momentum has shape (3,) and number (3, 6): "
        "they must be (scale, replica) and (scale, replica, 6)",
    ),
    (lambda g: g.one.at(2.0, 1.3, 21), f"x = 1.3: {X_ALLOWED}"),
    (lambda g: g.one.at(-2.0, 0.3, 21), "q2 = -2: q2 must lie in (0, inf) GeV^2"),
    (lambda g: g.one.at([], 0.3, 21), f"q2 = {ARRAY.format((0,))}: q2 must hold at least one scale"),
    (lambda g: g.one.at(2.0, 0.3, 22), f"flavour = 22: {PDG}"),
    (lambda g: g.one.at(2.0, 0.3, 2.0), "flavour = 2: flavour must be a whole number, not float"),
    (
        lambda g: g.one.at(2.0, 0.3, "valance"),
        "flavour = 'valance': must be a PDG number, g, d, u, s, c, b, t, dbar ..., u_v, u+, u-, singlet, "
        'valence, sea or a sum of these; did you mean "valence"?',
    ),
    (lambda g: g.one.at(2.0, 0.3, "u v"), "flavour = 'u v': not a sum of flavours (from 'v' on)"),
    (lambda g: g.one.at(2.0, 0.3, 4), "flavour = 4: these densities do not hold c, only g, u, ubar"),
    (lambda g: g.one.number("g"), "flavour = 'g': must be a quark: 1 to 6, or one of d, u, s, c, b, t"),
    (lambda g: g.one.number(-2), "flavour = -2: must be a quark: 1 to 6, or one of d, u, s, c, b, t"),
    (lambda g: g.one.number(1), "flavour = 'd_v': these densities do not hold d, dbar, only g, u, ubar"),
    (lambda g: g.one.momentum("all"), 'part = \'all\': part must be one of "total", "above"'),
    (lambda g: g.one.moment(21, NAN), "N = nan: N must lie in [-20, 200]"),
    (lambda g: g.one.scale([2.0]), "q2 = [2.0]: q2 must be one number"),
]

FUNCTIONS = [
    (lambda g: g.sample(raiser), "functions[21] raised ZeroDivisionError: division by zero"),
    (lambda g: g.sample(3.0), "functions[21] = 3: functions[21] must be callable, not float"),
    (
        lambda g: g.sample(lambda x: x[:-1]),
        "functions[21] returned values of shape ({fewer},): the shape must be ({nodes},), that of x",
    ),
    (
        lambda g: g.sample(lambda x: x[:, None] * x),
        "functions[21] returned values of shape ({nodes}, {nodes}): the shape must be ({nodes},), that of x",
    ),
    (
        lambda g: g.sample(lambda x: np.where(x == x[3], NAN, x)),
        "value of functions[21] = nan at index 3: value of functions[21] must be finite",
    ),
    (
        lambda g: g.sample(lambda x: None),
        "value of functions[21] = None: value of functions[21] must be given",
    ),
    (
        lambda g: g.sample(lambda x: 1j * x),
        "value of functions[21] = array of shape ({nodes},) and dtype complex128: "
        "value of functions[21] must be real numbers, not complex",
    ),
    (
        lambda g: Densities.sample(g.grid, 2.0, 3, {}),
        "functions = (): functions must hold at least one PDG number",
    ),
    (
        lambda g: Densities.sample(g.grid, 2.0, 3, {"g": raiser}),
        "functions = ['g']: functions must be PDG numbers, not names",
    ),
    (
        lambda g: Densities.sample(g.grid, 2.0, 3, [2]),
        "functions = [2]: must map PDG numbers to functions, and is a list",
    ),
    (
        lambda g: Densities.from_function(raiser, g.grid, [2.0, 5.0], 3, (21,)),
        "f at flavour = 21, q2 = 2 raised ZeroDivisionError: division by zero",
    ),
    (lambda g: Densities.from_function(7, g.grid, 2.0, 3, (21,)), "f = 7: f must be callable, not int"),
    (lambda g: Densities.from_function(raiser, g.grid, 2.0, 3, (9,)), f"flavours = 9 at index 0: {PDG}"),
    (lambda g: Densities.from_csv("x.csv", None), "grid = None: grid must be a ChebyshevGrid, not NoneType"),
    (lambda g: SplittingKernel(0.5), "regular = 0.5: regular must be callable, not float"),
    (lambda g: SplittingKernel(raiser, plus=(1.0, NAN)), "plus = nan at index 1: plus must be finite"),
    (lambda g: SplittingKernel(raiser, local=INF), "local = inf: local must lie in (-inf, inf)"),
    (
        lambda g: SplittingKernel(raiser).evaluate([0.5], 4),
        "regular raised ZeroDivisionError: division by zero",
    ),
    (
        lambda g: SplittingKernel(lambda z, nf: z, plus=raiser).evaluate([0.5], 4),
        "plus raised ZeroDivisionError: division by zero",
    ),
    (
        lambda g: SplittingKernel(lambda z, nf: z, local=lambda nf: "a").evaluate([0.5], 4),
        "local = 'a': local must be real numbers, not text",
    ),
    (
        lambda g: SplittingKernel(lambda z, nf: z[1:]).evaluate([0.5, 0.6], 4),
        "regular returned values of shape (1,): the shape must be (2,), that of x",
    ),
    (
        lambda g: splitting_function("qq", 0.5, order="LO", nf=4),
        'channel = \'qq\': channel must be one of "ns+", "ns-", "ns-sea", "pure singlet", "qg", "gq", "gg"',
    ),
    (
        lambda g: splitting_function("qg", [0.5, 1.0], order="LO", nf=4),
        "z = 1 at index 1: z must lie in (0, 1)",
    ),
    (lambda g: splitting_function("qg", 0.5, order="LO", nf=7), "nf = 7: nf must be from 3 to 6"),
    (
        lambda g: splitting_function("qg", 0.5, order="N3LO", nf=4),
        'order = \'N3LO\': order must be one of "LO", "NLO", "NNLO"; did you mean "NLO"?',
    ),
    (
        lambda g: splitting_function("qg", 0.5, order="LO", nf=4, one_minus_z=0.4),
        "one_minus_z = 0.4: z and one_minus_z must add up to 1",
    ),
    (
        lambda g: matching_element("heavy<-gluon", 0.5, order="NLO", power_of_log=3),
        "power_of_log = 3: power_of_log must be from 0 to 2",
    ),
    (
        lambda g: matching_element("heavy<-gluon", 0.5, order="LO"),
        'order = \'LO\': order must be one of "NLO", "NNLO"; did you mean "NLO"?',
    ),
]

RANGE = [
    (lambda g: g.grid.cardinals([0.1, 1e-6]), f"x = 1e-06 at index 1: {X_ALLOWED}"),
    (lambda g: g.one.at(2.0, 9e-6, 21), f"x = 9e-06: {X_ALLOWED}"),
    (
        lambda g: g.one.at([2.0, 3.0], 0.1, 21),
        "q2 = 3 at index 1: not among the scales at hand, 2 GeV^2; "
        "operators serve any scale of their range: apply(densities, q2=...)",
    ),
    (lambda g: g.one.at(2.0, 0.1, 21, nf=4), "nf = 4: at q2 = 2 GeV^2 nf is 3"),
]

TABLE = [(InputError, *row) for row in THEORY + GRID + DENSITIES + FUNCTIONS]
TABLE += [(RangeError, *row) for row in RANGE]


@pytest.mark.parametrize(("kind", "mistake", "message"), TABLE, ids=[row[2][:60] for row in TABLE])
def test_a_mistake_has_its_class_and_its_whole_message(kind, mistake, message, grid, one):
    expected = message.replace("{nodes}", str(grid.nodes)).replace("{fewer}", str(grid.nodes - 1))
    with pytest.raises(ScalewrightError, match=re.escape(expected) + r"\Z") as caught:
        mistake(Given(grid, one))
    assert type(caught.value) is kind


@pytest.mark.parametrize("message", [row[2] for row in TABLE])
def test_messages_have_one_style(message):
    assert "\n" not in message and not message.endswith(".")


def test_classes_are_also_those_of_python():
    assert issubclass(InputError, ValueError) and issubclass(RangeError, ValueError)
    assert issubclass(StoreError, OSError)
    for kind in (InputError, RangeError, StoreError):
        assert issubclass(kind, ScalewrightError)


def test_the_cause_of_a_failing_function_is_kept(grid):
    with pytest.raises(InputError, match="raised ZeroDivisionError") as caught:
        Densities.sample(grid, 2.0, 3, {21: raiser})
    assert isinstance(caught.value.__cause__, ZeroDivisionError)


def test_an_interrupt_in_a_function_is_not_swallowed(grid):
    def interrupted(x):
        raise KeyboardInterrupt("by hand")

    with pytest.raises(KeyboardInterrupt, match="by hand"):
        Densities.sample(grid, 2.0, 3, {21: interrupted})
