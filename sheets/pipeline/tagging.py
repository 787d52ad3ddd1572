"""Setting tags with what was left: printed from what the register kept of a pack, posted at the machine."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date, datetime
from pathlib import Path

from sheets import ENGINE
from sheets.errors import InputError, NotEstablishedError, Problem, RefusedError, quoted
from sheets.machine.files import write_pdf
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout, SheetKind
from sheets.pages.layout import place
from sheets.pages.press import pdf_bytes
from sheets.pipeline.computing import steps, task_of
from sheets.pipeline.describing import check_sources
from sheets.pipeline.issuing import ISSUED
from sheets.pipeline.keeping import sources_of
from sheets.pipeline.printing import whole_content
from sheets.pipeline.replacing import keep_issued
from sheets.pipeline.zones import zone_of
from sheets.register.copies import TagPosted
from sheets.register.deviations import Deviation, Standing, deviations, standing_about
from sheets.register.finding import found_in
from sheets.register.kept import Kept
from sheets.register.opening import Place, open_register
from sheets.register.readings import KeptReading, last_left
from sheets.register.recording import Telling, kept_of_issue, tell_of
from sheets.register.revisions import Revision, RevisionState
from sheets.register.store import View


@dataclass(frozen=True, kw_only=True)
class Left:
    """How an adjuster was left, as its tag prints it."""

    reading: KeptReading
    line: str
    open: int = 0
    """Deviation that stands open about it, or 0."""


def tags(record_id: str, target: Path, *, register_at: Place) -> tuple[str, ...]:
    """Prints the setting tags of an issued pack with the values as left; gives their lines.

    They are made again from what the register kept. Raises RefusedError for a pack that isn't current,
    NotEstablishedError where this engine makes other content of it, InputError for a file that can't be
    written.
    """
    with open_register(register_at, read_only=True) as register, register.reading() as view:
        revision = _current(view, record_id)
        kept = kept_of_issue(revision)
        matter = remade(revision, kept)
        left = left_of(view, revision, matter)
    issue = context(revision, kept, matter, left)
    said = whole_content(matter)
    layout = Layout(paper="Letter" if kept.paper == "Letter" else "A4", kinds=(SheetKind.TAGS,))
    pages = place(said.document, layout, issue, digest=said.digest)
    keep_issued(target)
    write_pdf(target, pdf_bytes(pages, said.document, issue=issue, fillable=False))
    return tuple(f"{adjuster}: {one.line}" for adjuster, one in left.items())


def post(
    record_id: str,
    adjuster: str,
    *,
    register_at: Place,
    where: str,
    by: str,
    on: date,
    when: datetime,
) -> str:
    """A tag hangs at the machine. ``on``: the day of it.

    Raises RefusedError where nothing was left that a tag could show, or a deviation of it is open.
    """
    with open_register(register_at) as register, register.writing() as writer:
        revision = _current(writer, record_id)
        left = left_of(writer, revision, remade(revision, kept_of_issue(revision))).get(adjuster)
        if left is None or left.open:
            what, fix = (
                (f"Deviation {left.open} about how it was left is open.", "Settle it first.")
                if left is not None
                else ("No reading as left that counts is recorded for it.", "Record it.")
            )
            raise RefusedError(Problem(where=f"tag of {adjuster}", what=what, fix=fix))
        how = Telling(by=by, when=when, on=on, people=(by,))
        said = TagPosted(
            adjuster=adjuster,
            where=where,
            as_left=left.line,
            reading=left.reading.told.sequence,
            by=by,
            on=how.on,
        )
        tell_of(writer, revision, said, how)
    return f"tag of {adjuster} hangs: {left.line}"


def _current(view: View, record_id: str) -> Revision:
    revision = found_in(view, record_id)
    if revision.state is RevisionState.ISSUED:
        return revision
    raise RefusedError(
        Problem(
            where=f"record {revision.record_id}",
            what=f"Revision {revision.number} is {revision.state.value}; its tags come down.",
            fix="Give the record id of the current revision.",
        )
    )


def left_of(view: View, revision: Revision, matter: Matter) -> dict[str, Left]:
    """What the tags of a pack print as left: the newest reading of each adjuster, what stands about it."""
    found = deviations(view, machine=revision.machine)
    rows = {row.adjuster for row in kept_of_issue(revision).rows}
    return {
        adjuster: _left(matter, one, standing_about(found, one.told.sequence))
        for adjuster, one in last_left(view, machine=revision.machine).items()
        if adjuster in rows
    }


def _left(matter: Matter, one: KeptReading, deviation: Deviation | None) -> Left:
    reading = f"{one.said.value} {one.said.unit}"
    if deviation is None:
        on = one.said.on.isoformat()
        line = matter.text("tag_as_left", reading=reading, on=on, gauge=one.said.instrument)
        return Left(reading=one, line=line)
    is_open = deviation.standing is Standing.OPEN
    text = "tag_left_open" if is_open else "tag_left_accepted"
    line = matter.text(text, reading=reading, deviation=str(deviation.number))
    return Left(reading=one, line=line, open=deviation.number if is_open else 0)


def remade(revision: Revision, kept: Kept) -> Matter:
    """The job of an issued pack, made again from what the register kept of it.

    Raises NotEstablishedError where this engine makes other content of it.
    """
    issue = revision.issue
    described = check_sources(sources_of(kept))
    matter = steps(described, task_of(described, kept.task, kept.part or None))
    if issue is None or issue.engine != ENGINE or whole_content(matter).digest != issue.content_digest:
        raise NotEstablishedError(
            Problem(
                where=f"revision {revision.number} of document {quoted(revision.document)}",
                what="This version makes other content of it than was issued.",
                fix="Use the version that issued it, or issue it anew.",
            )
        )
    return matter


def context(revision: Revision, kept: Kept, matter: Matter, left: dict[str, Left]) -> IssueContext:
    """The issue of a pack as its pages carry it, with the values as left."""
    issue, site = revision.issue, matter.site
    if issue is None or site is None:
        raise InputError(
            Problem(where="site file", what="The pack was issued without one.", fix="Issue it anew.")
        )
    note = site.signatures.note
    return IssueContext(
        record_id=revision.record_id,
        record_address=str(site.record_address),
        revision=str(revision.number),
        state=note or ISSUED,
        mark=note.split(",")[0].upper(),
        date=revision.reserved_at.astimezone(zone_of(site)).date().isoformat(),
        zone=site.zone,
        signers=tuple((one.meaning, one.name) for one in issue.signers),
        changes=kept.changes,
        reason=kept.reason,
        reviewer=kept.reviewer,
        as_left=tuple((adjuster, one.line) for adjuster, one in left.items()),
    )
