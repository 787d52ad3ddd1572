"""The lists of an audit, each line with the number of the event that it follows from."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from datetime import date

from sheets.pages.compose.audit import AuditList
from sheets.pages.layout import grouped
from sheets.pipeline.inspecting import independence, standing_of
from sheets.register.acts import ZeroRead, locks_on
from sheets.register.copies import copies, tags
from sheets.register.deviations import Deviation, deviations, out_of_service
from sheets.register.finding import documents_in
from sheets.register.inspections import clock_of, inspections
from sheets.register.instruments import instruments
from sheets.register.jobs import jobs
from sheets.register.people import AuthorisationEnded, Authorised, Trained, names, person_on
from sheets.register.revisions import Revision, current
from sheets.register.saying import told
from sheets.register.store import View

Documents = Mapping[str, tuple[Revision, ...]]
Rows = Iterator[tuple[str, ...]]


def lists_of(view: View, day: date) -> tuple[AuditList, ...]:
    """All lists as of a ``day``. Raises InputError for an event that can't be read."""
    documents = documents_in(view)
    return (
        AuditList(
            name="machines",
            title="Machines",
            light="with the sheets that are current",
            head=("event", "machine", "document", "rev", "record", "content", "issued, UTC", "state"),
            rows=tuple(_machines(view, documents)),
            shares=(0.06, 0.12, 0.12, 0.06, 0.14, 0.22, 0.12, 0.16),
            none="the register knows none.",
        ),
        AuditList(
            name="due",
            title="Inspections due",
            light="the next first; at most 12 months after the last, or after the first issue",
            head=("event", "machine", "document", "last", "by", "due", "state"),
            rows=tuple(sorted(_due(view, documents, day), key=lambda row: row[5])),
            shares=(0.07, 0.12, 0.14, 0.13, 0.2, 0.13, 0.21),
            none="no document has a current revision.",
        ),
        AuditList(
            name="deviations",
            title="Deviations",
            light="open, and accepted as they are",
            head=("event", "machine", "document", "what", "noted", "state"),
            rows=tuple(_deviations(view)),
            shares=(0.07, 0.1, 0.12, 0.33, 0.14, 0.24),
            none="none is open or accepted.",
        ),
        AuditList(
            name="work",
            title="Open jobs, locks, zeros and tags",
            light="jobs and locks until they end; the last zero of each place; the tags that hang",
            head=("event", "machine", "what", "where", "said", "day", "by"),
            rows=tuple(_work(view, documents)),
            shares=(0.07, 0.11, 0.11, 0.19, 0.22, 0.13, 0.17),
            none="no job is open, no lock is on, and neither zero nor tag was told.",
        ),
        AuditList(
            name="inspections",
            title="Inspections done",
            light="",
            head=("event", "day", "machine", "document", "rev", "inspector", "included", "deviations"),
            rows=tuple(_inspections(view)),
            shares=(0.07, 0.12, 0.1, 0.11, 0.05, 0.21, 0.18, 0.16),
            none="none was told.",
            section="Papers and inspections",
        ),
        AuditList(
            name="revisions",
            title="Revisions",
            light="a number that was given out is never used again",
            head=("event", "document", "rev", "record", "content", "state, days in UTC", "by"),
            rows=tuple(_revisions(documents)),
            shares=(0.06, 0.12, 0.05, 0.14, 0.22, 0.21, 0.2),
            none="none was given out.",
        ),
        AuditList(
            name="copies",
            title="Copies",
            light="of sheets, where they hang",
            head=("event", "document", "copy", "rev", "where", "hung", "taken down"),
            rows=tuple(_copies(view, documents)),
            shares=(0.07, 0.11, 0.06, 0.05, 0.27, 0.2, 0.24),
            none="none was told to hang.",
        ),
        AuditList(
            name="instruments",
            title="Instruments",
            light="",
            head=("event", "serial", "no.", "what", "range", "largest error", "certificate", "due", "state"),
            rows=tuple(_instruments(view, day)),
            shares=(0.07, 0.12, 0.05, 0.14, 0.1, 0.12, 0.12, 0.12, 0.16),
            none="none is listed.",
            section="Instruments and people",
        ),
        AuditList(
            name="people",
            title="People",
            light=f"what counts on {day.isoformat()}",
            head=("event", "name", "what", "for", "from", "to", "by"),
            rows=tuple(_people(view, day)),
            shares=(0.07, 0.18, 0.12, 0.23, 0.12, 0.12, 0.16),
            none="nobody was told to be authorised or trained.",
        ),
    )


def _machines(view: View, documents: Documents) -> Rows:
    for document, revisions in documents.items():
        machine = revisions[0].machine
        newest = current(revisions)
        out = out_of_service(view, machine=machine)
        state = f"OUT OF SERVICE since {out.said.on}, event {out.sequence}" if out else "in service"
        if newest is None or newest.issue is None:
            last = revisions[-1]
            event = last.ended_sequence or last.reserved_sequence
            yield str(event), machine, document, "none", "", "", "", f"{state}; no sheet is current"
            continue
        yield (
            str(newest.issue.sequence),
            machine,
            document,
            str(newest.number),
            newest.record_id,
            grouped(newest.issue.content_digest),
            newest.issue.at.date().isoformat(),
            state,
        )


def _revisions(documents: Documents) -> Rows:
    for document, revisions in documents.items():
        for one in revisions:
            sequence, by = one.reserved_sequence, one.reserved_by
            states = [f"reserved {one.reserved_at.date()}"]
            if one.issue is not None:
                sequence = one.issue.sequence
                states = [f"issued {one.issue.at.date()}{', in ink' if one.issue.ink else ''}"]
                by = "; ".join(f"{it.meaning} {it.name}" for it in one.issue.signers)
            if one.superseded_by is not None:
                later = revisions[one.superseded_by - 1].issue
                event = f" (event {later.sequence})" if later else ""
                states.append(f"superseded by revision {one.superseded_by}{event}")
            if one.ended_at is not None:
                states.append(
                    f"{one.state.value} {one.ended_at.date()} by {one.ended_by}: {one.reason} "
                    f"(event {one.ended_sequence})"
                )
            content = grouped(one.issue.content_digest) if one.issue else ""
            yield str(sequence), document, str(one.number), one.record_id, content, "; ".join(states), by


def _due(view: View, documents: Documents, day: date) -> Rows:
    for document in documents:
        clock = clock_of(view, document)
        if clock is None:
            continue
        last = clock.last
        state = standing_of(clock, day)
        if last is not None and not last.independent:
            state += "; NOT INDEPENDENT"
        yield (
            str(last.told.sequence if last else clock.issued_sequence),
            clock.machine,
            document,
            last.said.on.isoformat() if last else "never",
            last.said.inspector if last else f"first issued {clock.first_issued}",
            clock.due.isoformat(),
            state,
        )


def _inspections(view: View) -> Rows:
    for one in inspections(view):
        found = [
            it
            for it in deviations(view, document=one.told.document)
            if it.noted.said.inspection == one.number
        ]
        yield (
            str(one.number),
            one.said.on.isoformat(),
            one.told.machine,
            one.told.document,
            str(one.revision),
            f"{one.said.inspector}, {independence(one)}",
            ", ".join(one.said.employees)
            + (f"; used it and weren't included: {', '.join(one.left_out)}" if one.left_out else ""),
            "; ".join(f"{it.number} {it.standing.value}" for it in found) or "none",
        )


def _work(view: View, documents: Documents) -> Rows:
    """What stands at each machine: open jobs, locks on, the last zero of each place, tags that hang."""
    for machine in sorted({revisions[0].machine for revisions in documents.values()}):
        for job in jobs(view, machine=machine):
            if job.open:
                opened = job.opened.said
                by = ", ".join(opened.people) or job.opened.by
                yield str(job.number), machine, "open job", "", opened.why, opened.on.isoformat(), by
        for lock in locks_on(view, machine=machine):
            put, said = lock.said, f"lock {lock.said.lock}, job {lock.said.job}"
            yield str(lock.sequence), machine, "lock on", put.where, said, put.on.isoformat(), put.by
        for zero in {one.said.where: one for one in told(view, ZeroRead, machine=machine)}.values():
            seen = zero.said
            moved = "" if seen.moved else ", not seen to move"
            said = f"{seen.value} {seen.unit} at {seen.instrument}{moved}"
            yield str(zero.sequence), machine, "zero read", seen.where, said, seen.on.isoformat(), seen.by
        for adjuster, tag in tags(view, machine=machine).items():
            hung = tag.said
            said = f"{adjuster}: {hung.as_left}"
            yield str(tag.sequence), machine, "tag hangs", hung.where, said, hung.on.isoformat(), hung.by


def _copies(view: View, documents: Documents) -> Rows:
    for document in documents:
        for one in copies(view, document):
            hung, down = one.hung.said, one.down
            if down is not None:
                end = f"{down.said.on} by {down.said.by}, event {down.sequence}"
            else:
                end = "TAKE IT DOWN: not current" if one.old else "hangs"
            yield (
                str(one.hung.sequence),
                document,
                str(hung.copy),
                str(one.revision.number),
                hung.where,
                f"{hung.on} by {hung.by}",
                end,
            )


def _deviations(view: View) -> Rows:
    for one in deviations(view):
        if not one.stands:
            continue
        noted = one.noted
        yield (
            str(one.number),
            noted.machine,
            noted.document,
            f"{noted.said.what} ({noted.said.kind.value})",
            f"{noted.said.on} by {noted.said.by}",
            _standing(one),
        )


def _standing(one: Deviation) -> str:
    if one.accepted is None:
        return "OPEN"
    said = one.accepted.said
    return f"accepted {said.on} by {said.by}: {said.why} (event {one.accepted.sequence})"


def _instruments(view: View, day: date) -> Rows:
    known = instruments(view)
    for serial in sorted(known):
        one = known[serial]
        said, bad = one.listed.said, one.bad
        if bad is not None:
            state = f"FOUND BAD {bad.said.on}, event {bad.sequence}"
        else:
            state = "usable" if one.usable_on(day) else "OVERDUE"
        yield (
            str(one.listed.sequence),
            serial,
            said.number,
            said.what,
            f"{said.range_end} {said.unit}",
            f"{said.largest_error} {said.unit}",
            said.certificate,
            said.due.isoformat(),
            state,
        )


def _people(view: View, day: date) -> Rows:
    for name in names(view):
        person = person_on(view, name, day)
        for one in person.authorised:
            said = one.said
            until = said.until.isoformat() if said.until else "no end"
            yield str(one.sequence), name, "authorised", said.what, said.since.isoformat(), until, said.by
        for it in person.trained:
            until = it.said.until.isoformat() if it.said.until else "no end"
            yield str(it.sequence), name, "trained", it.said.what, it.said.on.isoformat(), until, it.said.by
        if not person.authorised and not person.trained:
            yield str(_last_event(view, name)), name, "nothing", "counts on that day", "", "", ""


def _last_event(view: View, name: str) -> int:
    """Of those that tell of a person."""
    kinds: tuple[type[Authorised | AuthorisationEnded | Trained], ...] = (
        Authorised,
        AuthorisationEnded,
        Trained,
    )
    return max(
        one.sequence for kind in kinds for one in told(view, kind, saying=name) if one.said.name == name
    )
