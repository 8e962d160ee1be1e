"""TOML sections: keys that are not known, values that are missing, files that are not TOML."""

import pytest
from scalewright.errors import InputError, RangeError, StoreError
from scalewright.files import toml

JOB = """
[theory]
order = "NLO"
[theory.coupling]
alpha_s = 0.118
[output]
q2 = [3.0, 10.0]
file = ""
"""


@pytest.fixture
def job(tmp_path):
    path = tmp_path / "job.toml"
    path.write_text(JOB)
    return toml.load(path)


def test_values_are_read(job):
    assert job.section("theory").text("order") == "NLO"
    assert job.section("theory").section("coupling").get("alpha_s") == 0.118
    assert job.section("output").get("q2") == [3.0, 10.0]
    assert job.section("output").get("nf", None) is None
    assert job.section("grid", {}).get("x_min", 1e-7) == 1e-7


@pytest.mark.parametrize(
    ("ask", "says"),
    [
        (lambda job: job.only("theory", "grid"), r"job\.toml: output: unknown key \(known: theory, grid\)"),
        (
            lambda job: job.section("theory").only("orders", "coupling"),
            r'job\.toml: \[theory\] order: unknown key; did you mean "orders"\? \(known: orders, coupling\)',
        ),
        (lambda job: job.section("grid"), r"job\.toml: grid: missing"),
        (lambda job: job.section("theory").get("masses"), r"job\.toml: \[theory\] masses: missing"),
        (lambda job: job.section("theory").section("order"), r"\[theory\] order = 'NLO': must be a table"),
        (
            lambda job: job.section("output").text("q2"),
            r"\[output\] q2 = \[3.0, 10.0\]: must be text in quotes",
        ),
        (lambda job: job.section("output").text("file"), r"\[output\] file = '': must be text"),
    ],
)
def test_what_is_wrong_is_named_with_its_place(job, ask, says):
    with pytest.raises(InputError, match=says):
        ask(job)


def test_the_place_stands_before_the_message_of_others(job):
    coupling = job.section("theory").section("coupling")
    with (
        pytest.raises(InputError, match=r"job\.toml: \[theory\.coupling\] q2: too low$"),
        coupling.blame("q2"),
    ):
        raise InputError("too low")
    with pytest.raises(RangeError, match=r"job\.toml: \[theory\.coupling\]: too far$"), coupling.blame():
        raise RangeError("too far")
    with pytest.raises(StoreError, match=r"^a\.h5: damaged$"), coupling.blame():
        raise StoreError("a.h5: damaged")


@pytest.mark.parametrize(
    ("data", "says"),
    [
        (b"order = ", r"not TOML: invalid value \(at end of document\)"),
        (b"a = 1\na = 2\n", r"not TOML: cannot overwrite a value \(at line 2, column 6\)"),
        (b"a = 1\nb = '\xff'", r"not UTF-8 text \(line 2, byte 0xff\)"),
        (b"\x89PNG\r\n\x1a\n", r"not UTF-8 text \(line 1, byte 0x89\)"),
        (b"a = " + b"[" * 100_000, "nested too deeply"),
    ],
    ids=["cut", "twice", "latin", "picture", "deep"],
)
def test_what_is_not_toml_is_named(tmp_path, data, says):
    (tmp_path / "a.toml").write_bytes(data)
    with pytest.raises(InputError, match=says):
        toml.load(tmp_path / "a.toml")


def test_line_ends_and_byte_order_mark_do_not_matter(tmp_path):
    (tmp_path / "a.toml").write_bytes(b"\xef\xbb\xbfa = 1\r\n[b]\r\nc = '''x\r\ny'''\r\n")
    top = toml.load(tmp_path / "a.toml")
    assert top.get("a") == 1
    assert top.section("b").text("c") == "x\ny"


def test_a_file_that_cannot_be_read_is_a_store_error(tmp_path):
    with pytest.raises(StoreError, match="cannot be read: no such file"):
        toml.load(tmp_path / "none.toml")


def test_names_are_relative_to_the_job():
    assert toml.beside("/a/b/job.toml", "c/in.csv") == "/a/b/c/in.csv"
    assert toml.beside("job.toml", "in.csv") == "in.csv"
    assert toml.beside("/a/job.toml", "/c/in.csv") == "/c/in.csv"
