"""Coefficient functions of the user: the known order a^2 and a^3 given back must be what is built in."""

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from scalewright import CoefficientFunction, _core
from scalewright._observed.light import light_matrices

X = np.array([2e-4, 0.03, 0.5])
NAMES = ("ns+", "ns-", "pure singlet", "gluon")
THREE = {"flavours": 3, "coupling": sw.Coupling(0.25, q2=10.0, nf=3)}


def known(order, function, name):
    """Return a coefficient function of the package as one of the user's."""

    def parts(z, nf):
        return _core.coefficient_function(order, function, name, nf, z, -np.expm1(np.log(z)))

    def at_half(nf):
        return parts(np.array([0.5]), nf)

    return CoefficientFunction(
        lambda z, nf: parts(z, nf)[0], plus=lambda nf: at_half(nf)[1], local=lambda nf: at_half(nf)[2]
    )


def given(order, function):
    names = NAMES[:2] if function == "xF3" else NAMES
    return {name: known(order, function, name) for name in names}


CASES = [
    {"measure": "F2", "exchange": "photon"},
    {"measure": "FL", "exchange": "photon"},
    {"measure": "xF3", "beam": "e-"},
    {"measure": "reduced_cross_section", "current": "charged", "beam": "nubar", "y": [0.5] * 3},
]


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("ratios", [(1.0, 1.0), (2.0, 0.5)])
def test_the_second_order_given_back_is_nnlo(grid, start, case, ratios):
    # evolution at NLO in both: densities at Q^2, coupling of three loops
    common = THREE | {"running_loops": 3, "hard_mur2_ratio": ratios[0], "hard_muf2_ratio": ratios[1]}
    lower, higher = (sw.Theory(order=order, **common) for order in ("NLO", "NNLO"))
    evolved = sw.evolve(lower, start, [10.0 * ratios[1]])
    asked = {"x": X, "q2": 10.0, "densities": evolved} | case
    further = {name: [given(2, name)] for name in ("F2", "FL", "xF3")}
    found = sw.structure_function(theory=lower, further=further, **asked)
    exact, without = (sw.structure_function(theory=theory, **asked) for theory in (higher, lower))
    np.testing.assert_allclose(found, exact, rtol=1e-11)  # the same quadrature, summed in another order
    assert np.abs(found / without - 1).max() > 1e-3


def test_the_third_order_of_fl_given_back_with_logarithms(grid, start):
    theory = sw.Theory(fl_counting="absolute", hard_mur2_ratio=0.5, hard_muf2_ratio=2.0, **THREE)
    rows = SimpleNamespace(x=X, q2=[20.0] * 3, measure="FL", exchange="photon")
    common = {"start_q2": 1.5, "points": rows}
    own = sw.forward_map(theory, grid, further={"FL": [given(3, "FL")]}, **common)
    built_in = sw.forward_map(replace(theory, fl_counting="own"), grid, **common)
    np.testing.assert_allclose(own.predict(start), built_in.predict(start), rtol=1e-11)


def test_a_function_of_z_agrees_with_scipy(grid):
    from observables import direct

    kernel = CoefficientFunction(lambda z, nf: nf * np.log(z) ** 2, plus=[1.0, -2.0], local=3.0)
    matrix = light_matrices(grid, "F2", 0, 4, 1.0, 1.0, (((("ns+", kernel),)),))["ns+"][1]
    density = np.sqrt(grid.x) * (1 - grid.x) ** 3

    def parts(z, one_minus_z):
        return 4 * np.log(z) ** 2, np.array([1.0, -2.0]), 3.0

    for place in (5, 40):
        expected = direct.convolved(
            lambda x: (np.sqrt(x) * (1 - x) ** 3)[None], grid.edges, grid.x[place], [parts]
        )
        assert (matrix @ density)[place] == pytest.approx(expected[0, 0], rel=1e-7)  # standard resolution


def test_bad_further_functions_are_refused(grid, start, tmp_path):
    rows = SimpleNamespace(x=X, q2=[20.0] * 3, measure="F2", exchange="photon")
    fine = CoefficientFunction(lambda z, nf: z)
    for further, message in [
        ([fine], r"must be a mapping of structure function to a list of orders"),
        ({"F3": []}, r'further must be one of "F2", "FL", "xF3"'),
        ({"F2": {"gluon": fine}}, r"further\['F2'\] = .* must be a list with one mapping an order"),
        ({"F2": [fine]}, r"further\['F2'\]\[0\] = .* must be a mapping of name to CoefficientFunction"),
        ({"F2": [{"gluons": fine}]}, r'did you mean "gluon"'),
        ({"xF3": [{"gluon": fine}]}, r'further\[.xF3.\]\[0\] must be one of "ns\+", "ns-"'),
        ({"F2": [{"gluon": lambda z, nf: z}]}, r"must be a CoefficientFunction"),
        ({"F2": [{"gluon": sw.SplittingKernel(lambda z, nf: z)}]}, r"must be a CoefficientFunction"),
        ({"F2": [{"gluon": CoefficientFunction(lambda z, nf: z[:1])}]}, r"regular returned values of shape"),
    ]:
        with pytest.raises(sw.InputError, match=message):
            sw.forward_map(sw.Theory(), grid, start_q2=1.5, start_nf=3, points=rows, further=further)
    two = {"F2": [{"gluon": fine}, {"gluon": fine}]}
    with pytest.raises(sw.InputError, match=r"further\['F2'\]: to a\^4: beyond a\^3 logarithms"):
        theory = sw.Theory(hard_muf2_ratio=2.0)
        sw.forward_map(theory, grid, start_q2=1.5, start_nf=3, points=rows, further=two)
    fmap = sw.forward_map(sw.Theory(), grid, start_q2=1.5, start_nf=3, points=rows, further=two)
    with pytest.raises(sw.InputError, match="a map with coefficient functions of your own cannot be stored"):
        fmap.save(tmp_path / "map.h5")
    a = np.asarray(fmap.theory.alpha_s(20.0)) / (4 * np.pi)
    plain = sw.forward_map(sw.Theory(), grid, start_q2=1.5, start_nf=3, points=rows)
    # the same function as a^3 and a^4: their parts are as 1 and a
    three = sw.forward_map(
        sw.Theory(), grid, start_q2=1.5, start_nf=3, points=rows, further={"F2": two["F2"][:1]}
    )
    base, one, both = (m.predict(start)[0] for m in (plain, three, fmap))
    np.testing.assert_allclose(both - one, a * (one - base), rtol=1e-6)  # rounding of small differences
