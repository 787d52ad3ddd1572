"""What somebody with a paper, or an auditor, asks: is it current, what was used that day, what is open."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date
from typing import Final

from sheets.errors import ExitStatus
from sheets.pages.layout import grouped
from sheets.pipeline.codes import record_of_code
from sheets.pipeline.inspecting import ending_lines
from sheets.pipeline.whole import whole_register
from sheets.register.acts import ACTS, PeopleTold
from sheets.register.chain import Anchor
from sheets.register.currency import Currency, Standing, currency_of
from sheets.register.deviations import Deviation
from sheets.register.deviations import Standing as Ending
from sheets.register.deviations import deviations as noted_deviations
from sheets.register.finding import document_of
from sheets.register.inspections import Users, users
from sheets.register.jobs import jobs
from sheets.register.opening import Place, open_register
from sheets.register.readings import readings
from sheets.register.revisions import Revision
from sheets.register.saying import told
from sheets.register.store import View
from sheets.wording.plain import columns, counted

# Is this paper the current one?


@dataclass(frozen=True, kw_only=True)
class PaperStanding:
    """What the register says of a paper, and in what its code contradicts that."""

    currency: Currency
    mismatch: str = ""

    @property
    def status(self) -> ExitStatus:
        """Current and in agreement is good; what the register doesn't know isn't established."""
        if self.currency.standing in (Standing.UNKNOWN, Standing.NOT_ESTABLISHED):
            return ExitStatus.NOT_ESTABLISHED
        good = self.currency.standing is Standing.CURRENT and not self.mismatch
        return ExitStatus.GOOD if good else ExitStatus.REFUSED


def current(register_at: Place, key: str, *, anchors: tuple[str, ...] = ()) -> PaperStanding:
    """Whether a paper is current: by its record id, its content digest, or what a reader found in its code.

    ``key``: as printed or typed; ``anchors`` were kept outside. Raises InputError for an anchor that is none.
    """
    scanned = record_of_code(key)
    with open_register(register_at, read_only=True) as register:
        found = currency_of(
            register, scanned.record if scanned else key, *(Anchor.read(one) for one in anchors)
        )
    mismatch = ""
    if scanned is not None and found.revision is not None and found.revision.issue is not None:
        one = found.revision
        if scanned.content != found.revision.issue.content_digest[: len(scanned.content)]:
            mismatch = f"its code names content {scanned.content}, the register has another"
        elif scanned.revision != str(one.number):
            mismatch = f"its code names revision {scanned.revision}, the register has {one.number}"
    return PaperStanding(currency=found, mismatch=mismatch)


def current_text(found: PaperStanding) -> Iterator[str]:
    """The answer first, then what it rests on."""
    one, revision = found.currency, found.currency.revision
    if found.mismatch:
        yield f"NOT THE PAPER OF THIS RECORD: {found.mismatch}"
    word = one.standing.value if one.standing is Standing.CURRENT else one.standing.value.upper()
    if revision is None:
        yield word
        if one.trouble:
            yield f"    {one.trouble}"
        return
    yield f"{word}: revision {revision.number} of {revision.document}, machine {revision.machine}"
    yield from (f"    {line}" for line in _rests_on(revision))
    if one.current is not None and one.current != revision:
        issue = one.current.issue
        yield f"    the current one is revision {one.current.number}, record {one.current.record_id}" + (
            f" (event {issue.sequence})" if issue else ""
        )
    if one.alike:
        others = ", ".join(str(it.number) for it in one.alike)
        yield f"    the same content stands in revision {others}"
    if not one.chain.anchored:
        yield "    no anchor from outside was given: a register written anew wouldn't be seen"


def _rests_on(revision: Revision) -> Iterator[str]:
    if revision.issue is not None:
        issue = revision.issue
        yield (
            f"record {revision.record_id}, content {grouped(issue.content_digest)}, "
            f"issued {issue.at:%Y-%m-%d %H:%M} UTC (event {issue.sequence})"
        )
    if revision.ended_at is not None:
        yield (
            f"{revision.state.value} {revision.ended_at:%Y-%m-%d %H:%M} UTC by {revision.ended_by}: "
            f"{revision.reason} (event {revision.ended_sequence})"
        )


# What was used on a day?


@dataclass(frozen=True, kw_only=True)
class Use:
    """One thing that was done from a revision's sheets."""

    event: int
    what: str
    people: tuple[str, ...]


@dataclass(frozen=True, kw_only=True)
class Used:
    """A revision whose sheets were used on a day."""

    revision: Revision
    uses: tuple[Use, ...]


@dataclass(frozen=True, kw_only=True)
class UsedOn:
    """What was used of one document on a day, and what was current then."""

    day: date
    document: str
    used: tuple[Used, ...]
    people: Users
    current: tuple[Revision, ...]
    """More than one on the day on which one took the place of another."""


def used(register_at: Place, given: str, *, on: date) -> UsedOn:
    """Which sheets were used on a day, by whom, with which digest.

    ``given``: a document, a record id or a machine; ``on``: the day. Raises InputError for one that isn't
    known.
    """
    with whole_register(register_at) as whole:
        view = whole.view
        revisions = document_of(view, given)
        document = revisions[0].document
        found = _uses(view, document, on)
        return UsedOn(
            day=on,
            document=document,
            used=tuple(
                Used(revision=one, uses=tuple(sorted(found[one.record_id], key=lambda use: use.event)))
                for one in revisions
                if one.record_id in found
            ),
            people=users(view, document=document, first=on, last=on),
            current=tuple(one for one in revisions if _current_on(revisions, one, on)),
        )


def _uses(view: View, document: str, day: date) -> dict[str, list[Use]]:
    """What was done on a day, by record id."""
    found: dict[str, list[Use]] = {}

    def met(record_id: str, event: int, what: str, people: tuple[str, ...]) -> None:
        found.setdefault(record_id, []).append(Use(event=event, what=what, people=people))

    for job in jobs(view, document=document):
        if job.opened.said.on == day:
            said = job.opened.said
            met(job.opened.record_id, job.number, f"job opened: {said.why}", said.people)
    for one in readings(view, document=document):
        if one.said.on == day:
            struck = "" if one.counts else ", struck through"
            what = f"{one.said.adjuster} {one.said.phase.value} {one.said.value} {one.said.unit}{struck}"
            met(one.told.record_id, one.told.sequence, what, one.said.people)
    for kind in ACTS:
        for act in told(view, kind, document=document):
            if act.said.on == day:
                where = getattr(act.said, "where", "")
                what = f"{kind.KIND.value}{': ' if where else ''}{where}"
                people = (act.said.by,) if isinstance(act.said, PeopleTold) else _people(act.said)
                met(act.record_id, act.sequence, what, people)
    return found


def _people(said: object) -> tuple[str, ...]:
    people: tuple[str, ...] = getattr(said, "people", ())
    by: str = getattr(said, "by", "")
    return people if by in people else (*people, by)


def _current_on(revisions: tuple[Revision, ...], one: Revision, day: date) -> bool:
    """Whether a revision was current at some time of a day in UTC."""
    if one.issue is None or one.issue.at.date() > day:
        return False
    if one.ended_at is not None and one.ended_at.date() < day:
        return False
    later = revisions[one.superseded_by - 1].issue if one.superseded_by else None
    return later is None or later.at.date() >= day


def used_text(found: UsedOn) -> Iterator[str]:
    """What was current, then what was used: each revision with its digests, people, and events."""
    were = ", ".join(f"{one.number} (record {one.record_id})" for one in found.current)
    yield f"{found.day}, {found.document}: current was {'revision ' + were if were else 'none'}"
    if not found.used:
        yield "nothing was told to be used that day"
    for one in found.used:
        issue = one.revision.issue
        yield f"used: revision {one.revision.number}, record {one.revision.record_id}"
        if issue is not None:
            yield f"    content {grouped(issue.content_digest)}, file {issue.file_digest}"
            yield f"    issued by {', '.join(it.name for it in issue.signers)} (event {issue.sequence})"
        rows = [("event", "what", "by")]
        rows += [(str(use.event), use.what, ", ".join(use.people)) for use in one.uses]
        yield from (f"    {line}" for line in columns(rows))
    for name, events in found.people.items():
        yield f"{name}: events {', '.join(map(str, events))}"


# What is open, and how did it end?


@dataclass(frozen=True, kw_only=True)
class DeviationsFound:
    """Deviations, and whether those that have ended are among them."""

    found: tuple[Deviation, ...]
    only_open: bool

    @property
    def status(self) -> ExitStatus:
        """One that is open is 1."""
        open_ones = any(one.standing is Ending.OPEN for one in self.found)
        return ExitStatus.REFUSED if open_ones else ExitStatus.GOOD


def deviations(
    register_at: Place, *, given: str | None = None, number: int | None = None, only_open: bool = False
) -> DeviationsFound:
    """Deviations with what ended each: of all documents, or of one.

    ``given``: a document, a record id or a machine; ``number``: of one deviation; ``only_open``: leave out
    what has ended. Raises InputError for a document that isn't known.
    """
    with whole_register(register_at) as whole:
        document = None if given is None else document_of(whole.view, given)[0].document
        found = noted_deviations(whole.view, document=document)
    return DeviationsFound(
        found=tuple(
            one
            for one in found
            if number in (None, one.number) and (not only_open or one.standing is Ending.OPEN)
        ),
        only_open=only_open,
    )


_SOURCE: Final = "reading of event"


def deviations_text(shown: DeviationsFound) -> Iterator[str]:
    """Each with where it comes from, and who ended it, when and how."""
    yield counted(len(shown.found), "open deviation" if shown.only_open else "deviation")
    for one in shown.found:
        said = one.noted.said
        place = f"{one.noted.machine}, {one.noted.document}, record {one.noted.record_id}"
        yield f"{one.number}  {one.standing.value.upper()}  {said.what} ({said.kind.value})"
        source = f"{_SOURCE} {said.reading}" if said.reading else "noted"
        source = f"inspection of event {said.inspection}" if said.inspection else source
        yield f"    {place}; {source}, {said.on} by {said.by}"
        yield from (f"    {line}" for line in ending_lines(one))
