"""The audit: what the register says on one day, as one PDF and as files for a spreadsheet."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path
from typing import Final, Literal

from sheets import ENGINE
from sheets.machine.files import check_pdf_target, move_into_place, write_pdf
from sheets.pages.attached import Attachment
from sheets.pages.compose.audit import AuditList, audit_document
from sheets.pages.document import Layout
from sheets.pages.press import print_pack
from sheets.pipeline.listing import lists_of
from sheets.pipeline.replacing import keep_all_but_audits
from sheets.pipeline.whole import whole_register
from sheets.register.chain import Anchor, ChainVerdict
from sheets.register.opening import Place
from sheets.register.store import View
from sheets.seal.canonical import canonical_bytes, digest
from sheets.wording.plain import counted

CSV_TYPE: Final = "text/csv"
"""RFC 4180."""
_FORMULA: Final = ("=", "+", "-", "@", "\t")
"""What a spreadsheet would compute instead of showing."""
_FIX: Final = "Name a file in a folder that exists and that you may write to."
_NO_ANCHOR: Final = (
    "No anchor from outside was given: an end that was cut off, or a register written anew from some event "
    "on, wouldn't be seen."
)


@dataclass(frozen=True, kw_only=True)
class Audited:
    """What was written."""

    files: tuple[Path, ...]
    lists: tuple[AuditList, ...]
    anchor: Anchor
    """The last event: kept outside, it holds all that the bundle says."""
    digest: str


def audit(
    register_at: Place,
    target: Path,
    *,
    anchors: Sequence[str] = (),
    day: date,
    paper: Literal["A4", "Letter"] = "A4",
) -> Audited:
    """Writes the bundle: a PDF with every list, and each list as CSV, beside it and in it.

    ``day``: today at the works; due dates and people are as of it. ``anchors``: kept outside. Raises
    NotEstablishedError, and writes nothing, where the chain of the register doesn't hold; InputError where
    anything but an audit stands there.
    """
    check_pdf_target(target)
    known = [Anchor.read(text) for text in anchors]
    with whole_register(register_at, known) as whole:
        chain, last = whole.chain, whole.last
        lists = lists_of(whole.view, day)
        opened = _opened(whole.view)
    document = audit_document(
        register=opened,
        day=day,
        engine=str(ENGINE),
        facts=tuple(_facts(chain, last, known, lists)),
        notes=() if chain.anchored else (_NO_ANCHOR,),
        lists=lists,
    )
    said = digest(canonical_bytes(document))
    texts = {one.name: _csv(one) for one in lists}
    beside = {one.name: target.with_name(f"{target.stem}-{one.name}.csv") for one in lists}
    keep_all_but_audits(target, [(beside[one.name], _head(one)) for one in lists])
    data = print_pack(
        document,
        layout=Layout(paper=paper),
        digest=said,
        attachments=[
            Attachment(
                name=f"{name}.csv",
                media_type=CSV_TYPE,
                data=text,
                relationship="Data",
                description=f"the list of {name}",
            )
            for name, text in texts.items()
        ],
    )
    files = [target]
    for name, text in texts.items():
        move_into_place(beside[name], text, fix=_FIX)
        files.append(beside[name])
    write_pdf(target, data)
    return Audited(files=tuple(files), lists=lists, anchor=last, digest=said)


def audit_text(made: Audited) -> Iterator[str]:
    """What was written, how long each list is, and what to keep."""
    yield f"{made.files[0]}: written, content {made.digest}"
    for file, one in zip(made.files[1:], made.lists, strict=True):
        yield f"{file}: {counted(len(one.rows), 'line')}"
    yield f"anchor to keep outside: {made.anchor}"


def _opened(view: View) -> str:
    first = next(view.events())
    return f"The register that {first.who} opened on {first.time[:10]}"


def _facts(
    chain: ChainVerdict, last: Anchor, known: Sequence[Anchor], lists: Sequence[AuditList]
) -> Iterator[tuple[str, str]]:
    yield "Chain", f"whole: {counted(last.sequence, 'event')}, each as it was written"
    agreed = ", ".join(f"event {one.sequence}" for one in known)
    yield "Anchor given", f"{agreed}: agrees" if chain.anchored else "none"
    # in groups, so that it can be compared by eye; an anchor is read with blanks, too
    groups = " ".join(last.hash[place : place + 8] for place in range(0, len(last.hash), 8))
    yield "Anchor now", f"{last.sequence}:{groups}"
    yield "Lists", "; ".join(f"{one.title.lower()} {len(one.rows)}" for one in lists)


def _csv(one: AuditList) -> bytes:
    """A list as CSV (RFC 4180). What a spreadsheet would take for a formula gets an apostrophe before it."""
    rows = ([f"'{cell}" if cell.startswith(_FORMULA) else cell for cell in row] for row in one.rows)
    return _lines([one.head, *rows]).encode()


def _head(one: AuditList) -> str:
    """The first line of a list as CSV."""
    return _lines([one.head])


def _lines(rows: Sequence[Sequence[str]]) -> str:
    text = io.StringIO(newline="")
    csv.writer(text, lineterminator="\r\n").writerows(rows)
    return text.getvalue()
