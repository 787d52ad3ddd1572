"""How deviations and jobs end: somebody named accepts, or the machine goes out of service; and comes back."""

from __future__ import annotations

from typing import Final

from sheets.errors import InputError, Problem, RefusedError
from sheets.names import same_person
from sheets.register.acts import locks_on, windows_open
from sheets.register.deviations import (
    NEVER,
    Deviation,
    DeviationAccepted,
    DeviationCorrected,
    DeviationKind,
    DeviationNoted,
    InService,
    OutOfService,
    Standing,
    deviations,
    out_of_service,
)
from sheets.register.finding import found_in
from sheets.register.jobs import Ending, JobEnded
from sheets.register.readings import readings
from sheets.register.recording import FIND_CAUSE, Telling, hold_past, open_one, tell_of
from sheets.register.revisions import Revision
from sheets.register.store import View, Writer

_SETTINGS: Final = {DeviationKind.WINDOW, *NEVER}
"""Kinds that are about how a setting was left."""


def note(writer: Writer, job: int, how: Telling, *, what: str, row: int = 0) -> int:
    """Notes that something was otherwise than the sheet says; gives the number of the deviation.

    ``job`` is an open one's number, ``row`` one of its record sheet or 0. Raises as `open_one` does.
    """
    revision = found_in(writer, open_one(writer, job).opened.record_id)
    said = DeviationNoted(job=job, kind=DeviationKind.OTHER, what=what, row=row, by=_first(how), on=how.on)
    return tell_of(writer, revision, said, how)


def accept(writer: Writer, number: int, how: Telling, *, authoriser: str, why: str) -> None:
    """Somebody named answers for leaving a deviation as it is; ``number`` is the deviation's.

    Raises RefusedError for one that nobody can accept, that has ended, whose reading the same person took or
    told the register, on a day before it was noted, and for a setting while another of the machine stands
    outside its window, too: the order of limits is known with one of them out.
    """
    one = _open_deviation(writer, number)
    if not one.acceptable:
        raise _refused(
            number,
            f"Nobody can accept a setting {one.noted.said.kind.value}.",
            "Set it again, or end the job with the machine out of service.",
        )
    _hold_day(one, how)
    about = [
        kept
        for kept in readings(writer, machine=one.noted.machine)
        if kept.told.sequence == one.noted.said.reading
    ]
    # Who tells the register may have left their own name out of those who did it.
    readers = {one.noted.said.by, one.noted.by, *(kept.told.by for kept in about)}
    readers.update(name for kept in about for name in kept.said.people)
    if any(same_person(authoriser, name) for name in readers):
        raise _refused(
            number,
            "Who read it, noted it or told the register of it doesn't accept it, too.",
            "Name another who answers for it.",
        )
    if one.noted.said.kind is DeviationKind.WINDOW:
        others = [
            other
            for other in deviations(writer, machine=one.noted.machine)
            if other.number != number and other.noted.said.kind in _SETTINGS and other.stands
        ]
        if others:
            raise _refused(
                number,
                f"Another setting stands outside its window, in deviation {others[0].number}. With two out, "
                "it isn't known that each limit stands over the one below it.",
                "Set one of them again.",
            )
    revision = found_in(writer, one.noted.record_id)
    said = DeviationAccepted(deviation=number, by=authoriser, why=why, on=how.on)
    tell_of(writer, revision, said, how)


def correct(writer: Writer, number: int, how: Telling, *, done: str) -> None:
    """Something was put right that isn't about a setting; ``number`` is the deviation's.

    Raises RefusedError for a setting, which only a reading corrects, for one that has ended, and for a day
    before it was noted.
    """
    one = _open_deviation(writer, number)
    if one.noted.said.kind in _SETTINGS:
        raise _refused(
            number, "Only a reading shows that a setting was put right.", "Record the setting as left."
        )
    _hold_day(one, how)
    revision = found_in(writer, one.noted.record_id)
    said = DeviationCorrected(deviation=number, by=_first(how), how=done, on=how.on)
    tell_of(writer, revision, said, how)


def end_job(writer: Writer, number: int, how: Telling, *, ending: Ending, remark: str = "") -> None:
    """Ends a job; ``number`` is its own. Out of service, the machine is that from now on.

    Raises RefusedError for a job that is done while something stands open (a deviation, a powered window, a
    lock), and for one that looks for a cause and is done without a remark.
    """
    job = open_one(writer, number)
    revision = found_in(writer, job.opened.record_id)
    if ending is Ending.DONE and job.opened.said.task == FIND_CAUSE and not remark:
        raise RefusedError(
            Problem(
                where=f"job {number}",
                what="It looks for a cause, and nothing says what was found.",
                fix="Say it with --remark TEXT.",
            )
        )
    against = list(_against(writer, revision, number, ending))
    if ending is Ending.NOT_BEGUN and job.opened.said.task != FIND_CAUSE and _begun(writer, revision, number):
        against.append(f"job {number}: It was begun: something was read or done in it.")
    if against:
        raise RefusedError(
            *(
                Problem(
                    where=one.split(": ", 1)[0],
                    what=one.split(": ", 1)[1],
                    fix="Settle it first, or end the job with the machine out of service.",
                )
                for one in against
            )
        )
    said = JobEnded(job=number, ending=ending, note=remark, by=_first(how), on=how.on)
    tell_of(writer, revision, said, how)
    if ending is Ending.OUT_OF_SERVICE:
        why = remark or f"job {number} ended so"
        tell_of(writer, revision, OutOfService(why=why, by=_first(how), on=how.on, job=number), how)


def back_in_service(writer: Writer, record_id: str, how: Telling, *, remark: str = "") -> None:
    """The machine is used again. Raises RefusedError while a setting is out, or if it is in service."""
    revision = found_in(writer, record_id)
    if out_of_service(writer, machine=revision.machine) is None:
        raise RefusedError(
            Problem(
                where=f"machine {revision.machine}",
                what="It isn't out of service.",
                fix="Look its last job up: jamnut history.",
            )
        )
    for one in deviations(writer, machine=revision.machine):
        if one.standing is Standing.OPEN and one.noted.said.kind in _SETTINGS:
            raise _refused(
                one.number,
                f"{one.noted.said.what}: {one.noted.said.kind.value}.",
                "Set it again first; within its window it is corrected.",
            )
    tell_of(writer, revision, InService(by=_first(how), on=how.on, note=remark), how)


def _against(view: View, revision: Revision, number: int, ending: Ending) -> list[str]:
    """What keeps a job from ending; locks may stay on a machine that is out of service."""
    against = [
        f"powered window {one.sequence}: It is open."
        for one in windows_open(view, machine=revision.machine)
        if one.said.job == number
    ]
    if ending is not Ending.DONE:
        return against
    against += [
        f"deviation {one.number}: {one.noted.said.what}. It is open."
        for one in deviations(view, machine=revision.machine)
        if one.noted.said.job == number and one.standing is Standing.OPEN
    ]
    against += [
        f"lock {one.said.lock}: {one.said.by}'s lock on {one.said.where} is on."
        for one in locks_on(view, machine=revision.machine)
        if one.said.job == number
    ]
    return against


def _begun(view: View, revision: Revision, number: int) -> bool:
    return any(one.said.job == number for one in readings(view, machine=revision.machine))


def _open_deviation(view: View, number: int) -> Deviation:
    one = next((one for one in deviations(view) if one.number == number), None)
    if one is None:
        raise InputError(
            Problem(
                where=f"deviation {number}",
                what="There is no such deviation.",
                fix="Look its number up: jamnut history.",
            )
        )
    if one.standing is not Standing.OPEN:
        raise _refused(number, f"It is {one.standing.value} already.", "Nothing is left to do about it.")
    return one


def _hold_day(one: Deviation, how: Telling) -> None:
    """A deviation ends on its day or later. Raises RefusedError; InputError for a day that is to come."""
    hold_past(how)
    if how.on < one.noted.said.on:
        raise _refused(
            one.number,
            f"It is of {one.noted.said.on}; nothing ended it on {how.on}, before that.",
            "Give the day on which it was accepted or put right.",
        )


def _refused(number: int, what: str, fix: str) -> RefusedError:
    return RefusedError(Problem(where=f"deviation {number}", what=what, fix=fix))


def _first(how: Telling) -> str:
    return how.people[0] if how.people else how.by
