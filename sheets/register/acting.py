"""Locks, zeros, powered windows and who was told: each checked against what is known of its job, and told."""

from __future__ import annotations

from decimal import Decimal

from sheets.errors import InputError, Problem, RefusedError
from sheets.names import same_person
from sheets.register.acts import (
    LockPutOn,
    LockTakenOff,
    PeopleTold,
    WindowClosed,
    WindowOpened,
    ZeroRead,
    locks_on,
    windows_open,
)
from sheets.register.finding import found_in
from sheets.register.instruments import usable
from sheets.register.recording import (
    Telling,
    hold_current,
    hold_past,
    hold_people,
    kept_of_issue,
    open_one,
    tell_of,
)
from sheets.register.revisions import Revision
from sheets.register.rows import digits_of
from sheets.register.store import Writer


def tell_people(writer: Writer, job: int, how: Telling, *, before: bool, clock: str = "") -> int:
    """The people whom the machine concerns were told; ``job`` is an open one's number.

    ``before`` the work, or after it. They are those of ``how``. Raises as `open_one` does.
    """
    revision = _of(writer, job, how, clock)
    hold_people("people told", how)
    return tell_of(
        writer,
        revision,
        PeopleTold(
            job=job,
            before=before,
            people=how.people,
            by=how.by,
            on=how.on,
            clock=clock,
            transcribed=how.transcribed,
        ),
        how,
    )


def put_on(writer: Writer, job: int, how: Telling, *, where: str, lock: str, clock: str = "") -> int:
    """A person puts a lock on; ``job`` is an open one's number. Gives the number of the event."""
    revision = _of(writer, job, how, clock)
    hold_people(f"lock {lock}", how)
    said = LockPutOn(
        job=job,
        where=where,
        lock=lock,
        by=how.people[0],
        on=how.on,
        clock=clock,
        transcribed=how.transcribed,
    )
    return tell_of(writer, revision, said, how)


def take_off(
    writer: Writer,
    put: int,
    how: Telling,
    *,
    clock: str = "",
    not_here: str = "",
    tried: str = "",
    will_know: str = "",
) -> int:
    """A lock comes off; ``put`` is the event that put it on.

    By another than its owner only with the three things that 29 CFR 1910.147(e)(3) asks for: that the owner
    isn't at the works, what was tried to reach them, and how they learn of it. Raises RefusedError without
    them, InputError for a lock that isn't on.
    """
    hold_past(how, clock)
    hanging = locks_on(writer, machine=_machine_of(writer, put))
    one = next((lock for lock in hanging if lock.sequence == put), None)
    if one is None:
        raise InputError(
            Problem(where=f"lock of event {put}", what="It isn't on.", fix="Look it up: jamnut history.")
        )
    hold_people(f"lock {one.said.lock}", how)
    _hold_after(f"lock {one.said.lock} on {one.said.where}", one.said, how, clock)
    absent = (not_here, tried, will_know)
    if not same_person(how.people[0], one.said.by) and not all(absent):
        raise RefusedError(
            Problem(
                where=f"lock {one.said.lock} on {one.said.where}",
                what=f"It is {one.said.by}'s, and {how.people[0]} takes it off.",
                fix="Its owner takes it off. Else say how you know that they aren't at the works, what you "
                "tried to reach them, and how they learn of it before they work again.",
            )
        )
    revision = found_in(writer, one.record_id)  # also where other sheets have come meanwhile
    said = LockTakenOff(
        job=one.said.job,
        put_on=put,
        by=how.people[0],
        on=how.on,
        clock=clock,
        transcribed=how.transcribed,
        not_here=not_here,
        tried=tried,
        will_know=will_know,
    )
    return tell_of(writer, revision, said, how)


def read_zero(
    writer: Writer,
    job: int,
    how: Telling,
    *,
    where: str,
    value: str,
    unit: str,
    instrument: str,
    moved: bool,
    clock: str = "",
) -> int:
    """A volume is seen without pressure; ``job`` is an open one's number, ``value`` digits in ``unit``.

    ``moved``: whether that gauge was seen to move on that volume in this job. Raises RefusedError without
    that, above the limit of the works, in another unit than the sheet's, and for a gauge that isn't fit.
    """
    revision = _of(writer, job, how, clock)
    hold_people(f"zero at {where}", how)
    kept = kept_of_issue(revision)
    gauge = usable(writer, instrument, day=how.on).listed.said
    against = ""
    if not moved:
        against = "The gauge wasn't seen to move on it in this job, so it may show zero whatever is there."
    elif unit != kept.unit:
        against = f"It is in {unit}; the sheets of this machine are in {kept.unit}."
    elif digits_of("reading", value) > Decimal(kept.zero_limit):
        against = f"{value} {unit} is no zero: the limit is {kept.zero_limit} {unit}."
    if against:
        raise RefusedError(
            Problem(
                where=f"zero at {where}",
                what=against,
                fix="Relieve it, see the gauge fall, and read again. Nobody works on it until then.",
            )
        )
    said = ZeroRead(
        job=job,
        where=where,
        value=value,
        unit=unit,
        instrument=gauge.serial,
        moved=moved,
        by=how.people[0],
        on=how.on,
        clock=clock,
        transcribed=how.transcribed,
    )
    return tell_of(writer, revision, said, how)


def open_window(writer: Writer, job: int, how: Telling, *, where: str, minutes: int, clock: str = "") -> int:
    """Power comes on for the people of ``how``, who belong to the job; ``job`` is an open one's number.

    ``where``: who stands where; ``minutes``: at most so long, from 1. Raises RefusedError while another
    window of the machine is open, and for people who don't take part in the job.
    """
    revision = _of(writer, job, how, clock)
    hold_people("powered window", how)
    if minutes < 1:
        raise InputError(
            Problem(where="powered window", what="It has no length.", fix="Give its minutes, at least 1.")
        )
    known = open_one(writer, job).opened.said.people
    # A job that a reading opened names nobody yet: the window itself names who takes part.
    strangers = [name for name in how.people if known and not any(same_person(name, one) for one in known)]
    others = windows_open(writer, machine=revision.machine)
    if strangers or others:
        what = (
            f"{strangers[0]} doesn't take part in job {job}."
            if strangers
            else f"Another is open at this machine, in job {others[0].said.job}."
        )
        raise RefusedError(
            Problem(
                where="powered window",
                what=what,
                fix="Only people of the job are within reach, in one window at a time.",
            )
        )
    said = WindowOpened(
        job=job,
        people=how.people,
        where=where,
        minutes=minutes,
        by=how.by,
        on=how.on,
        clock=clock,
        transcribed=how.transcribed,
    )
    return tell_of(writer, revision, said, how)


def close_window(writer: Writer, opened: int, how: Telling, *, clock: str = "") -> int:
    """Power is off again and locked; ``opened`` is the event that opened the window. Raises InputError."""
    hold_past(how, clock)
    machine = _machine_of(writer, opened)
    one = next((each for each in windows_open(writer, machine=machine) if each.sequence == opened), None)
    if one is None:
        raise InputError(
            Problem(
                where=f"powered window of event {opened}",
                what="It isn't open.",
                fix="Look it up: jamnut history.",
            )
        )
    _hold_after("powered window", one.said, how, clock)
    revision = found_in(writer, one.record_id)  # also where other sheets have come meanwhile
    said = WindowClosed(
        job=one.said.job, opened=opened, by=how.by, on=how.on, clock=clock, transcribed=how.transcribed
    )
    return tell_of(writer, revision, said, how)


def _of(writer: Writer, job: int, how: Telling, clock: str) -> Revision:
    revision = found_in(writer, open_one(writer, job).opened.record_id)
    hold_current(writer, revision, how, clock)
    return revision


def _hold_after(where: str, begun: LockPutOn | WindowOpened, how: Telling, clock: str) -> None:
    """What ends something comes after it, as far as times of day were written. Raises RefusedError."""
    same_day = how.on == begun.on and begun.clock and clock
    if how.on < begun.on or (same_day and clock < begun.clock):
        raise RefusedError(
            Problem(
                where=where,
                what=f"It ends on {how.on}{f' at {clock}' if clock else ''}, before it began on "
                f"{begun.on}{f' at {begun.clock}' if begun.clock else ''}.",
                fix="Look at the days and the times that were written.",
            )
        )


def _machine_of(writer: Writer, sequence: int) -> str:
    """The machine of an event; one that doesn't exist is of none."""
    return next((one.machine for one in writer.events(after=sequence - 1) if one.sequence == sequence), "")
