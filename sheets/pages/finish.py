"""The finishing pass over a drawn PDF: version, language, how it opens, an id from its own bytes."""

from __future__ import annotations

import io

import pikepdf

from sheets.pages.document import Document

VERSION = "1.7"


def finished(raw: bytes, document: Document) -> bytes:
    """The PDF with language, title display, no dates, and an id from its own bytes.

    Dates are left out: a draft has none, and that of an issue stands on the paper and in the signature.
    """
    with pikepdf.open(io.BytesIO(raw)) as pdf:
        for key in ("/CreationDate", "/ModDate", "/Trapped", "/Keywords"):
            if key in pdf.docinfo:
                del pdf.docinfo[key]
        pdf.docinfo["/Producer"] = pikepdf.String("Jamnut")
        pdf.Root.Lang = pikepdf.String(document.language)
        pdf.Root.ViewerPreferences = pikepdf.Dictionary(DisplayDocTitle=True)
        if "/Outlines" in pdf.Root:
            pdf.Root.PageMode = pikepdf.Name.UseOutlines
        for page in pdf.pages:
            if "/Trans" in page:
                del page["/Trans"]
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
