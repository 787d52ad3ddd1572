"""The stamp that shows in a signature's field: name, meaning, date and time with the zone.

A page of its own, which whoever signs lays into the field. It says who signed as what and when by their own
clock, and nothing about whether the signature holds: that is asked of the file, not of its picture.
"""

from __future__ import annotations

import hashlib
import io
from datetime import datetime
from itertools import product

import pikepdf
from reportlab.pdfgen.canvas import Canvas

from sheets.errors import InputError, Problem, quoted
from sheets.pages.draw import draw_item
from sheets.pages.fonts import Weight, condensed, font_name, wide
from sheets.pages.ink import Ink
from sheets.pages.text import style, wrap

SIZES = (11.0, 10.0, 9.0, 8.5, 8.0, 7.5, 7.0, 6.5)
"""Sizes of the name, the largest that fits is taken; the other lines are a tenth smaller."""
PADDING = 2.0
"""Left and right; above and below the lines bring their own."""


def stamp_pdf(*, meaning: str, name: str, when: datetime, zone: str, width: float, height: float) -> bytes:
    """One page of `width` by `height` points with the stamp, its fonts embedded. Same input, same bytes.

    `when` carries its offset, `zone` is the zone's name as printed. Raises InputError if a name doesn't fit.
    """
    ink = _placed(meaning, name, when_line(when, zone), width, height)
    for weight in (Weight.REGULAR, Weight.SEMIBOLD):
        condensed(weight)
    wide()
    buffer = io.BytesIO()
    canvas = Canvas(
        buffer,
        pagesize=(width, height),
        invariant=1,
        pageCompression=1,
        initialFontName=font_name(Weight.REGULAR),  # type: ignore[arg-type]  # the stub asks a float for a name
    )
    for item in ink.items:
        draw_item(canvas, item, height)
    canvas.showPage()
    canvas.save()
    return _own_font_tags(buffer.getvalue())


def when_line(when: datetime, zone: str) -> str:
    """Date and time to the second with zone and offset: 2026-03-05 14:07:00 Europe/Lisbon (UTC+00:00)."""
    if when.tzinfo is None:
        raise ValueError("the time of a signature needs its zone")
    moment = f"{when:%Y-%m-%d %H:%M:%S} {zone}"
    offset = f"{when:%z}"
    return moment if zone == "UTC" else f"{moment} (UTC{offset[:3]}:{offset[3:5]})"


def _placed(meaning: str, name: str, when: str, width: float, height: float) -> Ink:
    """Lines at the largest size at which all of them fit; in a low field the meaning stands by the name."""
    room = width - 2 * PADDING
    for heads, size in product(((name, meaning), (f"{name} · {meaning}",)), SIZES):
        strong, light = style(size, Weight.SEMIBOLD), style(0.9 * size)
        names = wrap(heads[0], strong, room)
        rest = [line for text in (*heads[1:], when) for line in wrap(text, light, room)]
        spare = height - len(names) * strong.leading - len(rest) * light.leading
        if spare >= 0:
            ink = Ink()
            bottom = ink.lines(PADDING, spare / 2, names, strong)
            ink.lines(PADDING, bottom, rest, light)
            return ink
    raise InputError(
        Problem(
            where="stamp of a signature",
            what=f"the name {quoted(name)} doesn't fit into {width:.0f} by {height:.0f} points",
            fix="Give the name in the form in which it is signed on paper.",
        )
    )


def _own_font_tags(raw: bytes) -> bytes:
    """Names the subsets of the fonts by what they hold.

    Several stamps and the pages stand in one file, and different subsets need different names there.
    Source: ISO 32000-1, 9.6.4.
    """
    with pikepdf.open(io.BytesIO(raw)) as pdf:
        for font in pdf.pages[0].resources.get("/Font", {}).values():
            descriptor = font.get("/FontDescriptor")
            if descriptor is None:
                continue
            held = hashlib.sha256(bytes(descriptor["/FontFile2"].read_bytes())).digest()
            tag = "".join(chr(ord("A") + byte % 26) for byte in held[:6])
            name = pikepdf.Name("/" + tag + str(font["/BaseFont"])[7:])
            font["/BaseFont"] = name
            descriptor["/FontName"] = name
        if "/ID" in pdf.trailer:
            del pdf.trailer["/ID"]
        buffer = io.BytesIO()
        pdf.save(buffer, deterministic_id=True, compress_streams=True)
    return buffer.getvalue()
