"""Drawing placed pages as PDF. The only module that calls the drawing library's canvas."""

from __future__ import annotations

import io
from collections.abc import Sequence
from typing import Literal

from reportlab.pdfgen.canvas import Canvas
from reportlab.pdfgen.pathobject import PDFPathObject

from sheets.pages.fonts import WIDE_FONT, WIDE_SCALE, WIDE_STROKE, Weight, condensed, font_name, spans, wide
from sheets.pages.metadata import PROGRAM, About
from sheets.pages.placed import MM, Circle, Code, Item, Line, PlacedPage, Polygon, Rect, TextRun
from sheets.pages.structure import runs

SIGN_STROKE = {Weight.REGULAR: 0.075, Weight.SEMIBOLD: 0.105, Weight.BOLD: 0.12}
"""Thickness of a sign drawn as a path, as a share of the size."""

FILL_ONLY: Literal[0] = 0
FILL_AND_STROKE: Literal[2] = 2
DASH = (1.1 * MM, 0.9 * MM)


def ink_colour(canvas: Canvas, *, white: bool) -> None:
    """Black or white: there is nothing between."""
    shade = 1.0 if white else 0.0
    canvas.setFillGray(shade)
    canvas.setStrokeGray(shade)


def sign(canvas: Canvas, character: str, x: float, y: float, size: float, weight: Weight) -> None:
    """A sign that no font has, as a path; y is its baseline, upwards."""
    canvas.setLineWidth(SIGN_STROKE[weight] * size)
    path = canvas.beginPath()
    if character == "△":
        path.moveTo(x + 0.06 * size, y + 0.03 * size)
        path.lineTo(x + 0.72 * size, y + 0.03 * size)
        path.lineTo(x + 0.39 * size, y + 0.64 * size)
        path.close()
    elif character == "☐":
        path.rect(x + 0.08 * size, y, 0.62 * size, 0.62 * size)
    else:
        path.circle(x + 0.35 * size, y + 0.34 * size, 0.25 * size)
        path.moveTo(x + 0.1 * size, y + 0.02 * size)
        path.lineTo(x + 0.6 * size, y + 0.66 * size)
    canvas.drawPath(path, stroke=1, fill=0)


def text_string(text: str) -> str:
    """A text as digits of a PDF string, UTF-16 with its mark (ISO 32000-1, 7.9.2.2)."""
    return ("\ufeff" + text).encode("utf-16-be").hex().upper()


def text_run(canvas: Canvas, item: TextRun, x: float, y: float) -> None:
    """The spans of a run from (x, y), each by its source.

    A blank ends it: who hears the page, or searches it, must not find two lines run together.
    """
    ink_colour(canvas, white=item.white)
    found = spans(item.text, item.weight)
    for span in found:
        ending = " " if span is found[-1] else ""
        if span.source == "path":
            canvas.addLiteral(f"/Span <</ActualText <{text_string(span.text + ending)}>>> BDC")
            sign(canvas, span.text, x, y, item.size, item.weight)
            canvas.addLiteral("EMC")
        else:
            text = canvas.beginText(x, y)
            if span.source == "wide":
                stroke = WIDE_STROKE[item.weight] * item.size
                text.setFont(WIDE_FONT, item.size)
                text.setHorizScale(WIDE_SCALE * 100)
                if stroke:
                    canvas.setLineWidth(stroke)
                    text.setTextRenderMode(FILL_AND_STROKE)
            else:
                text.setFont(font_name(item.weight), item.size)
            text.textOut(span.text)
            if ending:
                text.textOut(ending)
            if span.source == "wide":
                text.setHorizScale(100)
                text.setTextRenderMode(FILL_ONLY)
            canvas.drawText(text)
        x += span.width * item.size


def text_item(canvas: Canvas, item: TextRun, page_height: float) -> None:
    """A run, upright or turned."""
    if not item.upward:
        text_run(canvas, item, item.x, page_height - item.y)
        return
    canvas.saveState()
    canvas.translate(item.x, page_height - item.y)
    canvas.rotate(90)
    text_run(canvas, item, 0, 0)
    canvas.restoreState()


def code_path(item: Code, page_height: float, path: PDFPathObject) -> PDFPathObject:
    """All dark modules in one path: runs of a row joined."""
    for index, row in enumerate(item.rows):
        y = page_height - item.y - (index + 1) * item.module
        column = 0
        while column < len(row):
            if not row[column]:
                column += 1
                continue
            start = column
            while column < len(row) and row[column]:
                column += 1
            path.rect(item.x + start * item.module, y, (column - start) * item.module, item.module)
    return path


def shape(canvas: Canvas, *, thickness: float, fill: str, path: PDFPathObject, white: bool = False) -> None:
    """Fill and outline of a path."""
    if fill != "none":
        canvas.setFillGray(1.0 if fill == "white" else 0.0)
    if thickness:
        canvas.setLineWidth(thickness)
        canvas.setStrokeGray(1.0 if white else 0.0)
    canvas.drawPath(path, stroke=1 if thickness else 0, fill=0 if fill == "none" else 1)


def draw_item(canvas: Canvas, item: Item, page_height: float) -> None:
    """One item; y is turned over here and nowhere else."""
    if isinstance(item, TextRun):
        text_item(canvas, item, page_height)
        return
    path = canvas.beginPath()
    match item:
        case Line():
            path.moveTo(item.x1, page_height - item.y1)
            path.lineTo(item.x2, page_height - item.y2)
            canvas.setDash(list(DASH) if item.dashed else [])
            shape(canvas, thickness=item.thickness, fill="none", path=path, white=item.white)
            canvas.setDash([])
        case Rect():
            path.rect(item.x, page_height - item.y - item.height, item.width, item.height)
            shape(canvas, thickness=item.thickness, fill=item.fill, path=path)
        case Polygon():
            (x, y), *rest = item.points
            path.moveTo(x, page_height - y)
            for x, y in rest:
                path.lineTo(x, page_height - y)
            if item.closed:
                path.close()
            shape(canvas, thickness=item.thickness, fill=item.fill, path=path, white=item.white)
        case Circle():
            path.circle(item.x, page_height - item.y, item.radius)
            shape(canvas, thickness=item.thickness, fill=item.fill, path=path)
        case Code():
            shape(canvas, thickness=0, fill="black", path=code_path(item, page_height, path))


ARTIFACTS = {
    "Header": "<</Type /Pagination /Subtype /Header>>",
    "Footer": "<</Type /Pagination /Subtype /Footer>>",
    "Layout": "<</Type /Layout>>",
    "Page": "<</Type /Page>>",
}
"""Property lists of what is no part of the content (ISO 32000-1, 14.8.2.2)."""


def draw_page(canvas: Canvas, page: PlacedPage) -> None:
    """All items of a page, each run marked as what it is."""
    for run in runs(page.items):
        last = run.path[-1]
        if run.number is None:
            canvas.addLiteral(f"/Artifact {ARTIFACTS[str(last.key)]} BDC")
        else:
            canvas.addLiteral(f"/{last.type} <</MCID {run.number}>> BDC")
        for item in run.items:
            draw_item(canvas, item, page.height)
        canvas.addLiteral("EMC")


def raw_pdf(pages: Sequence[PlacedPage], said: About) -> bytes:
    """Pages as the drawing library writes them, before the finishing pass."""
    for weight in Weight:
        condensed(weight)
    wide()
    buffer = io.BytesIO()
    canvas = Canvas(
        buffer,
        invariant=1,
        pageCompression=0,
        initialFontName=font_name(Weight.REGULAR),  # type: ignore[arg-type]  # the stub asks a float for a name
        initialFontSize=10,
    )
    canvas.setTitle(said.title)
    canvas.setAuthor(PROGRAM)
    canvas.setCreator(PROGRAM)
    canvas.setSubject(said.subject)
    for page in pages:
        canvas.setPageSize((page.width, page.height))
        canvas.setLineJoin(1)
        if page.bookmark is not None:
            key = f"page-{page.number}"
            canvas.bookmarkPage(key)
            canvas.addOutlineEntry(page.bookmark, key, level=0)
        draw_page(canvas, page)
        canvas.showPage()
    canvas.save()
    return buffer.getvalue()
