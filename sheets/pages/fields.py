"""Empty fields to sign an issued pack in, made before the first signature.

They stand over the room of the signers in the title block, so that a signature only fills a form and adds
nothing to the pages (ISO 32000-1, 12.7.4.5 and 12.8).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import pikepdf
from pikepdf import Array, Dictionary, Name, String

from sheets.pages.document import SheetKind
from sheets.pages.placed import PlacedPage
from sheets.pages.roles import Path

FIELDS: Final = ("prepared", "checked", "approved")
"""Names of the fields, each the meaning of its signature, in the order of signing."""
PRINTED: Final = 4
"""Annotation flag: shown on paper too (ISO 32000-1, table 165)."""
INSET: Final = 1.0
"""Kept clear of the lines around the room of a signer."""


@dataclass(frozen=True, kw_only=True)
class Field:
    """A field to sign in: its page among those printed, and its rectangle with y upwards."""

    name: str
    page: int
    rectangle: tuple[float, float, float, float]
    """Left, bottom, right, top."""
    path: Path
    """What it is part of."""


def fields_of(pages: Sequence[PlacedPage]) -> tuple[Field, ...]:
    """Fields over the rooms to sign of the title block. None where no cover is printed, and in a draft."""
    return tuple(
        Field(
            name=mark.key,
            page=index,
            rectangle=(
                mark.x + INSET,
                page.height - mark.y - mark.height + INSET,
                mark.x + mark.width - INSET,
                page.height - mark.y - INSET,
            ),
            path=mark.path,
        )
        for name in FIELDS
        for index, page in enumerate(pages)
        if page.kind is SheetKind.COVER
        for mark in page.marked("sign")
        if mark.key == name
    )


def write_fields(pdf: pikepdf.Pdf, fields: Sequence[Field]) -> list[pikepdf.Object]:
    """Adds the form with its empty fields; returns them."""
    if not fields:
        return []
    widgets: list[pikepdf.Object] = []
    for one in fields:
        left, bottom, right, top = (round(edge, 3) for edge in one.rectangle)
        page = pdf.pages[one.page]
        empty = pdf.make_stream(
            b"",
            Type=Name.XObject,
            Subtype=Name.Form,
            BBox=Array([0, 0, round(right - left, 3), round(top - bottom, 3)]),
            Resources=Dictionary(),
        )
        widget = pdf.make_indirect(
            Dictionary(
                Type=Name.Annot,
                Subtype=Name.Widget,
                FT=Name.Sig,
                T=String(one.name),
                TU=String(one.name),
                Rect=Array([left, bottom, right, top]),
                P=page.obj,
                F=PRINTED,
                AP=Dictionary(N=empty),
            )
        )
        page.obj.Annots = Array([*page.obj.get("/Annots", Array()), widget])
        widgets.append(widget)
    pdf.Root.AcroForm = Dictionary(Fields=Array(widgets))
    return widgets
