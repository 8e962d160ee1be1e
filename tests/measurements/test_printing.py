"""What is printed, and that the documentation lists every key."""

import scalewright.measurements as module
from scalewright import ChiSquare, Measurements
from scalewright._measured.description import KEYS


def test_every_key_is_in_the_documentation():
    for key in (*KEYS, "shared_as", "correlated", "asymmetric", "down_as", "repair", "kind", "of", "label"):
        assert key in module.__doc__, key


def test_lines_of_text(make):
    table = make(title="A <b>")
    assert repr(table) == "Measurements(3 data in 1 table)"
    assert repr(Measurements.join([table, make(title="B").cut(keep=[True, False, False])])) == (
        "Measurements(4 data in 2 tables)"
    )
    assert repr(ChiSquare(table, "nuisance")) == "ChiSquare(Measurements(3 data in 1 table), 'nuisance')"
    assert table._repr_html_().startswith("<pre>A &lt;b&gt;") and str(table) == table.describe()
