"""From a document to the bytes of its PDF."""

from __future__ import annotations

from collections.abc import Sequence

from sheets.pages.document import Document, IssueContext, Layout
from sheets.pages.draw import raw_pdf
from sheets.pages.finish import finished
from sheets.pages.layout import place
from sheets.pages.placed import PlacedPage


def pdf_bytes(pages: Sequence[PlacedPage], document: Document) -> bytes:
    """Placed pages as a PDF 1.7. Equal pages give equal bytes."""
    return finished(raw_pdf(pages, document), document)


def print_pack(
    document: Document, *, layout: Layout, digest: str, issue: IssueContext | None = None
) -> bytes:
    """Place and draw a pack, or the documents of it that the layout names.

    `digest` is the content digest, 16 characters of Crockford's base32. Raises InputError as `place` does.
    """
    return pdf_bytes(place(document, layout, issue, digest=digest), document)
