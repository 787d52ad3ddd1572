"""What is done around a setting, each an event of a job: people told, locks, zeros, powered windows."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import ClassVar

from sheets.register.events import EventKind
from sheets.register.saying import Said, Told, told
from sheets.register.store import View


@dataclass(frozen=True, kw_only=True)
class PeopleTold(Said):
    """Those whom the machine concerns were told: before controls go on, and after they came off.

    Source: 29 CFR 1910.147(c)(9) and (e)(2)(ii).
    """

    KIND: ClassVar[EventKind] = EventKind.TOLD

    job: int
    before: bool
    """Before the work; else after it, before the machine runs again."""
    people: tuple[str, ...]
    by: str
    on: date
    clock: str = ""
    transcribed: bool = False


@dataclass(frozen=True, kw_only=True)
class LockPutOn(Said):
    """A person's lock on an isolator or a valve."""

    KIND: ClassVar[EventKind] = EventKind.LOCK_PUT_ON

    job: int
    where: str
    """Isolator or valve, as on the sheet."""
    lock: str
    """Number or name on the lock."""
    by: str
    """Whose lock it is."""
    on: date
    clock: str = ""
    transcribed: bool = False


@dataclass(frozen=True, kw_only=True)
class LockTakenOff(Said):
    """A lock that came off: by who put it on; for an absent owner with the three things that were done.

    Source: 29 CFR 1910.147(e)(3).
    """

    KIND: ClassVar[EventKind] = EventKind.LOCK_TAKEN_OFF

    job: int
    put_on: int
    """Event that put it on."""
    by: str
    on: date
    clock: str = ""
    transcribed: bool = False
    not_here: str = ""
    """How it was verified that the owner isn't at the works."""
    tried: str = ""
    """What was done to reach the owner."""
    will_know: str = ""
    """How the owner learns of it before work goes on."""


@dataclass(frozen=True, kw_only=True)
class ZeroRead(Said):
    """A volume that was seen without pressure."""

    KIND: ClassVar[EventKind] = EventKind.ZERO_READ

    job: int
    where: str
    """Volume or test point, as on the sheet."""
    value: str
    """Digits as read."""
    unit: str
    instrument: str
    """Serial number."""
    moved: bool
    """Whether this gauge was seen to move on this volume in this job: one that can't move shows zero, too."""
    by: str
    on: date
    clock: str = ""
    transcribed: bool = False


@dataclass(frozen=True, kw_only=True)
class WindowOpened(Said):
    """Power is on, for named people, for a time."""

    KIND: ClassVar[EventKind] = EventKind.WINDOW_OPENED

    job: int
    people: tuple[str, ...]
    """Only these are within reach."""
    where: str
    """Who stands where."""
    minutes: int
    """How long at most."""
    by: str
    on: date
    clock: str = ""
    transcribed: bool = False


@dataclass(frozen=True, kw_only=True)
class WindowClosed(Said):
    """Power is off again, and locked."""

    KIND: ClassVar[EventKind] = EventKind.WINDOW_CLOSED

    job: int
    opened: int
    """Event that opened it."""
    by: str
    on: date
    clock: str = ""
    transcribed: bool = False


Act = PeopleTold | LockPutOn | LockTakenOff | ZeroRead | WindowOpened | WindowClosed
ACTS: tuple[type[Act], ...] = (PeopleTold, LockPutOn, LockTakenOff, ZeroRead, WindowOpened, WindowClosed)


def acts(
    view: View, *, machine: str, job: int | None = None, kinds: tuple[type[Act], ...] = ACTS
) -> tuple[Told[Act], ...]:
    """Acts at a machine in the order in which the register was told; of one ``job``, if it is named."""
    found: list[Told[Act]] = []
    for kind in kinds:
        found += (one for one in told(view, kind, machine=machine) if job in (None, one.said.job))
    return tuple(sorted(found, key=lambda one: one.sequence))


def locks_on(view: View, *, machine: str) -> tuple[Told[LockPutOn], ...]:
    """Locks that hang at a machine: put on and not taken off."""
    off = {one.said.put_on for one in told(view, LockTakenOff, machine=machine)}
    return tuple(one for one in told(view, LockPutOn, machine=machine) if one.sequence not in off)


def windows_open(view: View, *, machine: str) -> tuple[Told[WindowOpened], ...]:
    """Powered windows that weren't closed."""
    closed = {one.said.opened for one in told(view, WindowClosed, machine=machine)}
    return tuple(one for one in told(view, WindowOpened, machine=machine) if one.sequence not in closed)
