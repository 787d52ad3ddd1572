"""Tells of an inspection: its four fields and what was found, by somebody who doesn't use the procedure."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from typing import Final

from sheets.errors import InputError, Problem, RefusedError, quoted
from sheets.names import same_person
from sheets.register.deviations import DeviationCorrected, DeviationKind, DeviationNoted
from sheets.register.finding import found_in
from sheets.register.inspections import (
    MAY_INSPECT,
    Inspected,
    Inspection,
    begin_of,
    inspections,
    used_by,
    users,
)
from sheets.register.people import person_on
from sheets.register.revisions import Revision
from sheets.register.saying import Said, tell
from sheets.register.store import Register, View, Writer

_LATEST_ZONE: Final = timedelta(hours=12)
"""The register keeps times in UTC; that far west it may still have been the day before."""


@dataclass(frozen=True, kw_only=True)
class Telling:
    """Who tells the register, when, and which day it is at the works."""

    by: str
    when: datetime
    today: date


def inspect(
    register: Register, record_id: str, said: Inspected, how: Telling
) -> tuple[Inspection, list[int]]:
    """Tells of an inspection of a revision, notes each deviation, and ends those that were corrected.

    Gives the inspection and the numbers of the deviations that stay open. Raises RefusedError, with
    everything that stands against it, for an inspector who uses the procedure, is among the included or isn't
    authorised that day; InputError for a field that is missing and for a day that can't be.
    """
    with register.writing() as writer:
        revision = found_in(writer, record_id)
        _check_fields(revision, said, how.today)
        against = list(_against(writer, revision, said))
        if against:
            raise RefusedError(*against)
        number = _tell(writer, revision, said, how)
        left = []
        for place, what in enumerate(said.deviations):
            noted = DeviationNoted(
                job=0, inspection=number, kind=DeviationKind.OTHER, what=what, by=said.inspector, on=said.on
            )
            deviation = _tell(writer, revision, noted, how)
            if place < len(said.corrections):
                corrected = DeviationCorrected(
                    deviation=deviation, by=said.inspector, how=said.corrections[place], on=said.on
                )
                _tell(writer, revision, corrected, how)
            else:
                left.append(deviation)
        made = next(
            one for one in inspections(writer, document=revision.document) if one.told.sequence == number
        )
    return made, left


def _tell(writer: Writer, revision: Revision, said: Said, how: Telling) -> int:
    return tell(
        writer,
        said,
        who=how.by,
        when=how.when,
        machine=revision.machine,
        document=revision.document,
        record_id=revision.record_id,
    )


def _check_fields(revision: Revision, said: Inspected, today: date) -> None:
    where = f"inspection of document {quoted(revision.document)}"
    if not said.employees:
        what, fix = "Nobody is named who was included.", "Name each with --with."
    elif len(said.corrections) > len(said.deviations):
        what, fix = "There are more corrections than deviations.", "Give each correction its deviation."
    elif said.on > today:
        what, fix = f"Its day, {said.on}, is still to come.", "Tell of it once it was done."
    elif revision.issue is None or said.on < (revision.issue.at - _LATEST_ZONE).date():
        what = f"Revision {revision.number} wasn't issued on {said.on}."
        fix = "Name the revision that was inspected by its record id."
    else:
        return
    raise InputError(Problem(where=where, what=what, fix=fix))


def _against(view: View, revision: Revision, said: Inspected) -> Iterator[Problem]:
    where = f"inspector {quoted(said.inspector)}"
    earlier = [one.said.on for one in inspections(view, document=revision.document)]
    first = begin_of(earlier, said.on)
    used = users(view, document=revision.document, first=first, last=said.on)
    events = used_by(used, said.inspector)
    if events:
        since = "" if first == date.min else f" since {first}"
        yield Problem(
            where=where,
            what=f"They used the procedure themselves{since}: {_listed('event', events)}.",
            fix=f"Its users are {', '.join(used)}: another authorised person inspects.",
        )
    if any(same_person(name, said.inspector) for name in said.employees):
        yield Problem(
            where=where,
            what="They are among those who were included.",
            fix="The inspector looks at how others use the procedure; name those others.",
        )
    person = person_on(view, said.inspector, said.on)
    if not any(person.may(what) for what in MAY_INSPECT):
        yield Problem(
            where=where,
            what=f"The register doesn't know them as authorised for {' or '.join(MAY_INSPECT)} on {said.on}.",
            fix="Tell of the authorisation with its day first: jamnut people.",
        )


def _listed(thing: str, numbers: tuple[int, ...]) -> str:
    return f"{thing}{'' if len(numbers) == 1 else 's'} {', '.join(map(str, numbers))}"
