"""Names say what a thing is: no drawer for anything, one word for one thing, subjects of files small."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from house.tree import ROOT

SOURCES = sorted(
    path
    for folder in ("rust", "python", "tests", "benches")
    for suffix in ("*.rs", "*.py", "*.pyi", "*.toml")
    for path in (ROOT / folder).rglob(suffix)
    if path != Path(__file__).resolve()
)
# Tests may quote a wrong word to see it refused.
PUBLIC_SOURCES = [path for path in SOURCES if path.relative_to(ROOT).parts[0] in ("rust", "python")]
DOCUMENTS = [path for path in (ROOT / "README.md", ROOT / "DEVELOPERS.md") if path.exists()]

DRAWERS = {"util", "utils", "helper", "helpers", "misc", "hacks", "common", "stuff", "tools", "base", "lib2"}
# Synonyms of words that have been chosen: the second is the one to use.
SYNONYMS = {
    r"\bflavor": "flavour",
    r"\bn_f\b": "nf",
    r"\bxgrid\b": "grid",
    r"\bx_?points\b": "nodes",
}
# No file is longer, and nine in ten are shorter than the second number; printed coefficients do not count.
LONGEST, LONG = 600, 400
TABLES = {"nnlo_nonsinglet.rs", "nnlo_singlet.rs", "nnlo_heavy.rs", "nnlo_light.rs", "polylog.rs"}


def name(path: Path) -> str:
    """Return a path as it is shown in a message."""
    return str(path.relative_to(ROOT))


@pytest.mark.parametrize("path", SOURCES, ids=name)
def test_no_file_is_a_drawer_for_anything(path: Path) -> None:
    parts = {part.strip("_").lower() for part in path.relative_to(ROOT).with_suffix("").parts}
    assert not parts & DRAWERS, name(path)
    assert not re.search(r"(\d|_new|_old|_final)$", path.stem.replace("hdf5", "").replace("_1980", "")), name(
        path
    )


@pytest.mark.parametrize("path", [*PUBLIC_SOURCES, *DOCUMENTS], ids=name)
def test_one_word_for_one_thing(path: Path) -> None:
    for number, line in enumerate(path.read_text("utf-8").splitlines(), start=1):
        for wrong, right in SYNONYMS.items():
            assert not re.search(wrong, line), f"{name(path)}:{number}: {line.strip()!r}: say {right}"


def test_a_file_can_be_read_at_one_sitting() -> None:
    lines = {
        name(path): len(path.read_text("utf-8").splitlines()) for path in SOURCES if path.name not in TABLES
    }
    assert not {path: count for path, count in lines.items() if count > LONGEST}
    long = {path: count for path, count in lines.items() if count > LONG}
    assert 10 * len(long) < len(lines), long


@pytest.mark.parametrize("path", SOURCES, ids=name)
def test_nothing_is_left_for_later(path: Path) -> None:
    found = re.search(r"\b(TODO|FIXME|XXX|HACK)\b", path.read_text("utf-8"))
    assert found is None, name(path)


def test_the_top_of_the_tree_is_as_agreed() -> None:
    allowed = {
        "Cargo.lock", "Cargo.toml", "DEVELOPERS.md", "LICENSE", "README.md", "pyproject.toml",
        "benches", "python", "rust", "tests",
    }  # fmt: skip
    made_by_a_build = {"target", "dist"}
    found = {path.name for path in ROOT.iterdir() if not path.name.startswith(".")}
    assert found - made_by_a_build <= allowed
