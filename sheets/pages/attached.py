"""Files that travel in a pack: what it was made from, and what it says as data (ISO 32000-1, 7.11.4)."""

from __future__ import annotations

import hashlib
import io
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import pikepdf
from pikepdf import Array, Dictionary, Name, String

from sheets.errors import InputError, Problem


@dataclass(frozen=True, kw_only=True)
class Attachment:
    """A file in a pack. Its relationship to the pack is a term of ISO 19005-3."""

    name: str
    media_type: str
    data: bytes
    relationship: Literal["Source", "Data"]
    description: str


def write_attachments(pdf: pikepdf.Pdf, attachments: Sequence[Attachment]) -> None:
    """Adds files to a PDF, by name in order. Raises ValueError where two have one name.

    They carry no dates: those of the files on a disk would make other bytes of the same content.
    """
    ordered = sorted(attachments, key=lambda one: one.name)
    if len({one.name for one in ordered}) < len(ordered):
        raise ValueError("two attachments have the same name")
    if not ordered:
        return
    files = [file_of(pdf, one) for one in ordered]
    names: list[pikepdf.Object | pikepdf.String] = []
    for one, file in zip(ordered, files, strict=True):
        names += [String(one.name), file]
    pdf.Root.AF = Array(files)
    pdf.Root.Names = Dictionary(EmbeddedFiles=pdf.make_indirect(Dictionary(Names=Array(names))))


def attachments_in(data: bytes) -> dict[str, bytes]:
    """The files that travel in a PDF, by name. Raises InputError for what can't be read as one."""
    try:
        with pikepdf.open(io.BytesIO(data)) as pdf:
            return {name: bytes(held.get_file().read_bytes()) for name, held in pdf.attachments.items()}
    except pikepdf.PdfError as error:
        raise InputError(
            Problem(
                where="file",
                what=f"It can't be read as a PDF: {error}.",
                fix="Give the pack as it was written.",
            )
        ) from None


def file_of(pdf: pikepdf.Pdf, one: Attachment) -> pikepdf.Object:
    """One file with what it is."""
    stream = pdf.make_stream(
        one.data,
        Type=Name.EmbeddedFile,
        Subtype=Name(f"/{one.media_type}"),
        Params=Dictionary(
            Size=len(one.data),
            # A checksum that the format wants, not a proof: ISO 32000-1, table 46.
            CheckSum=String(hashlib.md5(one.data, usedforsecurity=False).digest()),
        ),
    )
    return pdf.make_indirect(
        Dictionary(
            Type=Name.Filespec,
            F=String(one.name),
            UF=String(one.name),
            Desc=String(one.description),
            AFRelationship=Name(f"/{one.relationship}"),
            EF=Dictionary(F=stream, UF=stream),
        )
    )
