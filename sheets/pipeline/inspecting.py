"""Periodic inspections: told to the register, and the year's clock of every document."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date, datetime

from sheets.errors import ExitStatus, InputError, Problem
from sheets.pipeline.whole import whole_register
from sheets.register.deviations import Deviation, deviations
from sheets.register.finding import document_of, documents_in
from sheets.register.inspecting import Telling
from sheets.register.inspecting import inspect as told_inspected
from sheets.register.inspections import Clock, Inspected, Inspection, clock_of, inspections
from sheets.register.opening import Place, open_register
from sheets.register.revisions import current
from sheets.wording.plain import FORMAT, Json, columns, counted


@dataclass(frozen=True, kw_only=True)
class InspectionsOn:
    """The clock of documents as of a day, and the inspections of one where it was asked."""

    day: date
    clocks: tuple[Clock, ...]
    done: tuple[Inspection, ...]
    deviations: tuple[Deviation, ...]
    """Those that an inspection found."""

    @property
    def status(self) -> ExitStatus:
        """One that is overdue, or whose last inspector used the procedure, is 1."""
        good = all(
            not one.overdue_on(self.day) and (one.last is None or one.last.independent) for one in self.clocks
        )
        return ExitStatus.GOOD if good else ExitStatus.REFUSED


def inspect(
    register_at: Place,
    *,
    document: str,
    record_id: str | None,
    inspector: str,
    employees: Sequence[str],
    on: date,
    deviations: Sequence[str],
    corrections: Sequence[str],
    by: str,
    today: date,
    when: datetime,
) -> tuple[Inspection, list[int]]:
    """Tells of an inspection of a document's current revision, or of the one that ``record_id`` names.

    ``on``, ``today``: days at the works; the first ``corrections`` are those of the first ``deviations``.
    Gives the inspection, and the numbers of the deviations that stay open. Raises as the register does.
    """
    said = Inspected(
        on=on,
        employees=tuple(employees),
        inspector=inspector,
        deviations=tuple(deviations),
        corrections=tuple(corrections),
    )
    with open_register(register_at) as register:
        with register.reading() as view:
            revisions = document_of(view, document)
        newest = current(revisions)
        if record_id is None and newest is None:
            raise InputError(
                Problem(
                    where=f"document {revisions[0].document}",
                    what="No revision of it is current.",
                    fix="Name the one that was inspected with --record.",
                )
            )
        wanted = record_id or (newest.record_id if newest else "")
        if wanted not in {one.record_id for one in revisions}:
            raise InputError(
                Problem(
                    where="--record",
                    what=f"It is no record of document {revisions[0].document}.",
                    fix="Read it off the sheets that were inspected.",
                )
            )
        return told_inspected(register, wanted, said, Telling(by=by, when=when, today=today))


def inspections_on(register_at: Place, *, day: date, document: str | None = None) -> InspectionsOn:
    """The year's clock as of a ``day``: of all documents with a current revision, or of one with all of its
    inspections. Raises InputError for a document that isn't known.
    """
    with whole_register(register_at) as whole:
        view = whole.view
        named = None if document is None else document_of(view, document)[0].document
        wanted = documents_in(view) if named is None else (named,)
        clocks = tuple(clock for one in wanted if (clock := clock_of(view, one)) is not None)
        done = inspections(view, document=named) if named is not None else ()
        return InspectionsOn(
            day=day,
            clocks=clocks,
            done=done,
            deviations=tuple(one for one in deviations(view, document=named) if one.noted.said.inspection)
            if named is not None
            else (),
        )


def inspected_text(made: Inspection, left: Sequence[int]) -> Iterator[str]:
    """What came of telling."""
    yield f"event {made.told.sequence}: revision {made.revision} of {made.told.document} inspected"
    if made.left_out:
        yield f"used the procedure and weren't included: {', '.join(made.left_out)}"
    if left:
        yield f"open: {counted(len(left), 'deviation')}, {', '.join(map(str, left))}"


def inspections_text(found: InspectionsOn) -> Iterator[str]:
    """The clock in columns; of one document, each inspection with what it found."""
    yield f"inspections as of {found.day}: {counted(len(found.clocks), 'document')} with a current revision"
    if found.clocks:
        rows = [("document", "machine", "rev", "event", "last", "inspector", "independent", "due", "")]
        yield from columns([*rows, *(_row(one, found.day) for one in found.clocks)])
    for one in found.done:
        said = one.said
        yield ""
        yield f"event {one.told.sequence}: {said.on}, machine {one.told.machine}, revision {one.revision}"
        yield f"    inspector: {said.inspector}, {independence(one)}"
        yield f"    included: {', '.join(said.employees)}"
        if one.left_out:
            yield f"    used it and weren't included: {', '.join(one.left_out)}"
        for it in found.deviations:
            if it.noted.said.inspection == one.told.sequence:
                yield f"    deviation {it.number}, {it.standing.value}: {it.noted.said.what}"
                yield from (f"        {line}" for line in ending_lines(it))
        if not said.deviations:
            yield "    no deviation"


def independence(one: Inspection) -> str:
    """Whether the inspector was independent, with what speaks against it."""
    if one.independent:
        return "not a user of it"
    if one.against:
        return f"NOT INDEPENDENT: used it in events {', '.join(map(str, one.against))}"
    return "NOT INDEPENDENT: among the included"


def ending_lines(one: Deviation) -> Iterator[str]:
    """Who accepted or corrected a deviation, when and why."""
    if one.accepted is not None:
        it = one.accepted.said
        yield f"accepted on {it.on} by {it.by}: {it.why} (event {one.accepted.sequence})"
    if one.corrected is not None:
        done = one.corrected.said
        yield f"{one.standing.value} on {done.on} by {done.by}: {done.how} (event {one.corrected.sequence})"


def _row(one: Clock, day: date) -> tuple[str, ...]:
    last = one.last
    return (
        one.document,
        one.machine,
        str(one.revision),
        str(last.told.sequence) if last else "",
        last.said.on.isoformat() if last else "never",
        last.said.inspector if last else "",
        ("yes" if last.independent else "NO") if last else "",
        one.due.isoformat(),
        standing_of(one, day),
    )


def standing_of(one: Clock, day: date) -> str:
    """How the clock of a document stands on a ``day``."""
    away = (one.due - day).days
    if away < 0:
        return f"OVERDUE by {counted(-away, 'day')}"
    return f"in {counted(away, 'day')}"


def inspections_json(found: InspectionsOn) -> dict[str, Json]:
    """The same as data."""
    clocks: list[Json] = [
        {
            "document": one.document,
            "machine": one.machine,
            "revision": one.revision,
            "last": _inspection(one.last) if one.last else None,
            "due": one.due.isoformat(),
            "overdue": one.overdue_on(found.day),
        }
        for one in found.clocks
    ]
    done: list[Json] = [_inspection(one) for one in found.done]
    return {"format": FORMAT, "day": found.day.isoformat(), "clocks": clocks, "done": done}


def _inspection(one: Inspection) -> dict[str, Json]:
    said = one.said
    return {
        "event": one.told.sequence,
        "machine": one.told.machine,
        "document": one.told.document,
        "record_id": one.told.record_id,
        "revision": one.revision,
        "on": said.on.isoformat(),
        "employees": list[Json](said.employees),
        "inspector": said.inspector,
        "independent": one.independent,
        "against": list[Json](one.against),
        "left_out": list[Json](one.left_out),
        "deviations": list[Json](said.deviations),
        "corrections": list[Json](said.corrections),
    }
