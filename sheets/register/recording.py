"""A job and its readings: held against the rows that were printed, with all that follows from each.

Every act checks and writes within the turn of the writer that it gets, so several can be told as one.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from datetime import UTC, date, datetime, timedelta, timezone, tzinfo
from typing import Final, Self

from sheets.errors import InputError, Problem, RefusedError, quoted
from sheets.register.deviations import (
    DeviationCorrected,
    DeviationKind,
    DeviationNoted,
    Standing,
    deviations,
)
from sheets.register.finding import found_in, revisions_in
from sheets.register.instruments import coarser, hold_in_range, usable
from sheets.register.jobs import Job, JobOpened, jobs
from sheets.register.kept import Kept
from sheets.register.readings import (
    KeptReading,
    Phase,
    Reading,
    ReadingStruck,
    Seal,
    in_order,
    readings,
)
from sheets.register.revisions import Revision, RevisionState
from sheets.register.rows import Outcome, Row, digits_of, drifted, judged, row_of
from sheets.register.saying import Said, tell
from sheets.register.store import View, Writer

FIND_CAUSE: Final = "find the cause"
"""Task of a job that a reading opens."""
_WITHOUT_FOUND: Final = {"commission", "replace"}
"""Tasks on settings that nobody knows: there is nothing to be found before."""
_EARLIEST_ZONE: Final = timezone(timedelta(hours=14))
"""No clock on earth is further ahead of UTC."""
_LATEST_ZONE: Final = timezone(timedelta(hours=-12))
"""None is further behind."""


@dataclass(frozen=True, kw_only=True)
class Taken:
    """A reading as somebody hands it in."""

    row: int
    phase: Phase
    value: str
    """Digits as read."""
    unit: str
    """As printed in the row."""
    reached: bool = True
    """False, as found only: another limit came first, at this value."""
    instrument: str
    """Serial number of the gauge, or the works' own number."""
    oil_c: str = ""
    seal: Seal
    seal_number: str = ""
    clock: str = ""


@dataclass(frozen=True, kw_only=True)
class Recorded:
    """A reading as it was recorded, with what it comes to."""

    reading: int
    """Its event."""
    row: Row
    taken: Taken
    outcome: Outcome
    deviation: int = 0
    """Event of a deviation that it left open."""
    opened: int = 0
    """Job that it opened, since the setting had drifted past its limit."""


@dataclass(frozen=True, kw_only=True)
class Telling:
    """Who tells the register, of what day and of whose work."""

    by: str
    when: datetime
    """Of the telling."""
    on: date
    """Of the work, in the time zone of the works."""
    people: tuple[str, ...] = ()
    """Who did it."""
    transcribed: bool = False
    """Copied from paper."""
    zone: tzinfo | None = None
    """Of the works; None where it isn't known, and days are held against the widest zones on earth."""

    def of(self, *people: str) -> Self:
        """The same of other people's work."""
        return replace(self, people=people)


def tell_of(writer: Writer, revision: Revision, said: Said, how: Telling) -> int:
    """Tells something about a revision and its machine; gives the number of the event."""
    return tell(
        writer,
        said,
        who=how.by,
        when=how.when,
        machine=revision.machine,
        document=revision.document,
        record_id=revision.record_id,
    )


def open_job(writer: Writer, record_id: str, how: Telling, *, why: str) -> int:
    """Begins a job from the sheets of a revision; gives its number.

    Raises RefusedError if they weren't current on that day, InputError for a text that can't be told.
    """
    revision = found_in(writer, record_id)
    hold_current(writer, revision, how)
    task = kept_of_issue(revision).task
    hold_people("people", how)
    return tell_of(writer, revision, JobOpened(task=task, why=why, people=how.people, on=how.on), how)


def record(writer: Writer, number: int, taken: Taken, how: Telling) -> Recorded:
    """Records a reading of an open job, and what follows from it.

    ``number`` is the job's. As left outside its window, it leaves a deviation open in the place of older ones
    of its adjuster; inside, it corrects those. As found past its limit, it opens a job. Raises RefusedError
    for a gauge that is overdue, bad, unknown or ends below the reading, for a job that has ended and for a
    setting as left that nobody read as found; InputError for what isn't on the sheet.
    """
    job = open_one(writer, number)
    revision = found_in(writer, job.opened.record_id)
    hold_current(writer, revision, how, taken.clock)
    row = row_of(kept_of_issue(revision).rows, taken.row, taken.unit)
    hold_people(f"row {row.row}", how)
    gauge = usable(writer, taken.instrument, day=how.on).listed
    if taken.oil_c:
        digits_of("oil temperature", taken.oil_c)
    _hold_phase(writer, job, row, taken)
    hold_in_range(gauge.said, where=f"row {row.row}, {row.called}", value=taken.value, unit=row.unit)
    outcome = judged(row, taken.value)
    said = Reading(
        job=number,
        row=row.row,
        adjuster=row.adjuster,
        phase=taken.phase,
        value=taken.value,
        unit=row.unit,
        reached=taken.reached,
        instrument=gauge.said.serial,
        listing=gauge.sequence,
        oil_c=taken.oil_c,
        seal=taken.seal,
        seal_number=taken.seal_number,
        people=how.people,
        on=how.on,
        clock=taken.clock,
        transcribed=how.transcribed,
    )
    reading = tell_of(writer, revision, said, how)
    opened = deviation = 0
    if taken.phase is Phase.FOUND:
        opened = _look_for_cause(writer, revision, row, said, reading, how)
    else:
        deviation = _follow(writer, revision, row, said, reading, how)
    if coarser(gauge.said, unit=row.unit, error=row.gauge_error):
        noted = DeviationNoted(
            job=number,
            kind=DeviationKind.GAUGE,
            what=f"gauge {gauge.said.serial} may be out by more than {row.gauge_error} {row.unit}",
            row=row.row,
            reading=reading,
            by=how.people[0],
            on=how.on,
        )
        tell_of(writer, revision, noted, how)
    return Recorded(
        reading=reading, row=row, taken=taken, outcome=outcome, deviation=deviation, opened=opened
    )


def strike(writer: Writer, reading: int, how: Telling, *, why: str) -> None:
    """Strikes through a reading that was told wrongly: it stays, and doesn't count any more.

    ``reading`` is its event. Raises InputError if there is none that counts, and RefusedError while a
    deviation that it left is accepted: somebody answers for that figure.
    """
    found = next((one for one in readings(writer) if one.told.sequence == reading and one.counts), None)
    if found is None:
        raise _wrong(f"event {reading}", "It is no reading that counts.", "Look it up: jamnut history.")
    revision = found_in(writer, found.told.record_id)
    for one in deviations(writer, machine=revision.machine):
        if one.noted.said.reading != reading or not one.stands:
            continue
        if one.standing is Standing.ACCEPTED:
            raise RefusedError(
                Problem(
                    where=f"reading {reading}",
                    what=f"Somebody answers for it as it stands, in deviation {one.number}.",
                    fix="Record what is right as a new reading.",
                )
            )
        struck = f"struck through: {why}"
        tell_of(
            writer, revision, DeviationCorrected(deviation=one.number, by=how.by, how=struck, on=how.on), how
        )
    tell_of(writer, revision, ReadingStruck(reading=reading, why=why), how)


def open_one(view: View, number: int) -> Job:
    """The open job with that ``number``. Raises InputError if there is none, RefusedError if it has ended."""
    found = next((one for one in jobs(view) if one.number == number), None)
    if found is None:
        raise _wrong(f"job {number}", "There is no such job.", "Look its number up: jamnut history.")
    if found.ended is not None:
        raise RefusedError(
            Problem(
                where=f"job {number}",
                what=f"It has ended on {found.ended.said.on}: {found.ended.said.ending}.",
                fix="Open a new one.",
            )
        )
    return found


def kept_of_issue(revision: Revision) -> Kept:
    """What the register kept of a revision. Raises RefusedError if it isn't issued, or kept nothing."""
    if revision.issue is not None and revision.issue.kept is not None:
        return revision.issue.kept
    raise RefusedError(
        Problem(
            where=f"revision {revision.number} of document {quoted(revision.document)}",
            what="The register holds nothing that a reading could be judged by.",
            fix="Issue the pack, and work from that.",
        )
    )


def hold_current(view: View, revision: Revision, how: Telling, clock: str = "") -> None:
    """Sheets are worked from while they are current; what was written on them then may be transcribed later.

    ``clock``: time of day of the work, such as 14:05, or empty. Raises RefusedError for a day or time at
    which they weren't, and InputError for one that hasn't come.
    """
    hold_past(how, clock)
    where, issue = f"record {revision.record_id}", revision.issue
    issued = issue.at.astimezone(how.zone or _LATEST_ZONE) if issue is not None else None
    said = f"{how.on}{f' at {clock}' if clock else ''}"
    if issued is not None and (how.on, clock or "24:00") < (issued.date(), f"{issued:%H:%M}"):
        raise RefusedError(
            Problem(
                where=where,
                what=f"Revision {revision.number} wasn't issued yet on {said}.",
                fix="Look at the day and the time, and which sheets the work was done from.",
            )
        )
    if revision.state is RevisionState.ISSUED:
        return
    if how.transcribed and issue is not None and (how.on, clock) <= _last_moment(view, revision, how):
        return
    raise RefusedError(
        Problem(
            where=where,
            what=f"Revision {revision.number} is {revision.state.value}, so nothing is done from it.",
            fix="Work from the current one; what was written on paper before is transcribed with its day.",
        )
    )


def hold_past(how: Telling, clock: str = "") -> None:
    """Nothing is told of a day or a time to come; ``clock`` as in `hold_current`. Raises InputError."""
    now = how.when.astimezone(how.zone or _EARLIEST_ZONE)
    if (how.on, clock) > (now.date(), f"{now:%H:%M}"):
        said = f"{how.on}{f' at {clock}' if clock else ''}"
        raise _wrong("the day", f"{said} lies in the future.", "Write when it was done.")


def hold_people(where: str, how: Telling) -> None:
    """Work has names. ``where``: what it is about. Raises InputError."""
    if not how.people:
        raise _wrong(where, "Nobody is named who did it.", "Name who read and who turned.")


def _last_moment(view: View, revision: Revision, how: Telling) -> tuple[date, str]:
    """The last day, with its time of day, on which a revision was current."""
    ended = revision.ended_at
    if ended is None:
        later = revisions_in(view, revision.document)[(revision.superseded_by or 1) - 1]
        ended = later.issue.at if later.issue is not None else None
    if ended is None:
        return date.min, ""
    there = ended.astimezone(how.zone or UTC)
    return there.date(), f"{there:%H:%M}"


def _hold_phase(view: View, job: Job, row: Row, taken: Taken) -> None:
    if taken.phase is Phase.FOUND:
        return
    if not taken.reached:
        raise _wrong(f"row {row.row}", "A setting as left is reached.", "Say what the gauge shows at last.")
    if job.opened.said.task in _WITHOUT_FOUND:
        return
    before = readings(view, machine=job.opened.machine)
    if not any(one.counts and one.said.job == job.number and one.said.row == row.row for one in before):
        raise RefusedError(
            Problem(
                where=f"row {row.row}, {row.called}",
                what="It was left without having been read as found in this job.",
                fix="Record first what was found; that can't be read again afterwards.",
            )
        )


def _look_for_cause(
    writer: Writer, revision: Revision, row: Row, said: Reading, reading: int, how: Telling
) -> int:
    """Opens a job for a setting found past its limit, unless one looks for that cause already; 0 if none."""
    if not said.reached or not drifted(row, said.value):
        return 0
    kept = readings(writer, machine=revision.machine)
    causes = {one.told.sequence: one.said.adjuster for one in kept if one.counts}
    for one in jobs(writer, machine=revision.machine):
        if one.open and causes.get(one.opened.said.cause) == row.adjuster:
            return 0
    why = (
        f"{row.called} was found at {said.value} {row.unit}, past its limits "
        f"{row.drift_low} and {row.drift_high} {row.unit}"
    )
    return tell_of(writer, revision, JobOpened(task=FIND_CAUSE, why=why, cause=reading, on=how.on), how)


def _follow(writer: Writer, revision: Revision, row: Row, said: Reading, reading: int, how: Telling) -> int:
    """What a reading as left does to deviations: it may leave one, and ends older ones of its adjuster.

    One of an earlier day or hour than others that were told before it ends none that came after it, and what
    it leaves has ended already. Gives the deviation that is open now, or 0.
    """
    kept = readings(writer, machine=revision.machine)
    ordered = in_order(kept, adjuster=row.adjuster, phase=Phase.LEFT)
    place = [one.told.sequence for one in ordered].index(reading)
    older, newer = {one.told.sequence for one in ordered[:place]}, ordered[place + 1 :]
    outcome = judged(row, said.value)
    noted = 0
    if outcome is not Outcome.WITHIN:
        left = DeviationNoted(
            job=said.job,
            kind=DeviationKind(outcome.value),
            what=f"{row.called} was left at {said.value} {row.unit}; accepted are {row.low} to {row.high}",
            row=row.row,
            reading=reading,
            by=how.people[0],
            on=how.on,
        )
        noted = tell_of(writer, revision, left, how)
    of_readings = {
        one.noted.said.reading: one
        for one in deviations(writer, machine=revision.machine)
        if one.noted.said.kind is not DeviationKind.GAUGE
    }
    for one in of_readings.values():
        if one.stands and one.noted.said.reading in older:
            _set_again(writer, revision, one.number, ordered[place], noted, how)
    if not noted or not newer:
        return noted
    after = of_readings.get(newer[0].told.sequence)
    _set_again(writer, revision, noted, newer[0], after.number if after else 0, how)
    return 0


def _set_again(
    writer: Writer, revision: Revision, ended: int, by: KeptReading, outside: int, how: Telling
) -> None:
    """Ends a deviation by a newer reading; ``outside``: the deviation which that left itself, or 0."""
    said = DeviationCorrected(
        deviation=ended,
        by=by.said.people[0],
        how=f"replaced by deviation {outside}" if outside else f"set again to {by.said.value} {by.said.unit}",
        reading=by.told.sequence,
        replaced_by=outside,
        on=by.said.on,
    )
    tell_of(writer, revision, said, how)


def _wrong(where: str, what: str, fix: str) -> InputError:
    return InputError(Problem(where=where, what=what, fix=fix))
