"""Writes machine files to begin with."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from sheets.machine.starters import Starter, starters, write_starter
from sheets.wording.plain import columns


def new(kind: str, target: Path) -> Starter:
    """Writes the starter of a circuit family to a file that isn't there yet. Raises InputError."""
    return write_starter(kind, target)


def starter_kinds() -> Iterator[str]:
    """One line a starter."""
    return columns([(one.kind, one.sentence) for one in starters()])
