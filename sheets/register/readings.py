"""Readings: as found and as left, with instrument, seal, oil and names; what follows from all of them."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from typing import ClassVar, Final

from sheets.register.events import EventKind
from sheets.register.saying import Said, Told, told
from sheets.register.store import View


class Phase(StrEnum):
    """When it was read."""

    FOUND = "as found"
    LEFT = "as left"


class Seal(StrEnum):
    """How the seal of an adjuster stood."""

    WHOLE = "whole"
    BROKEN = "broken"
    NONE = "none"
    NEW = "new"
    """Put on after the setting."""


@dataclass(frozen=True, kw_only=True)
class Reading(Said):
    """One reading of one row of a record sheet."""

    KIND: ClassVar[EventKind] = EventKind.READ

    job: int
    """Event that opened the job."""
    row: int
    """Printed number of the row on the record sheet of the event's record id."""
    adjuster: str
    phase: Phase
    value: str
    """Digits as read, in ``unit``."""
    unit: str
    reached: bool = True
    """False: another limit came first, and the value is where it came. As found only."""
    instrument: str
    """Serial number of the gauge that was used."""
    listing: int
    """Event that listed it last: range, class, certificate and due date as they were."""
    oil_c: str = ""
    """Oil temperature in °C, as digits."""
    seal: Seal
    seal_number: str = ""
    people: tuple[str, ...]
    """Who read and who turned."""
    on: date
    """Day on which it was read, in the time zone of the works."""
    clock: str = ""
    """Time of day as written, such as 14:05."""
    transcribed: bool = False
    """Copied from paper, afterwards, by whoever told the register."""


@dataclass(frozen=True, kw_only=True)
class ReadingStruck(Said):
    """A reading that was told wrongly and doesn't count: it stays, struck through, with the reason."""

    KIND: ClassVar[EventKind] = EventKind.READING_STRUCK

    reading: int
    """Event of the reading."""
    why: str


@dataclass(frozen=True, kw_only=True)
class KeptReading:
    """A reading as it follows from all events."""

    told: Told[Reading]
    struck: Told[ReadingStruck] | None = None

    @property
    def said(self) -> Reading:
        return self.told.said

    @property
    def counts(self) -> bool:
        return self.struck is None


READING_KINDS: Final = frozenset({EventKind.READ, EventKind.READING_STRUCK})


def readings(
    view: View,
    *,
    machine: str | None = None,
    document: str | None = None,
    record_id: str | None = None,
    instrument: str | None = None,
) -> tuple[KeptReading, ...]:
    """Readings in the order in which the register was told, those struck through among them.

    ``instrument`` is a serial number: the readings that hang on that gauge, of all machines unless one is
    named. Raises InputError for an event that can't be read.
    """
    where = {"machine": machine, "document": document, "record_id": record_id}
    struck = {one.said.reading: one for one in told(view, ReadingStruck, **where)}
    return tuple(
        KeptReading(told=one, struck=struck.get(one.sequence))
        for one in told(view, Reading, **where, saying=instrument)
        if instrument is None or one.said.instrument == instrument
    )


def in_order(kept: Iterable[KeptReading], *, adjuster: str, phase: Phase | None = None) -> list[KeptReading]:
    """The readings of one adjuster that count, oldest first: by day and time of day, then as they were told.

    ``kept``: of one machine, as they were told; ``phase``: only those. One without a time of day stands
    behind all of its day that were told before it: when else it was read isn't known.
    """
    latest: dict[date, str] = {}
    keyed: list[tuple[date, str, int, KeptReading]] = []
    for one in kept:
        said = one.said
        if not one.counts or said.adjuster != adjuster or phase not in (None, said.phase):
            continue
        before = latest.get(said.on, "")
        clock = said.clock or before
        latest[said.on] = max(before, clock)
        keyed.append((said.on, clock, one.told.sequence, one))
    return [one for *_, one in sorted(keyed, key=lambda each: each[:3])]


def last_left(view: View, *, machine: str) -> dict[str, KeptReading]:
    """The newest reading as left of every adjuster of a machine, by adjuster: what its tag prints."""
    kept = readings(view, machine=machine)
    ordered = ((name, in_order(kept, adjuster=name, phase=Phase.LEFT)) for name in _adjusters(kept))
    return {name: every[-1] for name, every in ordered if every}


def series(view: View, *, machine: str, adjuster: str) -> tuple[KeptReading, ...]:
    """All readings of one adjuster that count, oldest first: what a plot shows."""
    return tuple(in_order(readings(view, machine=machine), adjuster=adjuster))


def _adjusters(kept: Iterable[KeptReading]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(one.said.adjuster for one in kept))
