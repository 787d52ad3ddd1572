"""What the record page shows of one paper: how it stands, what the record says beside it, and its targets.

Targets are shown for the current revision only, and only where the code of the paper is the record's own:
from any other paper nobody may set a machine.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from enum import Enum
from typing import Final

from sheets.crockford import as_printed
from sheets.pipeline.reading_room import ReadingRoom
from sheets.pipeline.settings_shown import SettingShown, settings_shown
from sheets.register.chain import ChainVerdict
from sheets.register.currency import Currency, Standing, currency_in
from sheets.register.deviations import Deviation, deviations, out_of_service
from sheets.register.deviations import Standing as DeviationStanding
from sheets.register.jobs import jobs
from sheets.register.readings import readings
from sheets.register.revisions import Revision
from sheets.register.store import View

IN_CODE: Final = 8
"""Characters of the content digest that the code of a page carries."""
_LONGEST_SCANNED: Final = 40


@dataclass(frozen=True, kw_only=True)
class Paper:
    """What the code of a page says, or who types it off: anybody may have written it."""

    record_id: str
    digest: str = ""
    revision: str = ""


class Shown(Enum):
    """What the page says largest. Only the first lets anybody work from the paper."""

    CURRENT = "current"
    SUPERSEDED = "superseded"
    WITHDRAWN = "withdrawn"
    VOID = "void"
    REJECTED = "rejected"
    NOT_ISSUED = "not_issued"
    OTHER_PAPER = "other_paper"
    UNKNOWN = "unknown"
    NOT_ESTABLISHED = "not_established"


_SHOWN: Final = {
    Standing.CURRENT: Shown.CURRENT,
    Standing.SUPERSEDED: Shown.SUPERSEDED,
    Standing.WITHDRAWN: Shown.WITHDRAWN,
    Standing.VOID: Shown.VOID,
    Standing.REJECTED: Shown.REJECTED,
    Standing.NOT_ISSUED: Shown.NOT_ISSUED,
    Standing.UNKNOWN: Shown.UNKNOWN,
    Standing.NOT_ESTABLISHED: Shown.NOT_ESTABLISHED,
}


@dataclass(frozen=True, kw_only=True)
class Compared:
    """One thing that paper and record both say."""

    what: str
    """revision, content."""
    paper: str
    """As scanned; empty where nothing was."""
    record: str

    @property
    def differs(self) -> bool:
        return bool(self.paper) and self.paper != self.record


@dataclass(frozen=True, kw_only=True)
class RevisionLine:
    """A revision in a list."""

    document: str
    machine: str
    number: str
    record_id: str
    state: str
    """A member's name of Shown, in small letters."""
    on: str
    """Day of its issue or its end, at the works; empty while it is open."""
    by: str
    why: str


@dataclass(frozen=True, kw_only=True)
class OpenDeviation:
    """A deviation that nobody has accepted or corrected."""

    number: int
    what: str
    kind: str
    on: str
    acceptable: bool
    record_id: str
    machine: str


@dataclass(frozen=True, kw_only=True)
class JobLine:
    """An open job."""

    number: int
    why: str
    on: str


@dataclass(frozen=True, kw_only=True)
class RecordLook:
    """One record as its page shows it."""

    key: str
    """The record id as it was asked for, as printed."""
    shown: Shown
    revision: RevisionLine | None = None
    current: RevisionLine | None = None
    """What is current instead, if something is."""
    compared: tuple[Compared, ...] = ()
    digest: str = ""
    """Content digest as printed on the sheets, in groups of four."""
    signers: tuple[tuple[str, str], ...] = ()
    ink: bool = False
    out_of_service: str = ""
    """Since when and why the machine isn't used; empty while it is."""
    open: tuple[OpenDeviation, ...] = ()
    settings: tuple[SettingShown, ...] = ()
    jobs: tuple[JobLine, ...] = ()
    """Open jobs from these sheets."""
    file_digest: str = ""
    """Of the signed file of a current revision, which may be at hand or not."""

    @property
    def scanned(self) -> bool:
        """Whether anything of the paper is known beside its record id."""
        return any(one.paper for one in self.compared)

    @property
    def good(self) -> bool:
        return self.shown is Shown.CURRENT


def look_at_record(room: ReadingRoom, paper: Paper, *, now: datetime) -> RecordLook:
    """What the page says of a paper. Raises InputError if the register can't be read at all."""
    key = as_printed(paper.record_id[:_LONGEST_SCANNED])
    held = Paper(
        record_id=key,
        digest=as_printed(paper.digest[:_LONGEST_SCANNED]),
        revision=paper.revision.strip()[:_LONGEST_SCANNED],
    )

    def find(view: View, chain: ChainVerdict) -> RecordLook:
        return _look(room, view, currency_in(view, chain, key), held)

    return room.answer(("record", held), now, find)


def look_at_file(room: ReadingRoom, record_id: str, *, now: datetime) -> tuple[str, bytes] | None:
    """Name and bytes of a current record's signed file; None for any other record, and without the file."""
    seen = look_at_record(room, Paper(record_id=record_id), now=now)
    if not seen.good or seen.revision is None:
        return None
    data = room.files.read(seen.file_digest)
    return None if data is None else (f"{seen.revision.record_id}.pdf", data)


def _look(room: ReadingRoom, view: View, found: Currency, paper: Paper) -> RecordLook:
    revision, shown = found.revision, _SHOWN[found.standing]
    if revision is None:
        return RecordLook(key=paper.record_id, shown=shown)
    compared = _compared(revision, paper)
    if any(one.differs for one in compared):
        shown = Shown.OTHER_PAPER
    issue = revision.issue
    noted = deviations(view, machine=revision.machine)
    out = out_of_service(view, machine=revision.machine)
    current = found.current if found.current and found.current.record_id != revision.record_id else None
    return RecordLook(
        key=paper.record_id,
        shown=shown,
        revision=revision_line(room, revision),
        current=revision_line(room, current) if current else None,
        compared=compared,
        digest=grouped(issue.content_digest) if issue else "",
        signers=tuple((one.meaning, one.name) for one in issue.signers) if issue else (),
        ink=issue.ink if issue else False,
        out_of_service=f"{out.said.on}: {out.said.why} ({out.said.by})" if out else "",
        open=open_deviations(noted),
        settings=(
            settings_shown(issue.kept, readings(view, machine=revision.machine), noted)
            if shown is Shown.CURRENT and issue is not None and issue.kept is not None
            else ()
        ),
        jobs=tuple(
            JobLine(number=one.number, why=one.opened.said.why, on=one.opened.said.on.isoformat())
            for one in jobs(view, record_id=revision.record_id)
            if one.open
        ),
        file_digest=issue.file_digest if shown is Shown.CURRENT and issue is not None else "",
    )


def _compared(revision: Revision, paper: Paper) -> tuple[Compared, ...]:
    """The two things that the code of a page carries, beside the record's own."""
    lines = [Compared(what="revision", paper=paper.revision, record=str(revision.number))]
    if revision.issue is not None:
        content = revision.issue.content_digest
        # One that was typed off the foot of a page has all 16; the code carries the first 8.
        length = len(content) if len(paper.digest) > IN_CODE else IN_CODE
        lines.append(Compared(what="content", paper=grouped(paper.digest), record=grouped(content[:length])))
    return tuple(lines)


def grouped(digest: str) -> str:
    """A digest as it stands at the foot of a page, in groups of four."""
    return "-".join(digest[at : at + 4] for at in range(0, len(digest), 4))


def revision_line(room: ReadingRoom, revision: Revision) -> RevisionLine:
    """A revision as a list shows it."""
    at = revision.ended_at or (revision.issue.at if revision.issue else None)
    return RevisionLine(
        document=revision.document,
        machine=revision.machine,
        number=str(revision.number),
        record_id=revision.record_id,
        state=_state(revision),
        on=room.day(at).isoformat() if at else "",
        by=revision.ended_by or (revision.issue.by if revision.issue else revision.reserved_by),
        why=revision.reason,
    )


def _state(revision: Revision) -> str:
    return {"reserved": "not_issued", "issued": "current"}.get(revision.state.value, revision.state.value)


def open_deviations(found: Sequence[Deviation]) -> tuple[OpenDeviation, ...]:
    """Those that still stand open."""
    return tuple(
        OpenDeviation(
            number=one.number,
            what=one.noted.said.what,
            kind=one.noted.said.kind.value,
            on=one.noted.said.on.isoformat(),
            acceptable=one.acceptable,
            record_id=one.noted.record_id,
            machine=one.noted.machine,
        )
        for one in found
        if one.standing is DeviationStanding.OPEN
    )
