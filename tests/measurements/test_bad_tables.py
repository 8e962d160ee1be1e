"""Every mistake in a table has its class and a message that says what, where and what is allowed."""

import re

import numpy as np
import pytest
from measurements.tables import CSV, DESCRIPTION, POINTS, RATIO, TOML
from scalewright import InputError, Measurements, StoreError

NOTHING = {"given_in": "value", "scales_with": "nothing"}
STAT = {"column": "stat", **NOTHING}
COVARIANCE = {"kind": "covariance", **NOTHING}
CORRELATION = {"kind": "correlation", "of": "stat"}
EYE = np.eye(3)

#: Part of the description, part of the points, and what is said.
FILES = [
    (("current  =", "curent  ="), None,
     '{toml}: curent: unknown key; did you mean "current"? (known: title, '),
    (('title    = "Run 1, positrons"', ""), None, "{toml}: title: missing"),
    (('points   = "run1.csv"', ""), None, "{toml}: points: missing"),
    (('"reduced_cross_section"', '"reduced"'), None,
     '{toml}: measures = \'reduced\': must be one of "reduced_cross_section", "F2", "FL", "F1", "xF3", '
     '"d2sigma_dx_dq2", "d2sigma_dx_dy"'),
    (('"neutral"', '"weak"'), None, '{toml}: current = \'weak\': must be one of "neutral", "charged"'),
    (('"e+"', '"mu"'), None, '{toml}: beam = \'mu\': must be one of "e-", "e+", "nu", "nubar"'),
    (('"e+"', '"nu"'), None, '{csv}: line 2: beam = "nu" does not go with current = "neutral"'),
    (('beam     = "e+"', ""), None, "{csv}: line 2: beam: missing"),
    (('"proton"', '"protom"'), None, '{toml}: target = \'protom\': must be one of "proton", "neutron", '
     '"deuteron", "isoscalar", or z and a with 0 <= z <= a; did you mean "proton"?'),
    (('"proton"', "{ z = 3, a = 2 }"), None, "{toml}: target = {'z': 3, 'a': 2}: must be one of"),
    (("101124.0", "-5"), None,
     "{toml}: s = -5: s must lie above the squared mass of a nucleon, 0.8804 GeV^2"),
    (("101124.0", '"high"'), None, "{toml}: s = 'high': must be a finite number"),
    (("s        = 101124.0", ""), None, "{csv}: line 2: reduced_cross_section needs s, or a y column"),
    (("101124.0", "101124.0\npolarisation = 1.5"), None,
     "{toml}: polarisation = 1.5: polarisation must lie in [-1, 1]"),
    (("101124.0", '101124.0\nexchange = "W"'), None,
     '{csv}: line 2: exchange = "W" does not go with current = "neutral"'),
    (('x = "x"', 'x = "xx"'), None, "{toml}: [columns] x: {csv}: no column 'xx': there are 'x', 'Q2', "),
    (('x = "x"', 'z = "x"'), None, "{toml}: [columns] z: unknown key (known: x, q2, value, y, label, "),
    (('x = "x"', 's = "x"'), None, "{toml}: s: given both for all lines and as column 'x'"),
    (('"percent"', '"per cent"'), None,
     '{toml}: [uncertainty 1] given_in = \'per cent\': must be one of "percent", "value"; '
     'did you mean "percent"?'),
    (('scales_with = "nothing"', ""), None, "{toml}: [uncertainty 1] scales_with: missing"),
    (('column = "stat"', 'column = "sta"'), None,
     "{toml}: [uncertainty 1] column: {csv}: no column 'sta': there are 'x', 'Q2', 'sigma', 'stat', "
     "'energy scale', 'remark'; did you mean \"stat\"?"),
    (('column = "stat"', 'column = "energy scale"'), None,
     "{toml}: [uncertainty 2]: 'energy scale' is uncertainty 1 already; give it a name of its own"),
    (("[[uncertainty]]", "[uncertainty]"), None, "{toml}: not TOML"),
    (None, ("1.25", "nan"), "{csv}: line 2, column sigma: nan: must be finite"),
    (None, ("1.25", "1,25"), "{csv}: line 2: 7 entries: there must be 6"),
    (None, ("1.25", ""), "{csv}: line 2, column sigma: no value, and no datum is made of this line"),
    (None, ("1.25", "1_0"), "{csv}: line 2, column sigma: '1_0' is not a number"),
    (None, ("2.0", "abc"), "{csv}: line 2, column stat: 'abc' is not a number"),
    (None, ("2.0", "inf"), "{csv}: line 2, column stat: inf: must be finite"),
    (None, ("0.001,", "1.3,"), "{csv}: line 2, column x: 1.3: x must lie in (0, 1]"),
    (None, ("0.001,12", "0.001,-12"), "{csv}: line 2, column Q2: -12: q2 must lie in (0, inf) GeV^2"),
    (None, ("0.001,12", "0.001,120"), "{csv}: line 2: y = 1.18667 from x, q2 and s: y must lie in (0, 1]"),
    (None, ("0.001,", "0.01,"), "{csv}: line 3: measures the same at the same point as {csv}: line 2"),
    (None, ("stat", "x"), "{csv}: line 1: column 'x' stands there twice"),
    (None, (CSV, ""), "{csv}: empty: the first line must name the columns"),
    (None, (CSV[CSV.index("\n"):], "\n"), "{csv}: no rows below the names of the columns"),
    (None, ('"second, quoted"', '"second'), "{csv}: line"),
]  # fmt: skip


@pytest.mark.parametrize(("description", "points", "message"), FILES, ids=[row[2][:60] for row in FILES])
def test_a_mistake_in_a_file_is_named(run, description, points, message):
    csv = run.with_suffix(".csv")
    for path, text, change in ((run, TOML, description), (csv, CSV, points)):
        if change is not None:
            assert change[0] in text
            path.write_text(text.replace(change[0], change[1], 1))
    with pytest.raises(
        InputError, match=re.escape(message.replace("{toml}", str(run)).replace("{csv}", str(csv)))
    ):
        Measurements.read(run)


#: Changes of a table of columns: points, matrices, description; and what is said.
COLUMNS = [
    ({"y": [0.5, 0.5, 0.5]}, (), {"columns": {"y": "y"}, "s": 1e4},
     "points: line 1, column y: 0.5, but x, q2 and s say 0.0100009: "
     "y must be q2/(x (s - M^2)) within 5 per cent"),
    ({"y": [1.5, 0.5, 0.5]}, (), {"columns": {"y": "y"}},
     "points: line 1, column y: 1.5: y must lie in (0, 1]"),
    ({"stat": [0.1, 0.0, 0.1]}, (), {}, "points: line 2: the datum has no uncertainty at all"),
    ({}, (), {"uncertainty": []}, "points: line 1: the datum has no uncertainty at all"),
    ({"value": [1.0, 0.0, 2.0]}, (), {"uncertainty": [STAT | {"scales_with": "value"}]},
     "points: line 2: stat scales with the value, which is 0: give it in percent"),
    ({}, (), {"uncertainty": [STAT | {"size": 1.0}]},
     "description: [uncertainty 1]: give one of column, size, or up with down"),
    ({}, (), {"uncertainty": [{"size": 1.0, **NOTHING}]},
     "description: [uncertainty 1] name: missing: a size without column needs a name"),
    ({}, (), {"uncertainty": [{"name": "a", "size": "x", **NOTHING}]},
     "description: [uncertainty 1] size = 'x': must be a finite number"),
    ({}, (), {"uncertainty": [STAT | {"down": "stat"}]},
     "description: [uncertainty 1] down: goes with up only"),
    ({}, (), {"uncertainty": [{"up": "stat", "down": "stat", **NOTHING}]},
     'description: [uncertainty 1] down: every shift down is positive, as are those up: write the sign, or '
     'down_as = "size"'),
    ({}, (), {"uncertainty": [{"up": "stat", "down": "stat", "down_as": "size", **NOTHING}]},
     "description: [uncertainty 1] asymmetric: missing"),
    ({}, (), {"uncertainty": [STAT | {"correlated": False, "shared_as": "k"}]},
     "description: [uncertainty 1] correlated: false, but shared_as names a common source"),
    ({}, (), {"uncertainty": [STAT | {"correlated": "yes"}]},
     "description: [uncertainty 1] correlated = 'yes': must be true or false"),
    ({}, (), {"uncertainty": STAT}, "must be an array of tables, [[uncertainty]]"),
    ({}, [np.eye(2)], {"covariance": [COVARIANCE]}, "file: 2 x 2 numbers for 3 data"),
    ({}, (), {"covariance": [COVARIANCE]}, "description: 1 [[covariance]] for 0 matrices"),
    ({}, [[[1.0, 2.0], [3.0]]], {"covariance": [COVARIANCE]}, "matrices[0]"),
    ({}, [EYE * [1, -1, 1]], {"covariance": [COVARIANCE]},
     "matrix 1: row 2: variance -1: a variance must not be negative"),
    ({}, [np.add(EYE, [[0, 0.1, 0], [0, 0, 0], [0, 0, 0]])], {"covariance": [COVARIANCE]},
     "matrix 1: row 1, column 2: 0.1 and 0: must be symmetric"),
    ({}, [np.add(EYE, [[0, 1.5, 0], [1.5, 0, 0], [0, 0, 0]])], {"covariance": [COVARIANCE]},
     "matrix 1: row 1: correlation 1.5 with row 2: must lie in [-1, 1]"),
    ({}, [[[1, 1, 0], [1, 0, 0], [0, 0, 1]]], {"covariance": [COVARIANCE]},
     "matrix 1: row 2: covariance 1 with row 1, but no variance"),
    ({}, [2 * EYE], {"covariance": [CORRELATION]}, "matrix 1: row 1: 2 on the diagonal: must be 1"),
    ({}, [EYE], {"covariance": [CORRELATION | {"of": "sta"}]},
     "description: [covariance 1] of = 'sta': no such uncertainty; there are 'stat'"),
    ({}, [EYE], {"uncertainty": [STAT | {"correlated": True}], "covariance": [CORRELATION]},
     "description: [covariance 1] of = 'stat': is one source for all data already"),
    ({}, [EYE], {"covariance": [CORRELATION | {"given_in": "value"}]},
     'description: [covariance 1] given_in: goes with kind = "covariance"; of says it here'),
    ({}, [EYE], {"covariance": [COVARIANCE | {"of": "stat"}]},
     'description: [covariance 1] of: goes with kind = "correlation"'),
    ({}, [EYE], {"covariance": [COVARIANCE | {"repair": "hope"}]},
     'description: [covariance 1] repair = \'hope\': must be one of "clip", "nearest"'),
    ({"value": [1.0, 0.0, 2.0]}, [EYE], {"covariance": [COVARIANCE | {"scales_with": "value"}]},
     "points: line 2: matrix 1 scales with the value, which is 0"),
    ({}, (), {"combination": RATIO | {"numerator": {"e": 1.0}}},
     "description: [combination] numerator: no row 'e'"),
    ({}, (), {"combination": RATIO | {"denominator": {}}},
     "description: [combination] rows: 'p' stands in no sum"),
    ({}, (), {"combination": RATIO | {"numerator": {}}},
     "description: [combination] numerator = {}: must be weights by row, { name = 1.0 }"),
    ({}, (), {"combination": RATIO | {"numerator": {"d": "1"}}},
     "description: [combination] numerator: d = '1': must be a finite number"),
    ({}, (), {"combination": RATIO | {"rows": {"d": {"target": "lead"}, "p": {}}}},
     "description: combination: rows: target = 'lead': must be one of"),
    ({}, (), {"combination": RATIO | {"rows": {"d": {"colour": 1}, "p": {}}}},
     "description: [combination.rows.d] colour: unknown key"),
    ({}, (), {"combination": RATIO, "datum": []}, "description: datum: [combination] is there too"),
    ({}, (), {"datum": [{"label": "a", "numerator": {"b": 1}}]},
     "description: datum: needs a label column: [columns] label"),
    ({"x": [0.1, 0.2]}, (), {}, "points = [2, 3]: columns must have one length, at least 1"),
    ({"x": []}, (), {}, "columns must have one length"),
    ({"stat": [0.1, None, 0.3]}, (), {}, "points: line 2, column stat: '' is not a number"),
    ({"stat": [0.1j, 1, 2]}, (), {}, "a column must be a list of numbers or of text"),
    ({}, 3, {}, "matrices = 3: matrices must be a list of arrays"),
]  # fmt: skip


@pytest.mark.parametrize(
    ("points", "matrices", "changes", "message"), COLUMNS, ids=[row[3][:60] for row in COLUMNS]
)
def test_a_mistake_in_columns_is_named(make, points, matrices, changes, message):
    with pytest.raises(InputError, match=re.escape(message)):
        make(points, matrices, **changes)


#: A word in a column, and what is said.
WORDS = [
    ("measures", "F4", "must be one of"),
    ("current", "weak", 'must be one of "neutral", "charged"'),
    ("exchange", "Z", 'must be one of "photon", "photon+Z", "W"'),
    ("beam", "e", 'must be one of "e-", "e+"'),
    ("target", "lead", 'must be one of "proton"'),
    ("target", "z=3 a=2", "or z and a with 0 <= z <= a"),
    ("tagged", "top", 'must be one of "charm", "bottom"'),
]


@pytest.mark.parametrize(("key", "word", "allowed"), WORDS)
def test_a_wrong_word_in_a_column_is_named_by_line_and_column(run, key, word, allowed):
    csv = run.with_suffix(".csv")
    lines = CSV.splitlines()
    head = next(line for line in TOML.splitlines() if line.startswith("[columns]"))
    kept = [line for line in TOML.splitlines() if not line.startswith(key)]
    run.write_text("\n".join(kept).replace(head, f'{head}\n{key} = "words"'))
    good = {"measures": "F2", "current": "neutral", "exchange": "photon", "beam": "e+", "target": "proton"}
    words = ["words", good.get(key, ""), *[word] * (len(lines) - 2)]
    csv.write_text("\n".join(f"{line},{w}" for line, w in zip(lines, words, strict=True)) + "\n")
    with pytest.raises(InputError, match=re.escape(f"{csv}: line 3, column words = ")) as caught:
        Measurements.read(run)
    assert allowed in str(caught.value)


LABELS = [
    (("low = 0.25", "lo = 0.25"), None, "[datum 1] numerator: no row 'lo'; did you mean \"low\"?"),
    (
        ('label = "bin"', 'label = "bon"'),
        None,
        "[datum 1] label = 'bon': no such line; did you mean \"bin\"?",
    ),
    (('label = "over"', 'label = "bin"'), None, "[datum 2] label = 'bin': stands there twice"),
    (("low = 0.25", "over = 0.25"), None, "[datum 1] numerator: no row 'over'"),
    (None, ("high,", "low,"), "line 3, column line: 'low' stands in"),
    (
        None,
        ("0.15,10,0.9,0.1", "0.15,10,,"),
        "line 4, column value: no value, and no datum is made of this line",
    ),
    (None, ("plain,0.3,10,0.5,0.1", "plain,0.3,10,0.5,"), "line 5, column stat: '' is not a number"),
]


@pytest.mark.parametrize(("description", "points", "message"), LABELS, ids=[row[2][:60] for row in LABELS])
def test_a_mistake_in_labels_is_named(tmp_path, description, points, message):
    for name, text, change in (("bins.toml", DESCRIPTION, description), ("bins.csv", POINTS, points)):
        changed = text if change is None else text.replace(change[0], change[1], 1)
        assert change is None or changed != text
        (tmp_path / name).write_text(changed)
    with pytest.raises(InputError, match=re.escape(message)):
        Measurements.read(tmp_path / "bins.toml")


def test_files_that_are_not_there_are_store_errors(run):
    with pytest.raises(StoreError, match=r"none\.toml: cannot be read: no such file"):
        Measurements.read(run.with_name("none.toml"))
    run.with_suffix(".csv").unlink()
    with pytest.raises(StoreError, match=r"run1\.csv: cannot be read: no such file"):
        Measurements.read(run)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("1,2,3\n4,5\n7,8,9\n", r"m\.csv: line 2: 2 entries: there must be 3, as in the first line"),
        ("1,2,3\n4,x,6\n7,8,9\n", r"m\.csv: line 2, column 2: 'x' is not a number"),
        ("1,2,3\n4,nan,6\n7,8,9\n", r"m\.csv: line 2, column 2: nan: must be finite"),
        ("\n\n", r"m\.csv: empty: there must be a matrix"),
    ],
)
def test_a_mistake_in_a_matrix_file_is_named(run, text, message):
    run.with_name("m.csv").write_text(text)
    run.write_text(
        TOML
        + '\n[[covariance]]\nfile = "m.csv"\nkind = "covariance"\n'
        + 'given_in = "value"\nscales_with = "nothing"\n'
    )
    with pytest.raises(InputError, match=message):
        Measurements.read(run)


@pytest.mark.parametrize("tables", ["[]", '"a.toml"', "[1]"])
def test_a_list_of_tables_must_be_one(tmp_path, tables):
    (tmp_path / "all.toml").write_text(f"tables = {tables}\n")
    with pytest.raises(InputError, match=r"all\.toml: tables = .*: must be names of files"):
        Measurements.read(tmp_path / "all.toml")


def test_a_table_cannot_be_joined_twice(make):
    with pytest.raises(InputError, match="table 'A' stands there twice: titles must differ"):
        Measurements.join([make(), make()])
    for wrong in ([], None, [1], 7):
        with pytest.raises(InputError, match="parts must be a list of Measurements, at least one"):
            Measurements.join(wrong)


def test_a_reference_must_fit(make):
    for method in ("covariance", "nuisance"):
        with pytest.raises(InputError, match=r"the shape of reference must be \(3\)"):
            getattr(make(), method)([1.0])
        with pytest.raises(InputError, match="reference = inf at index 1: reference must be finite"):
            getattr(make(), method)([1.0, float("inf"), 1.0])


def test_other_values_must_fit(make):
    with pytest.raises(InputError, match=r"the shape of values must be \(3\)"):
        make().with_values([1.0])


@pytest.mark.parametrize("wrong", [None, 7, [1, 2], "abc"])
def test_columns_must_be_a_mapping(wrong):
    with pytest.raises(InputError, match="points must map names of columns to lists or arrays"):
        Measurements.from_columns({"title": "A"}, wrong)
    with pytest.raises(InputError, match="description must be a mapping, as TOML has it"):
        Measurements.from_columns(wrong, {"x": [0.1]})
