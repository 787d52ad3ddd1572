"""Periodic inspections of a procedure: what was looked at, by whom, with whom, what came of it, when due."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date
from typing import ClassVar, Final

from sheets.names import folded
from sheets.register.acts import LockPutOn, LockTakenOff, WindowClosed, WindowOpened, ZeroRead
from sheets.register.events import EventKind
from sheets.register.finding import revisions_in
from sheets.register.jobs import jobs
from sheets.register.readings import readings
from sheets.register.revisions import current
from sheets.register.saying import Said, Told, told
from sheets.register.store import View

MAY_INSPECT: Final = ("inspection", "lockout")
"""Either makes an authorised employee of somebody. Source: 29 CFR 1910.147(b), (c)(6)(i)(A)."""

_BY_HAND: Final[tuple[type[LockPutOn | LockTakenOff | ZeroRead | WindowClosed], ...]] = (
    LockPutOn,
    LockTakenOff,
    ZeroRead,
    WindowClosed,
)
"""What one person does with the procedure in hand."""


@dataclass(frozen=True, kw_only=True)
class Inspected(Said):
    """An inspection of the revision that the event's record id names.

    The machine is the event's. Source of the four fields (machine, day, employees, inspector):
    29 CFR 1910.147(c)(6)(ii).
    """

    KIND: ClassVar[EventKind] = EventKind.INSPECTED

    on: date
    employees: tuple[str, ...]
    """Those who were included."""
    inspector: str
    deviations: tuple[str, ...] = ()
    """Noted one by one right behind it; those without a correction are open."""
    corrections: tuple[str, ...] = ()
    """Of the first of them, in their order."""


Users = Mapping[str, tuple[int, ...]]
"""Names with the events that show the work, first spelling first."""


@dataclass(frozen=True, kw_only=True)
class Inspection:
    """An inspection as it follows from all events, whenever the register was told."""

    told: Told[Inspected]
    revision: int
    """Number of the revision that was inspected."""
    users: Users
    """Who used the procedure since the inspection before, and at least in the year before."""

    @property
    def said(self) -> Inspected:
        return self.told.said

    @property
    def number(self) -> int:
        return self.told.sequence

    @property
    def against(self) -> tuple[int, ...]:
        """Events in which the inspector used the procedure that they inspected."""
        return used_by(self.users, self.said.inspector)

    @property
    def independent(self) -> bool:
        """Whether the inspector is neither a user of the procedure nor among the included.

        Source: 29 CFR 1910.147(c)(6)(i)(A): by an authorised employee other than those who use it.
        """
        included = {folded(name) for name in self.said.employees}
        return not self.against and folded(self.said.inspector) not in included

    @property
    def left_out(self) -> tuple[str, ...]:
        """Users who weren't included."""
        included = {folded(name) for name in (*self.said.employees, self.said.inspector)}
        return tuple(name for name in self.users if folded(name) not in included)


@dataclass(frozen=True, kw_only=True)
class Clock:
    """When a document with a current revision must be inspected next.

    At most 12 months after the last time, or after its first issue. Source: 29 CFR 1910.147(c)(6)(i).
    """

    document: str
    machine: str
    revision: int
    """The current one."""
    first_issued: date
    """In UTC."""
    issued_sequence: int
    """Of the event that tells of that issue."""
    last: Inspection | None
    due: date
    """Last day on which it isn't overdue."""

    def overdue_on(self, day: date) -> bool:
        """Whether it is late on that ``day``."""
        return day > self.due


def inspections(
    view: View, *, machine: str | None = None, document: str | None = None
) -> tuple[Inspection, ...]:
    """Inspections by their day."""
    ordered = sorted(
        told(view, Inspected, machine=machine, document=document),
        key=lambda one: (one.said.on, one.sequence),
    )
    found: list[Inspection] = []
    for one in ordered:
        earlier = [it.said.on for it in found if it.told.document == one.document]
        numbers = {it.record_id: it.number for it in revisions_in(view, one.document)}
        found.append(
            Inspection(
                told=one,
                revision=numbers.get(one.record_id, 0),
                users=users(
                    view, document=one.document, first=begin_of(earlier, one.said.on), last=one.said.on
                ),
            )
        )
    return tuple(found)


def clock_of(view: View, document: str) -> Clock | None:
    """When a document must be inspected next; None while no revision of it is current."""
    revisions = revisions_in(view, document)
    newest = current(revisions)
    if newest is None:
        return None
    first = min((one.issue for one in revisions if one.issue is not None), key=lambda one: one.sequence)
    done = inspections(view, document=document)
    last = done[-1] if done else None
    return Clock(
        document=document,
        machine=newest.machine,
        revision=newest.number,
        first_issued=first.at.date(),
        issued_sequence=first.sequence,
        last=last,
        due=year_after(last.said.on if last is not None else first.at.date()),
    )


def begin_of(earlier: list[date], day: date) -> date:
    """First day of the time that an inspection looks back on: from the one before, and at least a year.

    ``earlier``: days of the inspections before that ``day``; without any, from the beginning.
    """
    before = [one for one in earlier if one < day]
    return min(max(before), year_before(day)) if before else date.min


def users(view: View, *, document: str, first: date, last: date) -> Users:
    """Everybody who worked with a procedure from a day to another: in jobs, readings, windows, with locks.

    ``first`` and ``last`` are among the days. Who was told of the work is affected by it and no user.
    """
    found: dict[str, tuple[str, list[int]]] = {}

    def met(day: date, names: tuple[str, ...], sequence: int) -> None:
        if first <= day <= last:
            for name in names:
                found.setdefault(folded(name), (name, []))[1].append(sequence)

    for job in jobs(view, document=document):
        met(job.opened.said.on, job.opened.said.people, job.number)
    for reading in readings(view, document=document):
        if reading.counts:
            met(reading.said.on, reading.said.people, reading.told.sequence)
    for window in told(view, WindowOpened, document=document):
        met(window.said.on, (*window.said.people, window.said.by), window.sequence)
    for kind in _BY_HAND:
        for act in told(view, kind, document=document):
            met(act.said.on, (act.said.by,), act.sequence)
    return {name: tuple(sorted(set(events))) for name, events in found.values()}


def used_by(users: Users, name: str) -> tuple[int, ...]:
    """Events in which a person used the procedure, however the name is written."""
    return next((events for other, events in users.items() if folded(other) == folded(name)), ())


def year_after(day: date) -> date:
    """The same day a year later; 28 February for 29 February."""
    return _in_year(day, day.year + 1)


def year_before(day: date) -> date:
    """The same day a year before; 28 February for 29 February."""
    return _in_year(day, day.year - 1)


def _in_year(day: date, year: int) -> date:
    try:
        return day.replace(year=year)
    except ValueError:
        return day.replace(year=year, day=28)
