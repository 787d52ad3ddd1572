"""Jobs: somebody begins work from a revision's sheets, others take part, and it ends."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from typing import ClassVar

from sheets.register.events import EventKind
from sheets.register.saying import Said, Told, told
from sheets.register.store import View


class Ending(StrEnum):
    """How a job ended."""

    DONE = "done"
    OUT_OF_SERVICE = "out of service"
    NOT_BEGUN = "not begun"
    """Opened and then not needed."""


@dataclass(frozen=True, kw_only=True)
class JobOpened(Said):
    """Work at a machine; its number is that of this event. The record id names the sheets it is done from."""

    KIND: ClassVar[EventKind] = EventKind.JOB_OPENED

    task: str
    """The task of the sheets, such as set, or 'find the cause'."""
    why: str
    people: tuple[str, ...] = ()
    """Who takes part; none yet for a job that was opened by a reading."""
    cause: int = 0
    """Event of the reading that opened it; 0 where a person did."""
    on: date


@dataclass(frozen=True, kw_only=True)
class JobEnded(Said):
    """The end of a job."""

    KIND: ClassVar[EventKind] = EventKind.JOB_ENDED

    job: int
    ending: Ending
    note: str = ""
    by: str
    on: date


@dataclass(frozen=True, kw_only=True)
class Job:
    """A job as it follows from all events."""

    opened: Told[JobOpened]
    ended: Told[JobEnded] | None

    @property
    def number(self) -> int:
        return self.opened.sequence

    @property
    def open(self) -> bool:
        return self.ended is None


def jobs(
    view: View, *, machine: str | None = None, document: str | None = None, record_id: str | None = None
) -> tuple[Job, ...]:
    """Jobs in the order in which they were opened."""
    where = {"machine": machine, "document": document, "record_id": record_id}
    ended = {one.said.job: one for one in told(view, JobEnded, **where)}
    return tuple(Job(opened=one, ended=ended.get(one.sequence)) for one in told(view, JobOpened, **where))
