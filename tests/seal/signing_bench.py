"""A bench for signatures: a small pack with three empty fields, an authority, three persons, and a stamp."""

from __future__ import annotations

import io
from datetime import UTC, datetime, timedelta, timezone
from functools import cache

import pikepdf
import pytest
from cryptography.hazmat.primitives.asymmetric import ec
from reportlab.pdfgen.canvas import Canvas

from sheets.pages.stamp import stamp_pdf
from sheets.seal import keys
from sheets.seal.keys import KeyFile, KeyKind, OpenKey, Validity, make_authority, make_signer, open_key
from sheets.seal.sign import Signer, open_signer, sign_field, signing_fields
from sheets.seal.signatures import judge_signatures
from sheets.seal.signatures_report import ROLES, SignaturesReport

WORKS = "Works Authority"
PASSPHRASE = "lapped spool sleeve"
ZONE = timezone(timedelta(hours=1))
SIGNED_AT = datetime(2026, 3, 5, 14, 7, 0, tzinfo=ZONE)
NOW = datetime(2026, 6, 1, 12, 0, 0, tzinfo=UTC)
YEARS = Validity(start=datetime(2026, 1, 1, tzinfo=UTC), end=datetime(2028, 1, 1, tzinfo=UTC))
LONG = Validity(start=datetime(2025, 1, 1, tzinfo=UTC), end=datetime(2036, 1, 1, tzinfo=UTC))
PEOPLE = {"prepared": "Preparer One", "checked": "Checker Two", "approved": "Approver Three"}


@cache
def authority(name: str) -> tuple[KeyFile, OpenKey]:
    made = make_authority(name, validity=LONG, serial=1, passphrase=PASSPHRASE)
    return made, open_key(made.p12, PASSPHRASE)


@cache
def signer(
    person: str,
    *,
    kind: KeyKind = KeyKind.ECDSA_P256,
    validity: Validity = YEARS,
    issuer: str = WORKS,
    when: datetime = SIGNED_AT,
) -> Signer:
    made = make_signer(
        authority(issuer)[1], person, validity=validity, serial=7, passphrase=PASSPHRASE, kind=kind
    )
    return open_signer(made.p12, PASSPHRASE, when=when)


def signers_with_one_key(*people: str) -> list[Signer]:
    """Certificates for several names over one key, as a careless authority might issue."""
    private = ec.generate_private_key(ec.SECP256R1())
    issuer = authority(WORKS)[1]  # kept, so made before its key would be the shared one
    found = []
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(keys, "_new_key", lambda _: private)
        for person in people:
            made = make_signer(issuer, person, validity=YEARS, serial=9, passphrase=PASSPHRASE)
            found.append(open_signer(made.p12, PASSPHRASE, when=SIGNED_AT))
    return found


@cache
def unsigned_pack() -> bytes:
    """One page, one attachment, three empty fields; packed as the finishing pass packs."""
    buffer = io.BytesIO()
    canvas = Canvas(buffer, invariant=1)
    canvas.drawString(72, 700, "RV1 210 bar")
    canvas.showPage()
    canvas.save()
    with pikepdf.open(io.BytesIO(buffer.getvalue())) as pdf:
        pdf.attachments["machine.yaml"] = pikepdf.AttachedFileSpec(
            pdf, b"format: 1\n", filename="machine.yaml", mime_type="application/yaml"
        )
        page = pdf.pages[0]
        fields = [
            pdf.make_indirect(
                pikepdf.Dictionary(
                    Type=pikepdf.Name.Annot,
                    Subtype=pikepdf.Name.Widget,
                    FT=pikepdf.Name.Sig,
                    T=role,
                    Rect=[72, 100 + 60 * row, 232, 150 + 60 * row],
                    F=4,
                    P=page.obj,
                )
            )
            for row, role in enumerate(ROLES)
        ]
        page.Annots = pikepdf.Array(fields)
        pdf.Root.AcroForm = pdf.make_indirect(pikepdf.Dictionary(Fields=fields))
        out = io.BytesIO()
        pdf.save(
            out,
            force_version="1.7",
            deterministic_id=True,
            object_stream_mode=pikepdf.ObjectStreamMode.generate,
        )
    return out.getvalue()


def signed_once(
    pdf: bytes,
    role: str,
    who: Signer,
    *,
    when: datetime = SIGNED_AT,
    needed: tuple[str, ...] = ROLES,
    time_server: str | None = None,
) -> bytes:
    field = signing_fields(pdf)[role]
    stamp = stamp_pdf(
        meaning=role,
        name=who.person.name,
        when=when,
        zone="Europe/Madrid",
        width=field.width,
        height=field.height,
    )
    return sign_field(
        pdf, field=role, signer=who, when=when, stamp=stamp, needed=needed, time_server=time_server
    )


@cache
def signed_pack(*roles: str) -> bytes:
    """The small pack with the signatures named, each by its own person a minute after the one before."""
    pdf = unsigned_pack()
    for minute, role in enumerate(roles or ROLES):
        pdf = signed_once(pdf, role, signer(PEOPLE[role]), when=SIGNED_AT + timedelta(minutes=minute))
    return pdf


def judged(pdf: bytes, **other: object) -> SignaturesReport:
    """Judged by the trust list of the works, unless said otherwise."""
    chosen: dict[str, object] = {"trust": [authority(WORKS)[0].certificate_pem], "now": NOW, **other}
    return judge_signatures(pdf, **chosen)  # type: ignore[arg-type]  # names are checked by the call itself
