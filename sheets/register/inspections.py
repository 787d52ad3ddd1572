"""Periodic inspections of a procedure: what was looked at, by whom, with whom, and what came of it."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import ClassVar

from sheets.register.events import EventKind
from sheets.register.jobs import jobs
from sheets.register.readings import readings
from sheets.register.saying import Said, Told, told
from sheets.register.store import View


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
    corrections: tuple[str, ...] = ()


def inspections(
    view: View, *, machine: str | None = None, document: str | None = None
) -> tuple[Told[Inspected], ...]:
    """Inspections by their day."""
    found = told(view, Inspected, machine=machine, document=document)
    return tuple(sorted(found, key=lambda one: (one.said.on, one.sequence)))


def users(view: View, *, document: str, first: date, last: date) -> tuple[str, ...]:
    """Everybody who worked with a procedure between two days, both among them, by name."""
    found: set[str] = set()
    for job in jobs(view, document=document):
        if first <= job.opened.said.on <= last:
            found.update(job.opened.said.people)
    for one in readings(view, document=document):
        if first <= one.said.on <= last:
            found.update(one.said.people)
    return tuple(sorted(found))
