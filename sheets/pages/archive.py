"""Whether a pack is in the form that archives take, PDF/A-3b (ISO 19005-3), judged before it is signed.

The judging library refuses whatever it doesn't know, and it doesn't know forms. So a file with fields to sign
is judged without them, and the fields by the few rules that the standard has for them.
"""

from __future__ import annotations

import io
from collections.abc import Iterator
from typing import Final

import pikepdf
from pikepdf import Array, Dictionary, Name
from pikepdf.pdfa import validate_written

from sheets.pages.fields import PRINTED

PART: Final = "3b"
MOST: Final = 10
"""So many flaws are told."""


def archive_flaws(data: bytes) -> tuple[str, ...]:
    """What stands against the archive form of an unsigned PDF, in words; empty where nothing does.

    Also what can't be judged is told: unknown is not good. A signed file can't be judged here.
    """
    with pikepdf.open(io.BytesIO(data)) as pdf:
        form = pdf.Root.get("/AcroForm")
        flaws = [] if form is None else [*form_flaws(form), *field_flaws(form)]
        judged = data if form is None else without_form(pdf)
    report = validate_written(io.BytesIO(judged), PART)
    flaws += [str(finding) for finding in report.findings[:MOST]]
    if not flaws and report.verdict != "pass":
        flaws.append(f"the verdict is {report.verdict}")
    return tuple(flaws)


def without_form(pdf: pikepdf.Pdf) -> bytes:
    """The same file with its form taken away; everything else as it is."""
    fields = {field.objgen for field in pdf.Root.AcroForm.Fields}
    del pdf.Root["/AcroForm"]
    for page in pdf.pages:
        kept = [one for one in page.obj.get("/Annots", Array()) if one.objgen not in fields]
        if kept:
            page.obj.Annots = Array(kept)
        elif "/Annots" in page.obj:
            del page.obj["/Annots"]
    for held in list(pdf.objects):
        if isinstance(held, Dictionary) and held.get("/S") == Name.Form and "/K" in held:
            del held["/K"]
    buffer = io.BytesIO()
    pdf.save(buffer, deterministic_id=True, force_version=pdf.pdf_version)
    return buffer.getvalue()


def form_flaws(form: pikepdf.Object) -> Iterator[str]:
    """ISO 19005-3, 6.4.1 and 6.4.2: no form of another kind, no appearance left to the reader."""
    if "/XFA" in form:
        yield "the form is an XML form"
    if form.get("/NeedAppearances", False):
        yield "the form leaves its appearance to the reader"


def field_flaws(form: pikepdf.Object) -> Iterator[str]:
    """ISO 19005-3, 6.3.2, 6.3.3 and 6.4.1, for fields to sign that are still empty."""
    for field in form.Fields:
        name = str(field.get("/T", "without a name"))
        if field.get("/FT") != Name.Sig or "/V" in field:
            yield f"field {name} isn't an empty field to sign"
        if "/A" in field or "/AA" in field:
            yield f"field {name} carries an action"
        if field.get("/F") != PRINTED:
            yield f"field {name} isn't printed as it is shown"
        appearance = field.get("/AP")
        if appearance is None or set(appearance.keys()) != {"/N"} or not is_stream(appearance["/N"]):
            yield f"field {name} has no appearance, or more than one"


def is_stream(held: pikepdf.Object) -> bool:
    """Whether an object is a stream."""
    return isinstance(held, pikepdf.Stream)
