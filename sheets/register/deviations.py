"""Deviations: what was otherwise than the sheet says, who decided about it, and how it ended.

Outside a window a setting ends by a named acceptance, or by being set again within it. Outside the order of
limits or above what must never be exceeded nobody can accept it: it is set again, or the machine is out of
service.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from typing import ClassVar, Final

from sheets.register.events import EventKind
from sheets.register.rows import NEVER_ACCEPTED, Outcome
from sheets.register.saying import Said, Told, told
from sheets.register.store import View


class DeviationKind(StrEnum):
    """What a deviation is about."""

    WINDOW = Outcome.OUTSIDE.value
    LADDER = Outcome.LADDER.value
    RATING = Outcome.RATING.value
    GAUGE = "a coarser gauge than the sheet counts on"
    OTHER = "otherwise than the sheet says"


NEVER: Final = frozenset(DeviationKind(one.value) for one in NEVER_ACCEPTED)
"""Kinds that nobody can accept."""


@dataclass(frozen=True, kw_only=True)
class DeviationNoted(Said):
    """Something was otherwise than the sheet says."""

    KIND: ClassVar[EventKind] = EventKind.DEVIATION_NOTED

    job: int
    """Event of the job in which it was noted; 0 for one that an inspection found."""
    kind: DeviationKind
    what: str
    row: int = 0
    """Row of the record sheet; 0 where it is about none."""
    reading: int = 0
    """Event of the reading as left that it is about; 0 where a person noted it."""
    inspection: int = 0
    """Event of the inspection that found it; 0 for none."""
    by: str
    on: date


@dataclass(frozen=True, kw_only=True)
class DeviationAccepted(Said):
    """Somebody named answers for leaving it so."""

    KIND: ClassVar[EventKind] = EventKind.DEVIATION_ACCEPTED

    deviation: int
    """Event that noted it."""
    by: str
    """Who authorises it: none of those who read it."""
    why: str
    on: date


@dataclass(frozen=True, kw_only=True)
class DeviationCorrected(Said):
    """It was put right; or, where it says by which, another deviation stands in its place."""

    KIND: ClassVar[EventKind] = EventKind.DEVIATION_CORRECTED

    deviation: int
    by: str
    how: str
    reading: int = 0
    """Event of the reading as left that shows it; 0 where it isn't about a reading."""
    replaced_by: int = 0
    """Event of the deviation in its place: set again, and outside still. 0 where it was put right."""
    on: date


@dataclass(frozen=True, kw_only=True)
class OutOfService(Said):
    """The machine isn't used until it is put right."""

    KIND: ClassVar[EventKind] = EventKind.OUT_OF_SERVICE

    why: str
    by: str
    on: date
    job: int = 0
    """The job that ended so; 0 for none."""


@dataclass(frozen=True, kw_only=True)
class InService(Said):
    """The machine is used again."""

    KIND: ClassVar[EventKind] = EventKind.IN_SERVICE

    by: str
    on: date
    note: str = ""


class Standing(StrEnum):
    """How a deviation stands."""

    OPEN = "open"
    ACCEPTED = "accepted"
    CORRECTED = "corrected"
    REPLACED = "replaced"
    """Another deviation of the same setting stands in its place."""


@dataclass(frozen=True, kw_only=True)
class Deviation:
    """A deviation as it follows from all events."""

    noted: Told[DeviationNoted]
    accepted: Told[DeviationAccepted] | None
    corrected: Told[DeviationCorrected] | None

    @property
    def number(self) -> int:
        return self.noted.sequence

    @property
    def standing(self) -> Standing:
        if self.corrected is not None:
            return Standing.REPLACED if self.corrected.said.replaced_by else Standing.CORRECTED
        return Standing.ACCEPTED if self.accepted is not None else Standing.OPEN

    @property
    def stands(self) -> bool:
        """Whether it is so still, accepted or not."""
        return self.corrected is None

    @property
    def acceptable(self) -> bool:
        """Whether anybody may accept it."""
        return self.noted.said.kind not in NEVER


def deviations(
    view: View, *, machine: str | None = None, document: str | None = None, record_id: str | None = None
) -> tuple[Deviation, ...]:
    """Deviations in the order in which they were noted, closed ones among them."""
    where = {"machine": machine, "document": document, "record_id": record_id}
    accepted = {one.said.deviation: one for one in told(view, DeviationAccepted, **where)}
    corrected = {one.said.deviation: one for one in told(view, DeviationCorrected, **where)}
    return tuple(
        Deviation(noted=one, accepted=accepted.get(one.sequence), corrected=corrected.get(one.sequence))
        for one in told(view, DeviationNoted, **where)
    )


def standing_about(found: Iterable[Deviation], reading: int) -> Deviation | None:
    """What stands about a reading as left, by its event: an open one first; None where nothing does."""
    about = [one for one in found if one.stands and reading and one.noted.said.reading == reading]
    return next((one for one in about if one.standing is Standing.OPEN), next(iter(about), None))


def out_of_service(view: View, *, machine: str) -> Told[OutOfService] | None:
    """The event since which a machine is out of service, or None while it is in service."""
    out = list(told(view, OutOfService, machine=machine))
    back = max((one.sequence for one in told(view, InService, machine=machine)), default=0)
    return next((one for one in out if one.sequence > back), None)
