"""Where the sources stand, for the tests that read them."""

from __future__ import annotations

from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
CORE = ROOT / "rust" / "core" / "src"
BINDING = ROOT / "rust" / "binding" / "src"
PACKAGE = ROOT / "python" / "scalewright"
README = ROOT / "README.md"


def module_name(path: Path, root: Path) -> str:
    """Return "grid.panels" for grid/panels.rs, "grid" for grid/mod.rs and grid/__init__.py."""
    parts = list(path.relative_to(root).with_suffix("").parts)
    if parts[-1] in ("mod", "__init__"):
        parts.pop()
    return ".".join(parts)


def sources(root: Path, suffix: str) -> dict[str, str]:
    """Return the text of every source file by module name."""
    return {module_name(path, root): path.read_text("utf-8") for path in sorted(root.rglob(f"*{suffix}"))}
