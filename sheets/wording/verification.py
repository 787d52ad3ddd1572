"""What a verification says to people. It gets plain words, no value of a side branch."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from sheets.wording.sentences import Sentences


@dataclass(frozen=True, kw_only=True)
class Judged:
    """One of the three parts, with its word and its lines."""

    part: str
    """signatures, content, currency."""
    word: str
    """good, bad, not established."""
    lines: tuple[str, ...]


def sentences(language: str = "en") -> Sentences:
    """Sentences of a verification."""
    return Sentences(language, "verify.j2")


def verification_lines(file: str, parts: Sequence[Judged]) -> Iterator[str]:
    """The three parts, each with its word first."""
    said = sentences()
    yield file
    for one in parts:
        yield f"  {said.say(one.part)}: {one.word}"
        yield from (f"      {line}" for line in one.lines)
