"""Every argument of every public callable against every kind of wrong value.

The right answer or one of our own exceptions: nothing else escapes, and a message names what was wrong. That
the table is complete is checked against the signatures.
"""

import inspect
import warnings
from fractions import Fraction

import numpy as np
import pytest
import scalewright as sw
from scalewright import ChebyshevGrid, Densities, ResolutionWarning, ScalewrightError, Theory

KINDS = {
    "nan": float("nan"),
    "inf": float("inf"),
    "-inf": float("-inf"),
    "negative": -1.0,
    "zero": 0.0,
    "subnormal": 5e-324,
    "huge": 1e308,
    "huge integer": 10**30,
    "negative integer": -7,
    "bool": True,
    "numpy bool": np.True_,
    "float32": np.float32(0.5),
    "longdouble": np.longdouble(0.5),
    "complex": 0.5 + 1j,
    "fraction": Fraction(1, 2),
    "text": "abc",
    "empty text": "",
    "bytes": b"abc",
    "None": None,
    "object": object(),
    "class": dict,
    "set": {1.0},
    "dictionary": {"a": 1},
    "generator": (x for x in [0.5]),
    "0-d": np.array(0.5),
    "empty": np.zeros(0),
    "empty list": [],
    "five axes": np.ones((1, 1, 1, 1, 1)),
    "nested ragged": [[0.1, 0.2], [0.3]],
    "list of text": ["a", "b"],
    "list of None": [None, None],
    "list with nan": [0.5, float("nan")],
    "object array": np.array([0.5, "a"], dtype=object),
    "big-endian": np.array([0.5, 0.25], dtype=">f8"),
    "negative stride": np.array([0.5, 0.25])[::-1],
    "broadcast": np.broadcast_to(0.5, (3,)),
    "read-only": np.frombuffer(np.array([0.5, 0.25]).tobytes()),
    "masked": np.ma.masked_array([0.5, 0.25], mask=[False, True]),
    "dates": np.array(["2000-01-01"], dtype="datetime64[D]"),
    "records": np.zeros(2, dtype=[("a", float)]),
    "unsigned": np.array([2**63], dtype=np.uint64),
    "repeated": [2, 2],
    "unordered": [3.0, 1.0, 2.0],
    "function": lambda *_: 0.5,
    "function of nothing": lambda: 0.5,
}

GRID = ChebyshevGrid.from_panels([0.0, 1.0, 11.0], [10, 12])
ONE = Densities(GRID, q2=2.0, nf=3, flavours=(21, 2, -2), values=np.ones((3, GRID.nodes)))
THEORY = Theory(order="LO")
KERNEL = sw.SplittingKernel(lambda z, nf: z)
OWN = sw.CoefficientFunction(lambda z, nf: z)

DESCRIPTION = {
    "title": "A",
    "measures": "F2",
    "exchange": "photon",
    "s": 1000.0,
    "uncertainty": [
        {"column": "stat", "given_in": "value", "scales_with": "nothing"},
        {"name": "lumi", "size": 2.0, "given_in": "percent", "scales_with": "value", "correlated": True},
    ],
}
POINTS = {"x": [0.1, 0.2], "q2": [10.0, 20.0], "value": [1.0, 2.0], "stat": [0.1, 0.2]}
MEASURED = sw.Measurements.from_columns(DESCRIPTION, POINTS)
CHI2 = sw.ChiSquare(MEASURED)
ELECTROWEAK = sw.Electroweak.effective()
MIXING = ELECTROWEAK.mixing
SEVEN = (21, 1, 2, 3, -1, -2, -3)
FULL = Densities(GRID, q2=2.0, nf=3, flavours=SEVEN, values=np.ones((7, GRID.nodes)))
THREE = Theory(order="LO", flavours=3)
OPERATORS = sw.build_operators(THREE, GRID, start_q2=2.0, q2=[10.0])
FMAP = sw.forward_map(THREE, GRID, start_q2=2.0, points=MEASURED)
ASKED = {
    "q2": 2.0,
    "densities": FULL,
    "theory": THREE,
    "current": "neutral",
    "exchange": "photon+Z",
    "beam": "e-",
    "polarisation": 0.5,
    "target": "proton",
    "tagged": None,
    "electroweak": None,
}


def power(x):
    return x**0.5 * (1 - x) ** 3


#: Callable, and arguments with which it works.
CALLS = {
    "Coupling": (sw.Coupling, {"alpha_s": 0.118, "q2": 8315.0, "nf": 5}),
    "QuarkMasses": (sw.QuarkMasses, {"charm": 1.3, "bottom": 4.2, "top": 163.0, "kind": "msbar"}),
    "Theory": (
        Theory,
        {
            "order": "LO",
            "coupling": sw.Coupling(),
            "masses": sw.QuarkMasses(),
            "flavours": (3, 5),
            "threshold_mu2_ratio": 1.0,
            "thresholds_q2": None,
            "evolution_mu2_ratio": 1.0,
            "running_loops": None,
            "heavy_gluon_element": "exact",
            "hard_mur2_ratio": 1.0,
            "hard_muf2_ratio": 1.0,
            "heavy_quarks": "massless",
            "fl_counting": "absolute",
        },
    ),
    "Theory.nf_at": (THEORY.nf_at, {"q2": 2.0}),
    "Theory.start_nf": (THEORY.start_nf, {"q2": 2.0}),
    "Theory.alpha_s": (THEORY.alpha_s, {"q2": 100.0, "nf": None}),
    "Theory.from_json": (Theory.from_json, {"text": "{}"}),
    "Theory.from_dict": (Theory.from_dict, {"options": {}, "where": "theory"}),
    "ChebyshevGrid": (ChebyshevGrid, {"x_min": 1e-5, "resolution": "standard"}),
    "ChebyshevGrid.from_panels": (ChebyshevGrid.from_panels, {"edges": [0.0, 2.0], "degrees": [5]}),
    "ChebyshevGrid.cardinals": (GRID.cardinals, {"x": 0.5}),
    "ChebyshevGrid.interpolate": (GRID.interpolate, {"values": np.ones(GRID.nodes), "x": 0.5}),
    "Below": (sw.Below, {"momentum": np.zeros((1, 1)), "number": np.zeros((1, 1, 6))}),
    "Densities": (
        Densities,
        {
            "grid": GRID,
            "q2": 2.0,
            "nf": 3,
            "flavours": (21,),
            "values": np.ones((1, GRID.nodes)),
            "below": None,
        },
    ),
    "Densities.sample": (Densities.sample, {"grid": GRID, "q2": 2.0, "nf": 3, "functions": {21: power}}),
    "Densities.from_function": (
        Densities.from_function,
        {"f": lambda flavour, x, q2: power(x), "grid": GRID, "q2": 2.0, "nf": 3, "flavours": (21,)},
    ),
    "Densities.at": (ONE.at, {"q2": 2.0, "x": 0.5, "flavour": 21, "nf": 3}),
    "Densities.scale": (ONE.scale, {"q2": 2.0, "nf": 3}),
    "Densities.combination": (ONE.combination, {"name": "u_v"}),
    "Densities.momentum": (ONE.momentum, {"part": "above"}),
    "Densities.number": (ONE.number, {"flavour": 2, "part": "above"}),
    "Densities.moment": (ONE.moment, {"flavour": 2, "N": 2.0}),
    "Densities.resolution": (ONE.resolution, {}),
    "Measurements": (sw.Measurements, {"tables": MEASURED._tables, "cuts": ()}),
    "Measurements.from_columns": (
        sw.Measurements.from_columns,
        {"description": DESCRIPTION, "points": POINTS, "matrices": ()},
    ),
    "Measurements.join": (sw.Measurements.join, {"parts": [MEASURED]}),
    "Measurements.cut": (
        MEASURED.cut,
        {"x": (0.0, 1.0), "q2": None, "w2": None, "y": None, "keep": [True, True], "reason": "a"},
    ),
    "Measurements.covariance": (MEASURED.covariance, {"reference": [1.0, 2.0]}),
    "Measurements.nuisance": (MEASURED.nuisance, {"reference": [1.0, 2.0]}),
    "Measurements.reference": (MEASURED.reference, {"reference": [1.0, 2.0]}),
    "Measurements.pseudo_data": (
        MEASURED.pseudo_data,
        {"rng": np.random.default_rng(1), "truth": [1.0, 2.0], "replicas": 2},
    ),
    "Measurements.with_values": (MEASURED.with_values, {"values": [1.0, 2.0]}),
    "ChiSquare": (
        sw.ChiSquare,
        {"measurements": MEASURED, "form": "nuisance", "reference": [1.0, 2.0], "theory": np.eye(2)},
    ),
    "ChiSquare.value": (CHI2.value, {"prediction": [1.0, 2.0]}),
    "ChiSquare.residuals": (CHI2.residuals, {"prediction": [1.0, 2.0]}),
    "ChiSquare.whiten": (CHI2.whiten, {"matrix": [1.0, 2.0]}),
    "ChiSquare.pulls": (CHI2.pulls, {"prediction": [1.0, 2.0], "shifted": True}),
    "ChiSquare.shifts": (CHI2.shifts, {"prediction": [1.0, 2.0]}),
    "ChiSquare.per_table": (CHI2.per_table, {"prediction": [1.0, 2.0]}),
    "ChiSquare.with_reference": (CHI2.with_reference, {"reference": [1.0, 2.0]}),
    "ChiSquare.minus_two_log_likelihood": (CHI2.minus_two_log_likelihood, {"prediction": [1.0, 2.0]}),
    "Electroweak": (
        sw.Electroweak,
        {
            "inputs": "effective",
            "alpha": 0.0073,
            "g_fermi": 1.166e-5,
            "z_mass": 91.2,
            "w_mass": 80.4,
            "sin2": 0.2315,
            "mixing": MIXING,
        },
    ),
    "Electroweak.effective": (
        sw.Electroweak.effective,
        {
            "z_mass": 91.2,
            "sin2": 0.2315,
            "alpha": 0.0073,
            "w_mass": 80.4,
            "g_fermi": 1.166e-5,
            "mixing": MIXING,
        },
    ),
    "Electroweak.on_shell": (
        sw.Electroweak.on_shell,
        {"g_fermi": 1.166e-5, "z_mass": 91.2, "w_mass": 80.4, "mixing": MIXING},
    ),
    "Electroweak.running": (
        sw.Electroweak.running,
        {"g_fermi": 1.166e-5, "z_mass": 91.2, "alpha": 1 / 129, "mixing": MIXING},
    ),
    "forward_map": (
        sw.forward_map,
        {
            "theory": THREE,
            "grid": GRID,
            "start_q2": 2.0,
            "points": MEASURED,
            "start_nf": 3,
            "electroweak": None,
            "target_mass": False,
            "subtraction": "damped",
            "further": {"F2": [{"gluon": OWN}]},
            "tolerance": 1e-9,
            "threads": 1,
        },
    ),
    "ForwardMap.predict": (FMAP.predict, {"densities": FULL, "corrections": ()}),
    "ForwardMap.describe": (FMAP.describe, {"corrections": (), "boundaries": None}),
    "ForwardMap.orders": (FMAP.orders, {"boundaries": None}),
    "ForwardMap.predict_rows": (FMAP.predict_rows, {"densities": FULL}),
    "ForwardMap.numerical_error": (FMAP.numerical_error, {"densities": FULL, "corrections": ()}),
    "ForwardMap.derivative": (FMAP.derivative, {"parameter": "alpha_s"}),
    "Operators.derivative": (OPERATORS.derivative, {"parameter": "alpha_s", "threads": 1}),
    "structure_function": (
        sw.structure_function,
        {
            "measure": "reduced_cross_section",
            "x": 0.1,
            "y": 0.5,
            "s": None,
            "target_mass": False,
            "subtraction": "damped",
            "further": {"F2": [{"gluon": OWN}]},
            "corrections": (),
        }
        | ASKED,
    ),
    "moment": (sw.moment, {"measure": "F2", "n": 2.0} | ASKED),
    "sum_rule": (
        sw.sum_rule,
        {"name": "Adler", "q2": 2.0, "densities": FULL, "theory": THREE, "electroweak": None},
    ),
    "CoefficientFunction": (sw.CoefficientFunction, {"regular": lambda z, nf: z, "plus": (), "local": 0.0}),
    "CoefficientFunction.evaluate": (OWN.evaluate, {"z": [0.5], "nf": 4}),
    "SplittingKernel": (sw.SplittingKernel, {"regular": lambda z, nf: z, "plus": (), "local": 0.0}),
    "SplittingKernel.evaluate": (KERNEL.evaluate, {"z": [0.5], "nf": 4}),
    "splitting_function": (
        sw.splitting_function,
        {"channel": "qg", "z": 0.5, "order": "LO", "nf": 4, "one_minus_z": None},
    ),
    "matching_element": (
        sw.matching_element,
        {
            "element": "heavy<-gluon",
            "z": 0.5,
            "order": "NLO",
            "power_of_log": 0,
            "kind": "msbar",
            "heavy_gluon_element": "exact",
            "one_minus_z": None,
        },
    ),
}

#: What a message calls an argument where that is not its name.
CALLED = {
    "start_nf.q2": "start_q2",
    "nf_at.q2": "q2",
    "combination.name": "flavour",
    "from_json.text": "theory",
}
CALLED |= {"on_shell.g_fermi": "", "running.g_fermi": "", "running.z_mass": "", "running.alpha": ""}
CALLED |= {
    "forward_map.start_q2": "",
    "structure_function.s": "",
    "structure_function.x": "",
    "structure_function.y": "",
}
CALLED |= {"from_dict.options": "theory", "alpha_s.q2": ""}

CASES = [(call, argument) for call, (_, good) in CALLS.items() for argument in good]


@pytest.mark.parametrize(("call", "argument"), CASES, ids=[".".join(case) for case in CASES])
def test_a_wrong_value_gives_an_answer_or_one_of_our_exceptions(call, argument):
    function, good = CALLS[call]
    name = CALLED.get(f"{call.split('.')[-1]}.{argument}", argument)
    for kind, value in KINDS.items():
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            warnings.simplefilter("ignore", ResolutionWarning)
            try:
                answer = function(**(good | {argument: value}))
            except ScalewrightError as error:
                assert name in str(error), f"{kind}: {error}"
                assert len(str(error)) < 600
            else:
                for array in answer if isinstance(answer, tuple) else (answer,):
                    if isinstance(array, np.ndarray | float):
                        assert np.isfinite(array).all(), kind


def test_what_is_called_works_with_the_good_arguments():
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ResolutionWarning)  # the grid is a coarse one
        for function, good in CALLS.values():
            function(**good)


def _signatures():
    for name in sw.__all__:
        thing = getattr(sw, name)
        if inspect.isclass(thing) and issubclass(thing, Exception | Warning):
            continue
        yield name, thing
        if inspect.isclass(thing):
            for method in vars(thing) | vars(thing.__base__):
                attribute = getattr(thing, method)
                if not method.startswith("_") and callable(attribute):
                    yield f"{name}.{method}", attribute


#: Tested elsewhere: files in tests/files, tests/measurements and tests/densities, operators in tests/apply,
#: fits and ensembles in tests/fitting.
ELSEWHERE = (
    "Measurements.read",
    "Measurements.write",
    "Densities.from_csv",
    "Densities.load",
    "Densities.save",
    "Densities.to_csv",
    "ForwardMap.load",
    "ForwardMap.save",
    "Operators",
    "Ensemble",
    "fit",
)
#: Methods that take nothing.
NOTHING = (
    "Theory.to_json",
    "Theory.to_dict",
    "Theory.describe",
    "Theory.handle",
    "ChebyshevGrid.handle",
    "Measurements.describe",
    "Electroweak.describe",
)


def test_every_public_callable_and_every_argument_stands_in_the_table():
    for name, thing in _signatures():
        if (
            name.startswith(ELSEWHERE)
            or name in NOTHING
            or name in ("build_operators", "evolve", "ForwardMap")
        ):
            continue
        if name == "Below.scale":  # an index, of our own making
            continue
        wanted = set(inspect.signature(thing).parameters) - {"self"}
        assert name in CALLS, name
        assert wanted == set(CALLS[name][1]), name


def test_count_of_cases_is_reported(record_property):
    record_property("arguments x kinds", len(CASES) * len(KINDS))
    assert len(CASES) * len(KINDS) > 2500
