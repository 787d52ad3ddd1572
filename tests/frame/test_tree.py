"""Holds the top level of the project, so that everything has one place."""

from __future__ import annotations

import subprocess
from pathlib import Path

import pytest

TOP = {
    "DEVELOPERS.md",
    "README.md",
    "pyproject.toml",
    "sample_machines",
    "schemas",
    "sheets",
    "templates",
    "tests",
}


def tracked(root: Path) -> list[str]:
    if not (root / ".git").exists():
        pytest.skip("an unpacked source archive keeps no list of tracked files")
    done = subprocess.run(["git", "ls-files", "-z"], cwd=root, capture_output=True, text=True, check=True)
    return [name for name in done.stdout.split("\0") if name]


def test_top_level_holds_these_and_nothing_else(root: Path) -> None:
    names = {name.split("/")[0] for name in tracked(root)}
    assert {name for name in names if not name.startswith(".")} == TOP


def test_nothing_made_is_tracked(root: Path) -> None:
    made = {"__pycache__", ".venv", "dist", "build", ".mypy_cache", ".pytest_cache", ".ruff_cache"}
    wrong = [name for name in tracked(root) if made & set(name.split("/")) or name.endswith((".pyc", ".pdf"))]
    assert wrong == []
