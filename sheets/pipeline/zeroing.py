"""Where each zero is shown: what the current sheets say of every line, and the zeros that were read."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Final

from sheets.errors import InputError, Problem
from sheets.pages.document import SheetKind
from sheets.pipeline.whole import whole_register
from sheets.register.acts import ZeroRead
from sheets.register.finding import document_of
from sheets.register.opening import Place
from sheets.register.revisions import Revision
from sheets.register.revisions import current as current_of
from sheets.register.saying import Told, told
from sheets.wording.plain import columns, counted
from sheets.wording.sentences import Sentences

_TEXTS: Final = "texts.j2"


@dataclass(frozen=True, kw_only=True)
class ZerosShown:
    """What the sheets of one document ask for, and what was read."""

    revision: Revision
    lines: tuple[tuple[str, ...], ...]
    """Rows of the sheet's table: each line, up to what pressure, what relieves it, where it is verified."""
    verified: tuple[tuple[str, str], ...]
    """Sheet and order of each act of verifying."""
    read: tuple[Told[ZeroRead], ...]
    """All that was ever told, by day."""


def zeros(register_at: Place, given: str) -> ZerosShown:
    """Where each zero of a machine is shown, by its current sheets, and each that was read.

    ``given``: a document, a record id or a machine. Raises InputError for one that isn't known or has no
    current revision, or of which the register kept nothing.
    """
    with whole_register(register_at) as whole:
        revisions = document_of(whole.view, given)
        read = sorted(
            told(whole.view, ZeroRead, document=revisions[0].document),
            key=lambda one: (one.said.on, one.sequence),
        )
    revision = current_of(revisions)
    if revision is None or revision.issue is None or revision.issue.kept is None:
        raise InputError(
            Problem(
                where=f"document {revisions[0].document}",
                what="No revision of it is current with what its sheets say.",
                fix="Ask for one that is: jamnut audit lists them.",
            )
        )
    content = json.loads(revision.issue.kept.content)
    return ZerosShown(
        revision=revision, lines=tuple(_lines(content)), verified=tuple(_verified(content)), read=tuple(read)
    )


def _lockouts(content: Mapping[str, Any]) -> Iterator[Mapping[str, Any]]:
    return (one for one in content["sections"] if one["kind"] == SheetKind.LOCKOUT.value)


def _lines(content: Mapping[str, Any]) -> Iterator[tuple[str, ...]]:
    title = Sentences(content["language"], _TEXTS).say("trapped_title")
    for section in _lockouts(content):
        for block in section["blocks"]:
            if block["is"] == "Table" and block["title"] == title:
                yield tuple(block["head"])
                yield from (tuple(row) for row in block["rows"])


def _verified(content: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    verify = Sentences(content["language"], _TEXTS).say("act_verify")
    for section in _lockouts(content):
        sheet = f"{section['title']} {section['subject']}".strip()
        for block in section["blocks"]:
            if block["is"] == "Act" and block["name"] == verify:
                yield from ((f"{sheet}, act {block['number']}", row["order"]) for row in block["rows"])


def zeros_text(found: ZerosShown) -> Iterator[str]:
    """The sheet's lines, then where it has them verified, then what was read, each with its event."""
    one = found.revision
    yield f"{one.document} revision {one.number}, machine {one.machine}, record {one.record_id}"
    yield "by the sheets:"
    if found.lines:
        yield from (f"    {line}" for line in columns(found.lines))
    else:
        yield "    no list of lines in a form that this version knows: look at the sheets"
    for sheet, order in found.verified:
        yield f"    {sheet}: {order}"
    yield f"read: {counted(len(found.read), 'zero')}"
    if found.read:
        rows = [("event", "day", "record", "where", "value", "gauge", "seen to move", "by")]
        rows += [
            (
                str(it.sequence),
                it.said.on.isoformat(),
                it.record_id,
                it.said.where,
                f"{it.said.value} {it.said.unit}",
                it.said.instrument,
                "yes" if it.said.moved else "NO",
                it.said.by,
            )
            for it in found.read
        ]
        yield from (f"    {line}" for line in columns(rows))
