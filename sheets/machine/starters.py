"""Starters: commented machine files for a family of circuits, whose plate values are blanks to fill in."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from sheets.errors import InputError, Problem, nearest, quoted
from sheets.resources import resource_folder

_FOLDER = "starters"


@dataclass(frozen=True, kw_only=True)
class Starter:
    """A machine file to begin with."""

    kind: str
    """Its name, which is its file's name too."""
    sentence: str
    """What circuit it is for: its first comment line."""
    text: bytes


def starters() -> tuple[Starter, ...]:
    """All starters, by name."""
    return tuple(_starter(file) for file in sorted((resource_folder("templates") / _FOLDER).glob("*.yaml")))


def find_starter(kind: str) -> Starter:
    """The starter of that name. Raises InputError."""
    kept = {starter.kind: starter for starter in starters()}
    if kind in kept:
        return kept[kind]
    right = nearest(kind, kept)
    raise InputError(
        Problem(
            where=quoted(kind),
            what="There is no starter of that kind.",
            fix=(f"Did you mean {right}? " if right else "") + f"Kinds are {', '.join(kept)}.",
        )
    )


def _starter(file: Path) -> Starter:
    text = file.read_bytes()
    first = text.decode("utf-8").split("\n", 1)[0]
    return Starter(kind=file.stem, sentence=first.removeprefix("#").strip(), text=text)


def write_starter(kind: str, target: Path) -> Starter:
    """Writes a starter to a file that isn't there yet. Raises InputError."""
    starter = find_starter(kind)
    try:
        with target.open("xb") as file:
            file.write(starter.text)
    except FileExistsError:
        raise InputError(
            Problem(
                where=str(target),
                what="Something stands there already.",
                fix="Name a new file; nothing was overwritten.",
            )
        ) from None
    except OSError as error:
        raise InputError(
            Problem(
                where=str(target),
                what=f"The file can't be written: {error.strerror}.",
                fix="Name a file in a folder that exists and that you may write to.",
            )
        ) from None
    return starter
