"""Every public function says what it takes, gives and raises; the examples in the documentation run."""

from __future__ import annotations

import doctest
import importlib
import inspect
import pkgutil
import re
from collections.abc import Callable, Iterator
from typing import Any

import pytest
import scalewright

HEADING = re.compile(r"^(\w[\w ]+)\n-+$", re.MULTILINE)
ORDER = [
    "Parameters",
    "Attributes",
    "Returns",
    "Yields",
    "Raises",
    "Warns",
    "See Also",
    "Notes",
    "References",
    "Examples",
]


def modules() -> list[str]:
    """Return the names of all modules of the package that are written in Python."""
    found = pkgutil.walk_packages(scalewright.__path__, "scalewright.")
    return ["scalewright", *sorted(module.name for module in found if not module.name.endswith("._core"))]


def public() -> Iterator[tuple[str, Callable[..., Any]]]:
    """Yield functions, classes and methods a user can reach, by name."""
    for name in scalewright.__all__:
        value = getattr(scalewright, name)
        yield name, value
        if inspect.isclass(value):
            for inner, member in inspect.getmembers(value, inspect.isroutine):
                owner = getattr(member, "__module__", "") or ""
                if not inner.startswith("_") and owner.startswith("scalewright"):
                    yield f"{name}.{inner}", member


FUNCTIONS = {name: value for name, value in public() if inspect.isroutine(value)}
CLASSES = {name: value for name, value in public() if inspect.isclass(value)}


def sections(value: Callable[..., Any]) -> list[str]:
    """Return the headings of a docstring in their order."""
    return HEADING.findall(inspect.getdoc(value) or "")


def parameters(function: Callable[..., Any]) -> list[str]:
    """Return the names of the parameters without self and cls."""
    names = inspect.signature(function).parameters
    return [name for name in names if name not in ("self", "cls")]


@pytest.mark.parametrize("name", [*FUNCTIONS, *CLASSES])
def test_the_first_line_is_one_sentence(name: str) -> None:
    text = inspect.getdoc({**FUNCTIONS, **CLASSES}[name]) or ""
    first = text.partition("\n\n")[0]
    assert first.endswith("."), f"{name}: {first!r}"
    assert first[:1].isupper() or first.startswith("x f(x)"), f"{name}: {first!r}"


@pytest.mark.parametrize("name", [*FUNCTIONS, *CLASSES])
def test_sections_are_known_and_in_order(name: str) -> None:
    found = sections({**FUNCTIONS, **CLASSES}[name])
    assert found == sorted(found, key=ORDER.index), name


@pytest.mark.parametrize("name", FUNCTIONS)
def test_every_parameter_is_described(name: str) -> None:
    function = FUNCTIONS[name]
    names, text = parameters(function), inspect.getdoc(function) or ""
    if not names:
        return
    assert "Parameters" in sections(function), name
    described = _entries(text.partition("Parameters\n")[2])
    for parameter in names:
        assert re.search(rf"^(\w+, )*{parameter}(, \w+)*( :|$)", described, re.MULTILINE), (
            f"{name}: {parameter}"
        )


def _entries(text: str) -> str:
    """Return the lines of a docstring that are not indented."""
    return "\n".join(line for line in text.splitlines() if not line.startswith(" "))


@pytest.mark.parametrize("name", FUNCTIONS)
def test_what_is_returned_is_described(name: str) -> None:
    function = FUNCTIONS[name]
    returned = inspect.signature(function).return_annotation
    if returned in ("None", None, inspect.Signature.empty) or not parameters(function):
        return  # what a function without arguments returns is its first sentence
    assert {"Returns", "Yields"} & set(sections(function)), f"{name} -> {returned}"


@pytest.mark.parametrize("name", CLASSES)
def test_a_class_describes_what_it_is_made_of(name: str) -> None:
    kind = CLASSES[name]
    if issubclass(kind, BaseException) or name == "Operators":  # made by functions, not by hand
        return
    assert {"Parameters", "Attributes"} & set(sections(kind)), name


@pytest.mark.parametrize("module", modules())
def test_every_module_says_what_it_is_for(module: str) -> None:
    text = importlib.import_module(module).__doc__ or ""
    assert text.partition("\n")[0].endswith((".", ":", ";")), module


@pytest.mark.parametrize("module", modules())
def test_examples_run(module: str) -> None:
    report: list[str] = []
    runner = doctest.DocTestRunner(optionflags=doctest.ELLIPSIS | doctest.NORMALIZE_WHITESPACE)
    for example in doctest.DocTestFinder(exclude_empty=True).find(importlib.import_module(module)):
        runner.run(example, out=report.append)
    assert not report, "".join(report)


def test_the_main_steps_have_examples() -> None:
    for name in ("ChebyshevGrid", "Theory", "Densities", "Operators", "build_operators", "evolve"):
        assert "Examples" in sections(getattr(scalewright, name)), name
