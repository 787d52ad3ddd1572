"""Values of a starter that are still to be filled in: asked for by name, and never read as wrong values."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Any, Final

from sheets.machine.fields import Entry
from sheets.machine.flaws import Flaw, Path
from sheets.machine.reading import FileText
from sheets.machine.reporting import example_at

BLANK: Final = "STILL-BLANK"
"""Stands in a starter for every value that only the machine itself can tell."""
_COMMENT: Final = re.compile(re.escape(BLANK) + r".*?\s#\s*(?P<advice>.+)$")
_LONGEST_ADVICE: Final = 200


def find_blanks(text: FileText, source: bytes, model: type[Entry]) -> tuple[Flaw, ...]:
    """A flaw for each blank, in the order of the file, with what its comment says to write there."""
    found = tuple(_blanks(text.data, ()))
    lines = source.decode("utf-8", errors="replace").split("\n") if found else []
    return tuple(
        Flaw(
            at=path,
            what=_advice(_line_of(path, text, lines)) or _plain_advice(path, text, model),
            fix=f"Write it in place of {BLANK}.",
        )
        for path in found
    )


def _blanks(value: Any, path: Path) -> Iterator[Path]:
    if value == BLANK:
        yield path
    elif isinstance(value, dict):
        for key, item in value.items():
            yield from _blanks(item, (*path, key))
    elif isinstance(value, list):
        for place, item in enumerate(value):
            yield from _blanks(item, (*path, place))


def _line_of(path: Path, text: FileText, lines: list[str]) -> str:
    number = text.lines.get(path, 0)
    return lines[number - 1] if 0 < number <= len(lines) else ""


def _advice(line: str) -> str:
    """What the comment behind a blank says, as a sentence; empty without one."""
    match = _COMMENT.search(line)
    said = match["advice"].strip() if match else ""
    plain = "".join(sign for sign in said[:_LONGEST_ADVICE] if sign.isprintable()).rstrip(".")
    return f"{plain[:1].upper()}{plain[1:]}." if plain else ""


def _plain_advice(path: Path, text: FileText, model: type[Entry]) -> str:
    example = example_at(model, text.data, path)
    return "Read it off the machine or its data sheet" + (f", such as {example}." if example else ".")
