"""From a document to the bytes of its PDF."""

from __future__ import annotations

from collections.abc import Sequence

from sheets.pages.attached import Attachment
from sheets.pages.document import Document, IssueContext, Layout
from sheets.pages.draw import raw_pdf
from sheets.pages.finish import finished
from sheets.pages.layout import place
from sheets.pages.metadata import about
from sheets.pages.placed import PlacedPage


def pdf_bytes(
    pages: Sequence[PlacedPage],
    document: Document,
    *,
    issue: IssueContext | None = None,
    attachments: Sequence[Attachment] = (),
    fillable: bool = True,
) -> bytes:
    """Placed pages as a PDF 1.7. Equal pages and attachments give equal bytes.

    `fillable`: whether the cover of an issued pack gets an empty field for each of its signers, to be signed
    by key; where it is signed in ink there is none, as in a draft.
    """
    said = about(document, issue)
    return finished(
        raw_pdf(pages, said),
        pages,
        said,
        attachments=attachments,
        fillable=fillable and issue is not None,
    )


def print_pack(
    document: Document,
    *,
    layout: Layout,
    digest: str,
    issue: IssueContext | None = None,
    attachments: Sequence[Attachment] = (),
    fillable: bool = True,
) -> bytes:
    """Place and draw a pack, or the documents of it that the layout names.

    `digest` is the content digest, 16 characters of Crockford's base32. `fillable` as in `pdf_bytes`.
    Raises InputError as `place` does.
    """
    pages = place(document, layout, issue, digest=digest)
    return pdf_bytes(pages, document, issue=issue, attachments=attachments, fillable=fillable)
