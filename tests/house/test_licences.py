"""Every crate that is compiled in may be given on under a permissive licence."""

from __future__ import annotations

import json
import re
import shutil
import subprocess

import pytest
from house.tree import ROOT

ALLOWED = {
    "0BSD",
    "Apache-2.0",
    "Apache-2.0 WITH LLVM-exception",
    "BSD-2-Clause",
    "BSD-3-Clause",
    "BSL-1.0",
    "ISC",
    "MIT",
    "MIT-0",
    "Unicode-3.0",
    "Unlicense",
    "Zlib",
}


def is_permissive(expression: str) -> bool:
    """Say whether an SPDX expression can be satisfied from the list."""
    # The old form "MIT/Apache-2.0" means OR. A bracket is a group of its own.
    text = expression.replace("/", " OR ")
    while group := re.search(r"\(([^()]*)\)", text):
        text = text.replace(group[0], "MIT" if is_permissive(group[1]) else "refused")
    return any(
        all(part.strip() in ALLOWED for part in choice.split(" AND ")) for choice in text.split(" OR ")
    )


@pytest.mark.parametrize(
    ("expression", "permissive"),
    [
        ("MIT", True),
        ("MIT/Apache-2.0", True),
        ("LGPL-3.0-only", False),
        ("LGPL-3.0-only OR MIT", True),
        ("MIT AND LGPL-3.0-only", False),
        ("(MIT OR Apache-2.0) AND Unicode-3.0", True),
        ("(LGPL-3.0-only OR GPL-3.0-only) AND MIT", False),
    ],
)
def test_expressions_are_read_rightly(expression: str, permissive: bool) -> None:
    assert is_permissive(expression) is permissive


def test_every_crate_is_permissive() -> None:
    if shutil.which("cargo") is None:
        pytest.skip("cargo is not on this machine")
    command = ["cargo", "metadata", "--offline", "--locked", "--format-version", "1"]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    if done.returncode != 0 and "--offline" in done.stderr:
        pytest.skip("the crates have not been fetched on this machine")
    assert done.returncode == 0, done.stderr
    crates = json.loads(done.stdout)["packages"]
    assert len(crates) > 10
    wrong = {
        f"{crate['name']}: {crate['license']}"
        for crate in crates
        if not is_permissive(crate["license"] or "")
    }
    assert not wrong


def test_our_own_licence_is_said_alike_everywhere() -> None:
    texts = [(ROOT / name).read_text("utf-8") for name in ("Cargo.toml", "pyproject.toml")]
    assert all('license = "MIT"' in text for text in texts)
    assert (ROOT / "LICENSE").read_text("utf-8").startswith("MIT License")
