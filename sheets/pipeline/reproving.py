"""Which issued packs would come out otherwise today: each current one made again from what the register kept.

Nothing is written and nothing replaced: what differs is for somebody to judge, and to issue anew or leave.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from difflib import SequenceMatcher
from enum import Enum
from typing import Any, Final

from sheets import ENGINE
from sheets.errors import ExitStatus, InputError, JamnutError, NotEstablishedError, Problem, gravest
from sheets.pages.document import SheetKind
from sheets.pages.layout import grouped
from sheets.pipeline.changing import computed_changes
from sheets.pipeline.computing import steps, task_of
from sheets.pipeline.describing import check_sources
from sheets.pipeline.keeping import sources_of
from sheets.pipeline.printing import whole_content
from sheets.pipeline.whole import whole_register
from sheets.register.finding import document_of, documents_in
from sheets.register.opening import Place
from sheets.register.revisions import Issue, Revision
from sheets.register.revisions import current as current_of
from sheets.wording.plain import FORMAT, Json, counted


class Reproof(Enum):
    """What came of making a pack again."""

    SAME = "same"
    """Its content, but for the number of the engine."""
    DIFFERS = "differs"
    REFUSED = "would be refused"
    NOT_ESTABLISHED = "not established"
    UNREADABLE = "can't be read by this version"
    NOT_KEPT = "nothing was kept of it"


_STATUS: Final = {
    Reproof.SAME: ExitStatus.GOOD,
    Reproof.DIFFERS: ExitStatus.REFUSED,
    Reproof.REFUSED: ExitStatus.REFUSED,
    Reproof.NOT_ESTABLISHED: ExitStatus.NOT_ESTABLISHED,
    Reproof.UNREADABLE: ExitStatus.NOT_ESTABLISHED,
    Reproof.NOT_KEPT: ExitStatus.NOT_ESTABLISHED,
}
_FIGURES: Final = (SheetKind.ENGINEER.value, SheetKind.COVER.value)
"""Documents whose tables say in what state each setting is made, and how its figures came about."""


@dataclass(frozen=True, kw_only=True)
class Reproved:
    """One pack."""

    revision: Revision
    reproof: Reproof
    engine: int
    """That made it."""
    digest: str = ""
    """Of the content as it would be today; empty where there would be none."""
    sheets: tuple[str, ...] = ()
    """Titles of the sheets that differ."""
    lines: tuple[str, ...] = ()
    """Targets, windows, steps, states and derivations that differ, one line each."""
    problems: tuple[Problem, ...] = ()
    """What stands against it today."""


@dataclass(frozen=True, kw_only=True)
class Reproofs:
    """All that were made again."""

    packs: tuple[Reproved, ...]

    @property
    def status(self) -> ExitStatus:
        """The gravest: one that differs or would be refused is 1, one that can't be told is 3."""
        return gravest(_STATUS[one.reproof] for one in self.packs)


def reprove(register_at: Place, *, given: str | None = None, telling: Callable[[str], None]) -> Reproofs:
    """Makes every current pack again, or that of one document, by the present engine, and compares.

    ``given``: a document, a record id or a machine; ``telling`` hears the document at hand. Raises InputError
    for one that isn't known or of which no revision is current.
    """
    with whole_register(register_at) as whole:
        documents = (
            documents_in(whole.view) if given is None else {given: document_of(whole.view, given)}
        ).values()
    found = [one for revisions in documents if (one := current_of(revisions)) is not None]
    if given is not None and not found:
        raise InputError(
            Problem(
                where=f"document {given}",
                what="No revision of it is current.",
                fix="Nothing is worked from it, so there is nothing to make again.",
            )
        )
    packs = []
    for one in found:
        telling(one.document)
        packs.append(_reproved(one))
    return Reproofs(packs=tuple(packs))


def _reproved(revision: Revision) -> Reproved:
    issue = revision.issue
    if issue is None or issue.kept is None:
        return Reproved(revision=revision, reproof=Reproof.NOT_KEPT, engine=issue.engine if issue else 0)
    kept = issue.kept
    try:
        described = check_sources(sources_of(kept))
        task = task_of(described, kept.task, kept.part or None)
    except JamnutError as error:
        return _against(revision, issue, Reproof.UNREADABLE, error)
    matter = steps(described, task)
    try:
        said = whole_content(matter)
    except NotEstablishedError as error:
        return _against(revision, issue, Reproof.NOT_ESTABLISHED, error)
    except JamnutError as error:
        return _against(revision, issue, Reproof.REFUSED, error)
    old, new = json.loads(kept.content), json.loads(said.data)
    if {**old, "engine": ""} == {**new, "engine": ""}:
        return Reproved(revision=revision, reproof=Reproof.SAME, engine=issue.engine, digest=said.digest)
    return Reproved(
        revision=revision,
        reproof=Reproof.DIFFERS,
        engine=issue.engine,
        digest=said.digest,
        sheets=tuple(_sheets(old, new)),
        lines=(*computed_changes(kept, matter, said.data), *_tables(old, new)),
    )


def _against(revision: Revision, issue: Issue, reproof: Reproof, error: JamnutError) -> Reproved:
    return Reproved(revision=revision, reproof=reproof, engine=issue.engine, problems=error.problems)


def _title(section: Mapping[str, Any]) -> str:
    return f"{section['title']} {section['subject']}".strip()


def _sheets(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[str]:
    before, after = ([(_title(one), one) for one in side["sections"]] for side in (old, new))
    for title in dict.fromkeys(name for name, _ in (*before, *after)):
        sides = [[one for name, one in side if name == title] for side in (before, after)]
        if sides[0] != sides[1]:
            yield title


def _tables(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[str]:
    """Rows of the tables that say states, reasons and derivations."""
    before, after = (_rows(side) for side in (old, new))
    for title in dict.fromkeys((*before, *after)):
        was, now = before.get(title, []), after.get(title, [])
        for tag, a, b, c, d in SequenceMatcher(None, was, now, autojunk=False).get_opcodes():
            if tag != "equal":
                yield from (f"{title}, before: {row}" for row in was[a:b])
                yield from (f"{title}, now: {row}" for row in now[c:d])


def _rows(content: Mapping[str, Any]) -> dict[str, list[str]]:
    found: dict[str, list[str]] = {}
    for section in content["sections"]:
        for block in section["blocks"] if section["kind"] in _FIGURES else ():
            if block["is"] == "Table":
                rows = [" | ".join(cell for cell in row if cell) for row in block["rows"]]
                found.setdefault(block["title"], []).extend(rows)
    return found


def reprove_text(made: Reproofs) -> Iterator[str]:
    """Each pack with what came of it and everything that differs."""
    yield f"made again by engine {ENGINE}: {counted(len(made.packs), 'current pack')}"
    for one in made.packs:
        revision = one.revision
        yield ""
        yield (
            f"{revision.document} revision {revision.number}, machine {revision.machine}, "
            f"record {revision.record_id}, engine {one.engine}: {one.reproof.value.upper()}"
        )
        if revision.issue is not None and one.digest and one.reproof is not Reproof.SAME:
            yield f"    content {grouped(revision.issue.content_digest)} → {grouped(one.digest)}"
        if one.sheets:
            yield f"    sheets that differ: {'; '.join(one.sheets)}"
        yield from (f"    {line}" for line in one.lines)
        for problem in one.problems:
            yield from (f"    {line}" for line in str(problem).splitlines())
    if any(one.reproof is not Reproof.SAME for one in made.packs):
        yield ""
        yield "Nothing was replaced: each of them stays current until somebody withdraws it or issues anew."


def reprove_json(made: Reproofs) -> dict[str, Json]:
    """The same as data."""
    packs: list[Json] = []
    for one in made.packs:
        problems: list[Json] = [{"where": it.where, "what": it.what, "fix": it.fix} for it in one.problems]
        packs.append(
            {
                "document": one.revision.document,
                "machine": one.revision.machine,
                "revision": one.revision.number,
                "record_id": one.revision.record_id,
                "engine": one.engine,
                "reproof": one.reproof.value,
                "content": one.revision.issue.content_digest if one.revision.issue else None,
                "content_now": one.digest or None,
                "sheets": list[Json](one.sheets),
                "differs": list[Json](one.lines),
                "problems": problems,
            }
        )
    return {"format": FORMAT, "engine": ENGINE, "packs": packs}
