"""Answers of somebody who walked a machine down, held to what the machine file says."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date

from sheets.errors import InputError, Problem
from sheets.machine.walkdown import Answer, Walkdown, day, hold_day, note, person
from sheets.machine.walking import Place, find_place


@dataclass(frozen=True, kw_only=True)
class Answers:
    """What somebody says, as it comes from the command. Entries by id or ``section/id``, adjusters by id."""

    by: str
    on: str
    """Year first; empty for today."""
    today: date
    agree: tuple[str, ...] = ()
    differ: Mapping[str, str] = field(default_factory=dict)
    """Entry to the note that says how."""
    rest_agrees: bool = False
    """Every entry that isn't named under ``differ`` agrees."""
    accept: tuple[str, ...] = ()
    """Adjusters whose computed setting is taken on."""

    def signed(self, *, dated: date) -> tuple[str, date]:
        """Name and day as they may stand in the file; ``dated``: of the machine data. Raises InputError."""
        on = day(self.on) if self.on else self.today
        hold_day(on, today=self.today, dated=dated)
        return person(self.by), on


def answered(
    answers: Answers, walkdown: Walkdown | None, digests: Mapping[Place, str], *, by: str, on: date
) -> dict[Place, Answer | None]:
    """The answers by entry; None for one that is gone from the machine file and from the machine.

    ``digests``: of every entry as now read. ``by`` and ``on``: who looked, and when. Raises InputError for
    entries that aren't there, that are said to be both ways, or that differ and are gone.
    """
    gone = [place for place in (walkdown.answers() if walkdown else {}) if place not in digests]
    places = (*digests, *gone)
    differ = {find_place(named, places): note(text) for named, text in answers.differ.items()}
    agree = [find_place(named, places) for named in answers.agree]
    problems = [
        Problem(where=place[1], what="It is said to agree and to differ.", fix="Say one of the two.")
        for place in differ
        if place in agree
    ] + [
        Problem(
            where=place[1],
            what="It is gone from the machine file, so nothing can differ from it.",
            fix="Put it back into the machine file; or say --agree, if it is gone from the machine too.",
        )
        for place in differ
        if place not in digests
    ]
    if problems:
        raise InputError(*problems)
    if answers.rest_agrees:
        agree = [place for place in places if place not in differ]
    found: dict[Place, Answer | None] = {
        place: Answer(seen=digests[place], by=by, day=on, answer="agrees") if place in digests else None
        for place in agree
    }
    return found | {
        place: Answer(seen=digests[place], by=by, day=on, answer="differs", note=text)
        for place, text in differ.items()
    }
