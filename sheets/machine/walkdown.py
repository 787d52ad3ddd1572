"""The walk-down file: who compared which entry of the machine file with the machine, and who accepted what.

It stands beside the machine file as NAME.walkdown.yaml. The program writes it; a person may read and edit it,
so it is read as strictly as the machine file. Each answer carries the digest of the entry that was compared:
once the entry says something else, the answer no longer holds.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from datetime import date
from typing import Annotated, Any, Final, Literal

import yaml
from pydantic import Field, TypeAdapter, ValidationError

from sheets.errors import InputError, Problem, quoted
from sheets.machine.fields import Entry, FormatNumber, Identifier, IsoDate, PositiveBar, Text
from sheets.machine.flaws import Flaw
from sheets.machine.words import Name, Wording

SECTIONS: Final = ("parts", "gauges", "nets", "energy", "whole")
"""Where the answers stand; the last holds what belongs to no single part."""

Whole = Literal["fluid", "controls", "absent"]
Digest = Annotated[
    str,
    Name(
        pattern=r"[0-9A-HJKMNP-TV-Z]{16}",
        says="the 16 characters that the program wrote",
        example="0123456789ABCDEF",
    ),
]
AdjusterName = Annotated[
    str,
    Name(
        pattern=r"[A-Za-z0-9][A-Za-z0-9_-]*(?:\.[a-z]+(?: [a-z]+)*)?",
        says="the adjuster as jamnut targets --json names it",
        example="PU1.compensator",
        longest=60,
    ),
]
Person = Annotated[str, Wording(longest=60, example="the name as it is signed")]


class Answer(Entry):
    """What somebody said of one entry after looking at the machine."""

    seen: Digest
    """Digest of the entry as it was read then."""
    by: Person
    """Who compared it."""
    day: IsoDate
    """When."""
    answer: Literal["agrees", "differs"]
    """What came out."""
    note: Text = ""
    """What is otherwise at the machine; required where it differs."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if self.answer == "differs" and not self.note:
            yield Flaw(
                at=("note",),
                what="The entry differs from the machine, and no note says how.",
                fix="Write what is at the machine, such as note: the plate says 280 bar.",
            )


class Acceptance(Entry):
    """A computed setting that somebody named took on."""

    value_bar: PositiveBar
    """The setting that was accepted."""
    by: Person
    """Who accepted it."""
    day: IsoDate
    """When."""
    computed_from: Digest
    """Digest of everything that the value was computed from."""


class Walkdown(Entry):
    """All answers about one machine file."""

    format: FormatNumber
    """Number of the file format; 1."""
    machine: Identifier
    """Tag of the machine that was walked down."""
    parts: dict[Identifier, Answer] = Field(default_factory=dict)
    """Answers about parts."""
    gauges: dict[Identifier, Answer] = Field(default_factory=dict)
    """Answers about gauges."""
    nets: dict[Text, Answer] = Field(default_factory=dict)
    """Answers about lines: whether these ports are joined, and no other."""
    energy: dict[Identifier, Answer] = Field(default_factory=dict)
    """Answers about supplies and their isolators."""
    whole: dict[Whole, Answer] = Field(default_factory=dict)
    """Answers about the fluid, the start and stop places, and what was declared absent."""
    acceptances: dict[AdjusterName, Acceptance] = Field(default_factory=dict)
    """Accepted settings, by adjuster."""

    def answers(self) -> dict[tuple[str, str], Answer]:
        """Every answer by section and id."""
        found: dict[tuple[str, str], Answer] = {}
        for section in SECTIONS:
            entries: Mapping[str, Answer] = getattr(self, section)
            found |= {(section, id_): answer for id_, answer in entries.items()}
        return found

    def dates_after(self, today: date) -> Iterator[Flaw]:
        """Answers and acceptances that claim to be made in the future."""
        dated: dict[tuple[str, str], date] = {place: answer.day for place, answer in self.answers().items()}
        dated |= {("acceptances", id_): acceptance.day for id_, acceptance in self.acceptances.items()}
        for place, on in dated.items():
            if on > today:
                yield Flaw(at=(*place, "day"), what=f"{on} lies in the future.", fix=_PAST)


_PAST: Final = "Write the day on which it was done, year first."
_HEAD: Final = (
    "# Walk-down of {tag}: who compared the machine file with the machine. jamnut walkdown writes it.\n"
)


def walkdown_text(walkdown: Walkdown) -> str:
    """The file as it is written; reading it gives the same value."""
    data: dict[str, Any] = {"format": 1, "machine": walkdown.machine}
    for section in SECTIONS:
        answers: Mapping[str, Answer] = getattr(walkdown, section)
        if answers:
            data[section] = {id_: _answer(answer) for id_, answer in answers.items()}
    if walkdown.acceptances:
        data["acceptances"] = {
            id_: {
                "value": f"{round(one.value_bar, 6):.10g} bar",
                "by": one.by,
                "day": one.day.isoformat(),
                "computed from": one.computed_from,
            }
            for id_, one in walkdown.acceptances.items()
        }
    written: str = yaml.safe_dump(data, sort_keys=False, allow_unicode=True, width=400)
    return _HEAD.format(tag=walkdown.machine) + written


def _answer(answer: Answer) -> dict[str, str]:
    body = {"seen": answer.seen, "by": answer.by, "day": answer.day.isoformat(), "answer": answer.answer}
    return body | ({"note": answer.note} if answer.note else {})


def person(given: str) -> str:
    """A name as it may stand in the file. Raises InputError."""
    return _held(given, Person, "--by", "The name")


def note(given: str) -> str:
    """A note as it may stand in the file. Raises InputError."""
    return _held(given, Text, "--note", "The note")


def _held(given: str, kind: Any, where: str, called: str) -> str:
    if not given.strip():
        raise InputError(Problem(where=where, what=f"{called} is empty.", fix="Write it behind the option."))
    try:
        text: str = TypeAdapter(kind).validate_python(given)
    except ValidationError as error:
        context = error.errors(include_url=False)[0].get("ctx", {})
        raise InputError(
            Problem(
                where=where,
                what=str(context.get("what", f"{called} {quoted(given)} can't be used.")),
                fix=str(context.get("fix", "Write it in plain words on one line.")),
            )
        ) from None
    return text


def day(given: str) -> date:
    """A date as it is written on the command line. Raises InputError."""
    try:
        found: date = TypeAdapter(IsoDate).validate_python(given)
    except ValidationError as error:
        context = error.errors(include_url=False)[0].get("ctx", {})
        raise InputError(
            Problem(where="--on", what=str(context.get("what", "")), fix=str(context.get("fix", _PAST)))
        ) from None
    return found


def hold_day(on: date, *, today: date, dated: date) -> None:
    """Raises InputError for a day in the future, or before the machine file's data was gathered.

    ``on``: day of the comparison; ``today``: from the clock; ``dated``: date of the machine data.
    """
    if on > today:
        raise InputError(Problem(where="--on", what=f"{on} lies in the future.", fix=_PAST))
    if on < dated:
        raise InputError(
            Problem(
                where="--on",
                what=f"{on} is before {dated}, the date of the machine data, which is younger.",
                fix="Correct this date, or 'dated' in the machine file.",
            )
        )
