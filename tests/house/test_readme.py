"""What README.md and DEVELOPERS.md say is so: the examples run, the commands exist, the files are there."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

import pytest
from house.tree import README, ROOT

DEVELOPERS = ROOT / "DEVELOPERS.md"
BLOCK = re.compile(r"^```(\w+)\n(.*?)^```$", re.MULTILINE | re.DOTALL)
COMMANDS = ("demo", "evolve", "predict", "fit", "closure", "info")


def blocks(path: Path, language: str) -> list[str]:
    """Return the fenced blocks of one language."""
    return [text for kind, text in BLOCK.findall(path.read_text("utf-8")) if kind == language]


def test_the_python_examples_run_one_after_another(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    _write_run1(tmp_path)
    examples = blocks(README, "python")
    assert examples
    names: dict[str, object] = {"__name__": "readme"}
    for example in examples:
        exec(compile(example, str(README), "exec"), names)


def _write_run1(folder: Path) -> None:
    """Write the table that the examples read: one of those that ship, under the name used there."""
    campaign = ROOT / "python" / "scalewright" / "data" / "campaign"
    description = (campaign / "nc_positron_low.toml").read_text("utf-8")
    (folder / "run1.toml").write_text(description.replace("nc_positron_low.csv", "run1.csv"), "utf-8")
    (folder / "run1.csv").write_bytes((campaign / "nc_positron_low.csv").read_bytes())


def test_there_is_one_command_for_the_tests_and_one_for_the_main_job() -> None:
    lines = "\n".join(blocks(README, "sh")).splitlines()
    assert len([line for line in lines if line.endswith("bin/pytest")]) == 1
    assert len([line for line in lines if line.endswith("bin/scalewright demo")]) == 1


def test_every_command_of_the_program_that_is_named_exists() -> None:
    from scalewright.cli.main import main

    named = set(re.findall(r"\bscalewright (\w+)", "\n".join(blocks(README, "sh"))))
    assert named <= set(COMMANDS)
    for command in named:
        assert main([command, "--help"]) == 0


def test_every_dependency_has_its_reason() -> None:
    text = DEVELOPERS.read_text("utf-8")
    project = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["project"]
    extras = project["optional-dependencies"]
    for requirement in [*project["dependencies"], *extras["plot"], *extras["test"], *extras["lint"]]:
        name = re.split(r"[<>=\[]", requirement)[0]
        assert f"`{name}`" in text, f"DEVELOPERS.md gives no reason for {name}"
    for member in ("core", "binding"):
        manifest = tomllib.loads((ROOT / "rust" / member / "Cargo.toml").read_text("utf-8"))
        for crate in [*manifest.get("dependencies", {}), *manifest.get("dev-dependencies", {})]:
            assert crate == "scalewright-core" or f"`{crate}`" in text, (
                f"DEVELOPERS.md gives no reason for {crate}"
            )


@pytest.mark.parametrize("document", [README, DEVELOPERS], ids=lambda path: path.name)
def test_every_file_that_is_named_is_there(document: Path) -> None:
    text = BLOCK.sub("", document.read_text("utf-8"))
    for target in re.findall(r"\]\((?!https?:)([^)#]+)", text):
        assert (ROOT / target).exists(), f"{document.name}: {target}"
    for path in re.findall(r"`((?:rust|python|tests|benches|\.ci)/[\w./]+)`", text):
        assert (ROOT / path).exists(), f"{document.name}: {path}"
