"""Each prediction says its formal orders and regime, and what it is not corrected for."""

from types import SimpleNamespace

import numpy as np
import pytest
import scalewright as sw
from scalewright.corrections import HigherTwist, KnownFactor, Polynomial

# below and above the charm threshold at 1.6 GeV^2, and above that of bottom at 17.5
ROWS = {"x": [0.1] * 3, "q2": [1.58, 5.0, 50.0]}


def of(grid, theory, **case):
    rows = SimpleNamespace(**ROWS | {"measure": "F2", "exchange": "photon"} | case)
    return sw.forward_map(theory, grid, start_q2=1.55, start_nf=3, points=rows)


@pytest.mark.parametrize(
    ("options", "case", "light", "heavy", "fl"),
    [
        ({}, {}, "NNLO", ("absent", "charm massless NNLO, bottom absent", "massless NNLO"), ""),
        ({"order": "NLO"}, {"measure": "FL"}, "",
         ("absent", "charm massless NLO, bottom absent", "massless NLO"), "a^1"),
        ({"heavy_quarks": "matched"}, {}, "NNLO",
         ("massive NLO", "charm matched NLO, bottom massive NLO", "matched NLO"), ""),
        ({"heavy_quarks": "matched", "order": "LO"}, {}, "LO",
         ("absent", "charm matched LO, bottom absent", "matched LO"), ""),
        ({"heavy_quarks": "massive", "flavours": 3}, {"measure": "F1"}, "NNLO", ("massive NLO",) * 3, "a^2"),
        ({"heavy_quarks": "massive", "flavours": 3, "fl_counting": "own"}, {"measure": "FL"}, "",
         ("massive NLO",) * 3, "a^3"),
        ({"heavy_quarks": "massive", "flavours": 3}, {"tagged": "charm"}, "", ("massive NLO",) * 3, ""),
        ({"heavy_quarks": "massive", "flavours": 3},
         {"exchange": None, "current": "charged", "beam": "nu", "measure": "xF3"}, "NNLO",
         ("charm massive NLO, bottom absent",) * 3, ""),
        ({"heavy_quarks": "massive", "flavours": 3, "order": "LO"},
         {"exchange": None, "current": "charged", "beam": "nu", "tagged": "charm"}, "",
         ("massive LO",) * 3, ""),
    ],
)  # fmt: skip
def test_orders_of_each_part(grid, options, case, light, heavy, fl):
    masses = sw.QuarkMasses(charm=1.265, bottom=4.18, top=170.0, kind="pole")
    found = of(grid, sw.Theory(masses=masses, **options), **case).orders()
    assert found.light == (light,) * 3 and found.heavy == heavy and found.fl == (fl,) * 3


def test_heavy_parts_that_are_called_absent_are_absent(grid, start):
    # what is said against what is computed: tagged predictions vanish where it says so, and only there
    for options in ({}, {"heavy_quarks": "matched"}, {"order": "LO", "heavy_quarks": "matched"}):
        for case in ({}, {"exchange": None, "current": "charged", "beam": "nu"}):
            for tagged in ("charm", "bottom"):
                fmap = of(grid, sw.Theory(**options), tagged=tagged, x=[0.01] * 3, **case)
                is_zero = np.abs(fmap.matrix).max(axis=(1, 2)) == 0.0
                assert is_zero.tolist() == [word == "absent" for word in fmap.orders().heavy]


def test_further_orders_count(grid):
    own = {"F2": [{"gluon": sw.CoefficientFunction(lambda z, nf: z)}]}
    rows = SimpleNamespace(**ROWS, measure="F1", exchange="photon")
    fmap = sw.forward_map(sw.Theory(), grid, start_q2=1.55, start_nf=3, points=rows, further=own)
    assert fmap.orders().light[0] == "N3LO" and fmap.orders().fl[0] == "a^2"


def test_regimes_and_missing_corrections_are_reported(grid):
    case = {"target": ["deuteron", "proton", {"z": 26, "a": 56}], "x": [0.1, 0.1, 0.9]}
    fmap = of(grid, sw.Theory(order="NNLO", flavours=3, heavy_quarks="massive"), **case)
    assert fmap.orders().regime.name.tolist() == ["low Q^2", "inclusive", "inclusive"]
    text = fmap.describe()
    for words in (
        "deuteron (1 row), proton (1 row), z=26 a=56 (1 row)",
        "light F2     NNLO",
        "massive parts are of order a: NLO for charm and bottom, whatever the light order",
        "1 low Q^2, 2 inclusive",
        "no correction for the deuteron (1 row)",
        "no correction for the nucleus z=26 a=56 (1 row)",
        "no higher twist",
        "target mass  not kept",
    ):
        assert words in text, words
    given = [KnownFactor(0.99, 0.01), HigherTwist(Polynomial(1))]
    corrected = fmap.describe(given, {"low_q2": 1.0})
    assert "3 inclusive" in corrected and "correction for the deuteron" not in corrected
    assert "no correction for the nucleus z=26 a=56" in corrected
    assert "no higher twist for deuteron, z=26 a=56" in corrected
    assert "R_deuteron: KnownFactor for deuteron, 1 parameter" in corrected
    with pytest.raises(sw.InputError, match="corrections = 3 at index 0"):
        fmap.describe(3)
    with pytest.raises(sw.InputError, match=r"boundaries = 'low_q': .*did you mean \"low_q2\""):
        fmap.describe(boundaries={"low_q": 1.0})


def test_orders_of_ratios_name_all_of_their_rows(grid):
    combined = {
        "title": "A", "measures": "F2", "exchange": "photon",
        "uncertainty": [{"name": "a", "size": 0.1, "given_in": "value", "scales_with": "nothing"}],
        "combination": {
            "rows": {"charm": {"tagged": "charm"}, "all": {}},
            "numerator": {"charm": 1.0}, "denominator": {"all": 1.0},
        },
    }  # fmt: skip
    table = sw.Measurements.from_columns(combined, {"x": [0.1], "q2": [50.0], "value": [0.3]})
    theory = sw.Theory(heavy_quarks="matched")
    fmap = sw.forward_map(theory, grid, start_q2=1.55, start_nf=3, points=table)
    assert fmap.orders().of_data(fmap.data) == {
        "light F2": ["NNLO"], "heavy F2": ["matched NLO"], "FL": [""], "regime": ["inclusive"],
    }  # fmt: skip
