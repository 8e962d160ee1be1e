"""A module imports only from those before it: the direction lists of DEVELOPERS.md, held to the sources."""

from __future__ import annotations

import ast
import re
from collections.abc import Iterable, Sequence

import pytest
from house.tree import BINDING, CORE, PACKAGE, sources

# Modules of one line do not know each other.
RUST_LAYERS = (
    ("error",),
    ("watch", "threads"),
    ("numerics",),
    ("colour",),
    ("grid", "coupling"),
    ("theory", "kernels"),
    ("convolution",),
    ("evolution",),
    ("thresholds",),
    ("apply",),
    ("observables",),
)
# The formulas are pure functions: of what stands before them they know no more than this.
KERNELS_KNOW = {"numerics", "colour", "coupling::masses::MassKind"}

PYTHON_LAYERS = (
    ("errors",),
    ("_check", "_display"),
    ("_progress",),
    ("files",),
    ("flavours", "parameters", "below", "kernels", "_route", "_flows", "_describe"),
    ("theory", "grid"),
    ("_resolution",),
    ("_nodal", "_stored_densities", "_sums"),
    ("_questions",),
    ("densities",),
    ("_carry", "_composed", "_stored_operators"),
    ("operators",),
    ("build",),
    ("_measured",),
    ("measurements",),
    ("electroweak", "kinematics"),
    ("_observed",),
    ("_corrected",),
    ("corrections",),
    ("observables", "forward"),
    ("moments",),
    ("fitting",),
    ("closure",),
    ("plot",),
    ("plot_data", "plot_fit"),
    ("report",),
    ("cli",),
)
# Against the direction, with the reason: reading a file makes the object.
LATE = {("_stored_operators", "operators")}
SLOW_IMPORTS = {"scipy", "matplotlib", "h5py"}

RUST_SOURCES = sources(CORE, ".rs")
PYTHON_SOURCES = sources(PACKAGE, ".py")


def rank(name: str, layers: Sequence[Sequence[str]]) -> int:
    """Return the place of a top-level module in the list."""
    for place, layer in enumerate(layers):
        if name in layer:
            return place
    raise AssertionError(f"{name}: not in the list of layers of {__name__}; give it a place")


def uses(text: str) -> set[str]:
    """Return what a Rust source takes from its own crate: "grid::Grid", groups in braces taken apart."""
    text = re.sub(r"//[^\n]*", "", text)
    found: set[str] = set()
    for start in re.finditer(r"\bcrate::", text):
        found |= set(_paths(text, start.end()))
    return found


def _paths(text: str, place: int) -> Iterable[str]:
    """Yield the paths that begin at a place: one, or all of a group in braces, groups within it included."""
    head = re.compile(r"[\w:\s]*").match(text, place)
    assert head is not None
    path = "".join(head[0].partition(" as ")[0].split())
    if text[head.end() : head.end() + 1] != "{":
        yield path
        return
    depth, begin = 0, head.end() + 1
    for at in range(head.end(), len(text)):
        depth += {"{": 1, "}": -1}.get(text[at], 0)
        if depth == 0 or (depth == 1 and text[at] == ","):
            if text[begin:at].strip():
                yield from (path + inner for inner in _paths(text, begin))
            begin = at + 1
        if depth == 0:
            return


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("use crate::grid::Grid;", {"grid::Grid"}),
        ("pub use crate::coupling::masses::MassKind as Kind;", {"coupling::masses::MassKind"}),
        ("use crate::grid::{self, Grid};", {"grid::self", "grid::Grid"}),
        ("use crate::{\n    colour::CA,\n    apply::{batch::Batch, compose},\n};",
         {"colour::CA", "apply::batch::Batch", "apply::compose"}),
        ("let x = crate::watch::poll(); // crate::apply", {"watch::poll"}),
    ],
)  # fmt: skip
def test_what_a_source_uses_is_read_rightly(text: str, expected: set[str]) -> None:
    assert uses(text) == expected


def is_allowed(user: str, used: str, layers: Sequence[Sequence[str]]) -> bool:
    """Say whether one top-level module may know another."""
    return user == used or rank(used, layers) < rank(user, layers)


def test_every_module_has_its_place() -> None:
    for names, layers in ((RUST_SOURCES, RUST_LAYERS), (PYTHON_SOURCES, PYTHON_LAYERS)):
        for module in names:
            if module not in ("lib", ""):
                rank(module.split(".")[0], layers)


@pytest.mark.parametrize("module", sorted(name for name in RUST_SOURCES if name != "lib"))
def test_a_core_module_knows_only_those_before_it(module: str) -> None:
    top = module.split(".")[0]
    for used in uses(RUST_SOURCES[module]):
        assert is_allowed(top, used.split("::")[0], RUST_LAYERS), f"{module} must not use crate::{used}"


def test_formulas_know_neither_grid_nor_coupling() -> None:
    for module, text in RUST_SOURCES.items():
        if module.split(".")[0] == "kernels":
            for used in uses(text):
                known = used.split("::")[0] in {"kernels", "numerics", "colour"} or used in KERNELS_KNOW
                assert known, f"{module} must not use crate::{used}"


def test_the_numerics_have_no_word_of_physics() -> None:
    physics = re.compile(r"\b(alpha_s|parton|quark|gluon|flavou?r|nf|pdf|q2|coupling)\b", re.IGNORECASE)
    for module, text in RUST_SOURCES.items():
        if module.split(".")[0] == "numerics":
            found = physics.search(text)
            assert found is None, f"{module} says {found}"


def test_the_core_knows_neither_python_nor_numpy() -> None:
    for module, text in RUST_SOURCES.items():
        assert not re.search(r"\b(pyo3|numpy)::", text), module


def test_only_one_file_calls_the_matrix_library() -> None:
    # Others may hand on its views of matrices, and do nothing with them.
    callers = {module for module, text in RUST_SOURCES.items() if re.search(r"\bfaer::(?!MatRef;)", text)}
    assert callers == {"numerics.blocks"}


def test_only_one_file_of_the_border_releases_the_interpreter() -> None:
    callers = {module for module, text in sources(BINDING, ".rs").items() if "py.detach" in text}
    assert callers == {"detached"}


def imports(text: str, module: str, *, at_load: bool) -> Iterable[str]:
    """Yield absolute names of what a Python source imports; `at_load`: outside functions and type checks."""
    package = ["scalewright", *module.split(".")][:-1] if module else ["scalewright"]
    for node in _nodes(ast.parse(text), at_load):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            parts = package[: len(package) - node.level + 1] if node.level else []
            base = ".".join([*parts, *([node.module] if node.module else [])])
            if base == "scalewright" or (node.level and not node.module):
                yield from (f"{base}.{alias.name}" for alias in node.names)
            else:
                yield base


def _nodes(tree: ast.AST, at_load: bool) -> Iterable[ast.AST]:
    """Yield nodes that run when the module is loaded, or all of them; never those under TYPE_CHECKING."""
    for node in ast.iter_child_nodes(tree):
        if isinstance(node, ast.If) and ast.unparse(node.test) == "TYPE_CHECKING":
            continue
        if at_load and isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef | ast.Lambda):
            continue
        yield node
        yield from _nodes(node, at_load)


def own(names: Iterable[str]) -> Iterable[str]:
    """Yield top-level modules of this package among absolute names."""
    for name in names:
        head, _, rest = name.partition(".")
        if head == "scalewright" and rest and not rest.startswith("_core"):
            yield rest


@pytest.mark.parametrize("module", sorted(name for name in PYTHON_SOURCES if name))
def test_a_python_module_knows_only_those_before_it(module: str) -> None:
    top = module.split(".")[0]
    for used in own(imports(PYTHON_SOURCES[module], module, at_load=False)):
        used_top = used.split(".")[0]
        allowed = (top, used_top) in LATE or is_allowed(top, used_top, PYTHON_LAYERS)
        assert allowed, f"{module} must not import {used}"


@pytest.mark.parametrize("module", sorted(name for name in PYTHON_SOURCES if name))
def test_formats_and_commands_do_not_know_their_siblings(module: str) -> None:
    # A command knows the report and the jobs; a format only how files are written whole.
    siblings = {
        "files": {"whole"},
        "cli": {
            "benchmark",
            "campaign",
            "correction_job",
            "fit_job",
            "fitted",
            "jobs",
            "report",
            "results",
            "scale_job",
            "shape_job",
            "written",
        },
    }
    top, _, inner = module.partition(".")
    if not inner or top not in siblings or inner == "main":
        return
    for used in own(imports(PYTHON_SOURCES[module], module, at_load=False)):
        used_top, _, used_inner = used.partition(".")
        if used_top == top and used_inner:
            assert used_inner in siblings[top], f"{module} must not import {used}"


def test_no_ring_of_imports() -> None:
    graph = {
        module: {used for used in own(imports(text, module, at_load=True)) if used in PYTHON_SOURCES}
        for module, text in PYTHON_SOURCES.items()
        if module
    }
    done: set[str] = set()

    def visit(module: str, path: tuple[str, ...]) -> None:
        assert module not in path, " -> ".join((*path, module))
        if module not in done:
            for used in graph[module]:
                visit(used, (*path, module))
            done.add(module)

    for module in graph:
        visit(module, ())


@pytest.mark.parametrize("module", sorted(PYTHON_SOURCES))
def test_slow_libraries_are_imported_where_they_are_used(module: str) -> None:
    # `import scalewright` is to take no longer than numpy does.
    loaded = {name.split(".")[0] for name in imports(PYTHON_SOURCES[module], module, at_load=True)}
    assert not loaded & SLOW_IMPORTS, module


def test_only_pictures_know_matplotlib() -> None:
    users = {
        module
        for module, text in PYTHON_SOURCES.items()
        if any(name.startswith("matplotlib") for name in imports(text, module, at_load=False))
    }
    assert users <= {"plot", "plot_data", "plot_fit"}
