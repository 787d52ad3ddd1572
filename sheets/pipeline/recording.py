"""Records a job: from a record file, or row by row from answers; accepts, ends, strikes through.

All of one call is one turn of the register: what is refused leaves nothing of the rest behind.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from datetime import date, datetime
from pathlib import Path
from typing import Any, Final

from sheets.errors import InputError, Problem, RefusedError
from sheets.machine.loading import load_entry, parse_entry
from sheets.machine.record import RecordFile, RecordReading
from sheets.names import spelled
from sheets.pipeline.zones import zone_kept
from sheets.register.acting import close_window, open_window, put_on, read_zero, take_off, tell_people
from sheets.register.deviations import Standing, deviations
from sheets.register.finding import found_in
from sheets.register.jobs import Ending
from sheets.register.opening import Place, open_register
from sheets.register.people import names, person_on
from sheets.register.readings import Phase, Seal
from sheets.register.recording import Recorded, Taken, Telling, kept_of_issue, open_job
from sheets.register.recording import record as record_one
from sheets.register.recording import strike as strike_one
from sheets.register.rows import NEVER_ACCEPTED
from sheets.register.settling import accept, back_in_service, correct, end_job, note
from sheets.register.store import View, Writer


@dataclass(frozen=True, kw_only=True)
class Acceptance:
    """Somebody named answers for what is left outside its window."""

    by: str
    why: str


@dataclass(frozen=True, kw_only=True)
class JobRecorded:
    """What came of a record."""

    job: int
    readings: tuple[Recorded, ...]
    open_deviations: tuple[tuple[int, str, bool], ...]
    """Number, what it is, and whether anybody may accept it."""
    end: str
    day: date
    unknown: tuple[str, ...]
    """Who worked, and isn't known as authorised for anything on that day."""


def record(file: Path, *, register_at: Place, by: str, when: datetime) -> JobRecorded:
    """Records what a record file says. Raises InputError and RefusedError, and then nothing is recorded."""
    return record_said(load_entry(file, RecordFile), register_at=register_at, by=by, when=when)


def record_answers(
    answers: Mapping[str, Any],
    *,
    register_at: Place,
    by: str,
    when: datetime,
    acceptance: Acceptance | None = None,
    hold_windows: bool = False,
) -> JobRecorded:
    """The same from answers with the keys of a record file; the rest as in `record_said`."""
    said = parse_entry(json.dumps(answers, ensure_ascii=False).encode(), "answers", RecordFile)
    return record_said(
        said, register_at=register_at, by=by, when=when, acceptance=acceptance, hold_windows=hold_windows
    )


_GOOD_READING: Final = {"row": "1", "as found": "1 bar", "gauge": "1", "seal": "whole"}
_GOOD: Final = {"format": "1", "why": "asked", "day": "2000-01-01", "people": ["A"], "from paper": "no"}


def wrong_answer(record_id: str, key: str, answer: object, *, reading: bool = False) -> tuple[Problem, ...]:
    """What is wrong with one answer of a record that is asked for, so that it can be asked again at once.

    ``key`` as in a record file, or in a ``reading`` of it. What only the register can judge isn't judged.
    """
    said: dict[str, object] = {**_GOOD, "record": record_id, "readings": [_GOOD_READING]}
    said |= {"readings": [{**_GOOD_READING, key: answer}]} if reading else {key: answer}
    try:
        parse_entry(json.dumps(said, ensure_ascii=False).encode(), "answers", RecordFile)
    except InputError as error:
        return error.problems
    return ()


def record_said(
    said: RecordFile,
    *,
    register_at: Place,
    by: str,
    when: datetime,
    acceptance: Acceptance | None = None,
    hold_windows: bool = False,
) -> JobRecorded:
    """The same of a record that was read. A row that is refused is named by its number.

    ``acceptance``: who answers at once for what was left outside its window. ``hold_windows``: without one,
    nothing is recorded that would leave a setting open.
    """
    with open_register(register_at) as register, register.writing() as writer:
        how = Telling(
            by=by,
            when=when,
            on=said.day,
            people=said.people,
            transcribed=said.from_paper,
            zone=zone_kept(found_in(writer, said.record)),
        )
        job = int(said.job) if said.job else open_job(writer, said.record, how, why=said.why)
        _hold_record(writer, job, said.record)
        recorded = [*_acts(writer, job, said, how)]
        for made in recorded:
            if made.deviation and acceptance is not None:
                by_name = replace(how, by=acceptance.by, people=(acceptance.by,))
                accept(writer, made.deviation, by_name, authoriser=acceptance.by, why=acceptance.why)
            elif made.deviation and hold_windows:
                raise _outside(made)
        for one in said.deviations:
            note(writer, job, how, what=one.what, row=int(one.row or 0))
        left = tuple(
            (one.number, one.noted.said.what, one.acceptable)
            for one in deviations(writer, record_id=found_in(writer, said.record).record_id)
            if one.noted.said.job == job and one.standing is Standing.OPEN
        )
        if said.end:
            end_job(writer, job, how, ending=Ending(said.end))
        unknown = tuple(_unknown(writer, said))
    return JobRecorded(
        job=job,
        readings=tuple(recorded),
        open_deviations=left,
        end=said.end,
        day=said.day,
        unknown=unknown,
    )


def _unknown(view: View, said: RecordFile) -> Iterator[str]:
    """Everybody who did something in a record and wasn't authorised for anything on its day."""
    known = names(view)
    did = (*said.people, *(one.by for one in said.locks), *(one.by for one in said.zeros))
    for name in dict.fromkeys(did):
        spelling = spelled(name, known)
        if spelling is None or not person_on(view, spelling, said.day).authorised:
            yield name


def _acts(writer: Writer, job: int, said: RecordFile, how: Telling) -> Iterator[Recorded]:
    """In the order around a setting: told, locked, zero, powered, read, locks off, told."""
    for told in said.told:
        if told.when == "before":
            tell_people(writer, job, how.of(*told.people), before=True, clock=told.at)
    locks = [
        (lock, put_on(writer, job, how.of(lock.by), where=lock.where, lock=lock.lock, clock=lock.on_at))
        for lock in said.locks
    ]
    for zero in said.zeros:
        value, unit = zero.value.split()
        read_zero(
            writer,
            job,
            how.of(zero.by),
            where=zero.where,
            value=value,
            unit=unit,
            instrument=zero.gauge,
            moved=zero.moved,
            clock=zero.at,
        )
    for window in said.windows:
        opened = open_window(
            writer,
            job,
            how.of(*window.people),
            where=window.where,
            minutes=int(window.minutes),
            clock=window.opened,
        )
        close_window(writer, opened, how, clock=window.closed)
    for phase in Phase:
        for reading in said.readings:
            if reading.as_found if phase is Phase.FOUND else reading.as_left:
                yield record_one(writer, job, _taken(reading, phase), how)
    for lock, put in locks:
        if lock.off:
            take_off(writer, put, how.of(lock.by), clock=lock.off_at)
    for told in said.told:
        if told.when == "after":
            tell_people(writer, job, how.of(*told.people), before=False, clock=told.at)


def _taken(reading: RecordReading, phase: Phase) -> Taken:
    found = phase is Phase.FOUND
    value, unit = (reading.as_found if found else reading.as_left).split()
    return Taken(
        row=int(reading.row),
        phase=phase,
        value=value,
        unit=unit,
        reached=reading.reached if found else True,
        instrument=reading.gauge,
        oil_c=reading.oil.removesuffix(" °C"),
        seal=Seal(reading.seal),
        seal_number=reading.seal_number,
        clock=reading.at,
    )


def _outside(one: Recorded) -> RefusedError:
    where = f"row {one.row.row}, {one.row.called}"
    what = f"{one.taken.value} {one.row.unit} is {one.outcome}: accepted are {one.row.low} to {one.row.high}."
    if one.outcome in NEVER_ACCEPTED:
        fix = "Nobody can accept that. Set it again, or take the machine out of service."
        return RefusedError(Problem(where=where, what=what, fix=fix))
    fix = "Set it again, or have it accepted by name."
    return RefusedError(Problem(where=where, what=what, fix=fix))


def _hold_record(writer: Writer, job: int, record_id: str) -> None:
    """A job that is named belongs to the sheets that are named. Raises RefusedError."""
    revision = found_in(writer, record_id)
    begun = next(
        (event for event in writer.events(record_id=revision.record_id) if event.sequence == job), None
    )
    if begun is None:
        raise RefusedError(
            Problem(
                where=f"job {job}",
                what=f"It wasn't opened from record {revision.record_id}.",
                fix="Read the record id and the number of the job again.",
            )
        )


def recorded_text(recorded: JobRecorded) -> Iterator[str]:
    """What came of a record, line by line."""
    yield f"job {recorded.job}" + (f": {recorded.end}" if recorded.end else "")
    for one in recorded.readings:
        reached = "" if one.taken.reached else ", not reached"
        read = f"{one.taken.phase}  {one.taken.value} {one.row.unit}{reached}"
        yield f"  row {one.row.row}  {one.row.called}  {read}  {one.outcome}"
        if one.opened:
            yield f"      past its limit: job {one.opened} looks for the cause"
    for number, what, acceptable in recorded.open_deviations:
        yield f"  deviation {number} is open: {what}"
        yield (
            f"      set it again, or: jamnut settle {number} --accept"
            if acceptable
            else "      nobody can accept it: set it again, or end the job out of service"
        )
    if recorded.unknown:
        yield f"  not known as authorised on {recorded.day}: {', '.join(recorded.unknown)}"


def record_rows(record_id: str, *, register_at: Place) -> tuple[tuple[str, str, str], ...]:
    """Number, adjuster and unit of each row of a record sheet, for whoever asks row by row."""
    with open_register(register_at, read_only=True) as register, register.reading() as view:
        rows = kept_of_issue(found_in(view, record_id)).rows
    return tuple((str(row.row), row.called, row.unit) for row in rows)


def settle(
    number: int,
    *,
    register_at: Place,
    accepted: str,
    done: str,
    by: str,
    on: date,
    when: datetime,
) -> str:
    """Ends a deviation: ``accepted`` with that reason by ``by``, or ``done``, what put it right.

    ``number`` is the deviation's; ``on`` the day of it. Returns what it is now.
    """
    if bool(accepted) == bool(done):
        raise InputError(
            Problem(
                where="--accept, --done",
                what="One of them says how the deviation ends.",
                fix="Give --accept with the reason, or --done with what was put right.",
            )
        )
    how = Telling(by=by, when=when, on=on, people=(by,))
    with open_register(register_at) as register, register.writing() as writer:
        if accepted:
            accept(writer, number, how, authoriser=by, why=accepted)
        else:
            correct(writer, number, how, done=done)
    return f"deviation {number} is {'accepted' if accepted else 'corrected'} by {by}"


def end(
    number: int,
    *,
    register_at: Place,
    ending: str,
    remark: str,
    by: str,
    on: date,
    when: datetime,
) -> str:
    """Ends a job, or brings its machine back: ``ending`` is done, out of service, not begun or in service.

    ``number`` is the job's; ``on`` the day of it. Returns what it is now.
    """
    how = Telling(by=by, when=when, on=on, people=(by,))
    with open_register(register_at) as register, register.writing() as writer:
        if ending == "in service":
            opened = next((one for one in writer.events(after=number - 1) if one.sequence == number), None)
            back_in_service(writer, opened.record_id if opened else "", how, remark=remark)
            return f"in service again since {how.on}, by {by}"
        end_job(writer, number, how, ending=Ending(ending), remark=remark)
    return f"job {number}: {ending}"


def strike(reading: int, *, register_at: Place, why: str, by: str, on: date, when: datetime) -> str:
    """Strikes through a reading that was told wrongly. ``reading`` is its event; the rest as in `settle`."""
    how = Telling(by=by, when=when, on=on, people=(by,))
    with open_register(register_at) as register, register.writing() as writer:
        strike_one(writer, reading, how, why=why)
    return f"reading {reading} is struck through"
