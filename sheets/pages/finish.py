"""The finishing pass over a drawn PDF: what a reader hears, what an archive needs, an id from its bytes."""

from __future__ import annotations

import io
from collections.abc import Sequence

import pikepdf

from sheets.pages.attached import Attachment, write_attachments
from sheets.pages.fields import fields_of, write_fields
from sheets.pages.metadata import PROGRAM, About, write_metadata
from sheets.pages.placed import PlacedPage
from sheets.pages.structure import structure
from sheets.pages.tagging import write_structure

VERSION = "1.7"


def finished(
    raw: bytes,
    pages: Sequence[PlacedPage],
    said: About,
    *,
    attachments: Sequence[Attachment] = (),
    fillable: bool = False,
) -> bytes:
    """The PDF with structure, metadata, attachments, and an id from its own bytes; PDF/A-3b in form.

    `pages` are those that `raw` was drawn from. `fillable` adds the fields to sign. The document information
    holds no dates: a draft has none, and that of an issue stands on the paper and in the signature.
    """
    with pikepdf.open(io.BytesIO(raw)) as pdf:
        for key in ("/CreationDate", "/ModDate", "/Trapped", "/Keywords"):
            if key in pdf.docinfo:
                del pdf.docinfo[key]
        pdf.docinfo["/Producer"] = pikepdf.String(PROGRAM)
        pdf.Root.Lang = pikepdf.String(said.language)
        pdf.Root.ViewerPreferences = pikepdf.Dictionary(DisplayDocTitle=True)
        if "/Outlines" in pdf.Root:
            pdf.Root.PageMode = pikepdf.Name.UseOutlines
        for page in pdf.pages:
            if "/Trans" in page:
                del page["/Trans"]
        fields = fields_of(pages) if fillable else ()
        tree = structure(pages, [field.path for field in fields])
        write_structure(pdf, tree, write_fields(pdf, fields))
        write_metadata(pdf, said)
        write_attachments(pdf, attachments)
        if "/ID" in pdf.trailer:
            del pdf.trailer["/ID"]  # its first half would be kept, and that knows the date of drawing
        buffer = io.BytesIO()
        pdf.save(
            buffer,
            force_version=VERSION,
            deterministic_id=True,
            compress_streams=True,
            recompress_flate=True,
            object_stream_mode=pikepdf.ObjectStreamMode.generate,
        )
    return buffer.getvalue()
