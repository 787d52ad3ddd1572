"""Tampering that keeps every byte rule or every key: each is refused or named with its reason."""

from __future__ import annotations

import io
from collections.abc import Callable, Iterator
from datetime import timedelta

import pikepdf
import pytest
from asn1crypto import cms, core, x509
from cryptography.hazmat.primitives.asymmetric import rsa
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.pdf_utils.reader import PdfFileReader
from signing_bench import (
    PEOPLE,
    SIGNED_AT,
    WORKS,
    authority,
    judged,
    signed_once,
    signed_pack,
    signer,
    signers_with_one_key,
    unsigned_pack,
)

from sheets.errors import InputError, NotEstablishedError
from sheets.seal import keys, sign, signatures_revisions
from sheets.seal.signatures import judge_signatures
from sheets.seal.signatures_bytes import container_bytes, signed_ranges
from sheets.seal.signatures_report import ROLES, Cause, Judgement, SignaturesReport

Change = Callable[[IncrementalPdfFileWriter], None]


def causes(report: SignaturesReport) -> set[Cause]:
    return {reason.cause for reason in report.reasons} | {
        reason.cause for one in report.signatures for reason in one.reasons
    }


def updated(pdf: bytes, change: Change) -> bytes:
    """An ordinary update behind the last signature, by somebody without a key."""
    writer = IncrementalPdfFileWriter(io.BytesIO(pdf))
    writer._force_write_when_empty = True  # a change of the trailer alone is one, too
    change(writer)
    out = io.BytesIO()
    writer.write(out)
    return out.getvalue()


def with_container(pdf: bytes, container: bytes, which: int = -1) -> bytes:
    """The pack with another container in a gap."""
    gap = signed_ranges(pdf)[which]
    room = gap.gap_end - gap.gap_start - 2
    text = container.hex().upper().ljust(room, "0").encode()
    assert len(text) == room
    return pdf[: gap.gap_start + 1] + text + pdf[gap.gap_end - 1 :]


def first_page(writer: IncrementalPdfFileWriter) -> generic.DictionaryObject:
    return writer.root["/Pages"]["/Kids"][0]


def add_page(writer: IncrementalPdfFileWriter) -> None:
    pages = writer.root["/Pages"]
    page = writer.add_object(
        generic.DictionaryObject(
            {
                generic.pdf_name("/Type"): generic.pdf_name("/Page"),
                generic.pdf_name("/Parent"): writer.root.raw_get("/Pages"),
                generic.pdf_name("/MediaBox"): first_page(writer)["/MediaBox"],
            }
        )
    )
    pages["/Kids"].append(page)
    pages["/Count"] = generic.NumberObject(2)
    writer.update_container(pages)


def swap_attachment(writer: IncrementalPdfFileWriter) -> None:
    file = writer.root["/Names"]["/EmbeddedFiles"]["/Names"][1]["/EF"]["/F"]
    file._data = b"format: 2\n"
    file._encoded_data = None
    writer.update_container(file)


def change_text(writer: IncrementalPdfFileWriter) -> None:
    page = first_page(writer)
    stream = generic.StreamObject(stream_data=b"BT /F1 12 Tf 72 700 Td (RV1 310 bar) Tj ET")
    page[generic.pdf_name("/Contents")] = writer.add_object(stream)
    writer.update_container(page)


def add_annotation(writer: IncrementalPdfFileWriter) -> None:
    page = first_page(writer)
    note = generic.DictionaryObject({generic.pdf_name("/Type"): generic.pdf_name("/Annot")})
    page["/Annots"].append(writer.add_object(note))
    writer.update_container(page)


def move_other_stamp(writer: IncrementalPdfFileWriter) -> None:
    widget = first_page(writer)["/Annots"][0]
    widget["/Rect"] = generic.ArrayObject(generic.NumberObject(n) for n in (0, 0, 1, 1))
    writer.update_container(widget)


def restamp_other(writer: IncrementalPdfFileWriter) -> None:
    widget = first_page(writer)["/Annots"][0]
    widget["/AP"] = generic.DictionaryObject()
    writer.update_container(widget)


def move_own_field(writer: IncrementalPdfFileWriter) -> None:
    widget = first_page(writer)["/Annots"][1]
    widget["/Rect"] = generic.ArrayObject(generic.NumberObject(n) for n in (0, 0, 600, 800))
    writer.update_container(widget)


def hide_an_object(writer: IncrementalPdfFileWriter) -> None:
    writer.add_object(generic.StreamObject(stream_data=b"not for anybody yet"))


def other_form(writer: IncrementalPdfFileWriter) -> None:
    writer.root["/AcroForm"][generic.pdf_name("/DR")] = generic.DictionaryObject()
    writer.update_container(writer.root["/AcroForm"])


def other_catalog(writer: IncrementalPdfFileWriter) -> None:
    writer.root[generic.pdf_name("/PageLayout")] = generic.pdf_name("/OneColumn")
    writer.update_root()


def other_info(writer: IncrementalPdfFileWriter) -> None:
    writer.set_info(generic.DictionaryObject({generic.pdf_name("/Title"): generic.TextStringObject("other")}))


def point_elsewhere(writer: IncrementalPdfFileWriter) -> None:
    """No object is new or changed; the file only says that another one describes it."""
    writer.set_info(first_page(writer)["/Annots"].raw_get(2))


CHANGES = (
    add_page,
    swap_attachment,
    change_text,
    add_annotation,
    move_other_stamp,
    restamp_other,
    move_own_field,
    hide_an_object,
    other_form,
    other_catalog,
    other_info,
    point_elsewhere,
)


@pytest.mark.parametrize("change", CHANGES, ids=lambda one: one.__name__)
def test_update_after_the_last_signature(change: Change) -> None:
    report = judged(updated(signed_pack(), change))
    assert report.judgement is Judgement.BAD
    assert causes(report) == {Cause.TRAILING, Cause.LATER}
    assert [one.person for one in report.signatures] == list(PEOPLE.values())


@pytest.mark.parametrize("change", CHANGES, ids=lambda one: one.__name__)
def test_update_together_with_a_later_trusted_signature(
    change: Change, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A signer of the works changes what others signed: the key is good, the paper isn't."""
    pdf = signed_pack("prepared")

    class Changing(sign._Update):
        def __init__(self, stream: io.BytesIO, prev: PdfFileReader) -> None:
            super().__init__(stream, prev)
            change(self)

    with monkeypatch.context() as patch:
        patch.setattr(sign, "_Update", Changing)
        pdf = signed_once(pdf, "checked", signer("Checker Two"))
    with monkeypatch.context() as patch:
        patch.setattr(sign, "_check_turn", lambda *_: None)
        pdf = signed_once(pdf, "approved", signer("Approver Three"))
    report = judged(pdf)
    assert report.judgement is Judgement.BAD
    assert [one.judgement for one in report.signatures] == [Judgement.GOOD, Judgement.BAD, Judgement.GOOD]
    assert causes(report) == {Cause.REVISION}


def test_object_that_was_asked_for_before_it_was_there(monkeypatch: pytest.MonkeyPatch) -> None:
    """The page refers to a text that isn't there when the first signs, and comes with the second."""
    buffer = io.BytesIO()
    with pikepdf.open(io.BytesIO(unsigned_pack())) as pdf:
        pdf.save(buffer, object_stream_mode=pikepdf.ObjectStreamMode.disable)
    raw = buffer.getvalue()

    class Planting(sign._Update):
        """Signs and plants a reference to object number 500."""

        def __init__(self, stream: io.BytesIO, prev: PdfFileReader) -> None:
            super().__init__(stream, prev)
            page = first_page(self)
            awaiting = generic.IndirectObject(500, 0, self)
            page[generic.pdf_name("/Contents")] = generic.ArrayObject([page.raw_get("/Contents"), awaiting])
            self.update_container(page)

    class Bringing(sign._Update):
        def __init__(self, stream: io.BytesIO, prev: PdfFileReader) -> None:
            super().__init__(stream, prev)
            self._lastobj_id = 499

    with monkeypatch.context() as patch:
        patch.setattr(sign, "_Update", Planting)
        pdf = signed_once(raw, "prepared", signer("Preparer One"))
    with monkeypatch.context() as patch:
        patch.setattr(sign, "_Update", Bringing)
        pdf = signed_once(pdf, "checked", signer("Checker Two"))
    report = judged(pdf)
    assert report.judgement is Judgement.BAD
    assert "asked for before it was there" in report.signatures[1].reasons[0].says


def test_all_references_are_seen_packed_or_not() -> None:
    """Against the library's own reading of every object, one by one."""
    state = PdfFileReader(io.BytesIO(signed_pack("prepared")))
    seen = {
        (reference.idnum, reference.generation)
        for revision in range(state.total_revisions)
        for one in state.xrefs.explicit_refs_in_revision(revision)
        for reference in generic_references(state.get_object(one))
    }
    assert len(seen) > 10
    assert signatures_revisions._referenced(state) == seen


def generic_references(value: object) -> Iterator[generic.IndirectObject]:
    if isinstance(value, generic.IndirectObject):
        yield value
    elif isinstance(value, dict):
        for key in value:
            yield from generic_references(value.raw_get(key))
    elif isinstance(value, list):
        for index in range(len(value)):
            yield from generic_references(value.raw_get(index))


@pytest.mark.parametrize("tail", [b"\n", b" ", b"\0", b"%%EOF\n", b"%PDF-1.7\n"])
def test_appended_bytes(tail: bytes) -> None:
    report = judged(signed_pack() + tail)
    assert report.judgement is Judgement.BAD
    assert f"{len(tail)} bytes stand after" in report.reasons[0].says


def test_removed_signatures() -> None:
    pdf = signed_pack()
    for count, one in enumerate(signed_ranges(pdf)[:2], start=1):
        report = judged(pdf[: one.end])
        assert report.judgement is Judgement.NOT_ESTABLISHED
        assert [reason.cause for reason in report.reasons] == [Cause.MISSING] * (3 - count)
        assert ROLES[count] in report.reasons[0].says


@pytest.mark.parametrize("which", [0, 1, 2])
def test_emptied_container(which: int) -> None:
    report = judged(with_container(signed_pack(), b"", which))
    assert report.judgement is Judgement.BAD
    assert Cause.CONTAINER in causes(report)


def test_container_of_another_signature_of_the_same_file() -> None:
    pdf = signed_pack()
    report = judged(with_container(pdf, container_bytes(pdf, signed_ranges(pdf)[0])))
    assert report.judgement is Judgement.BAD
    assert Cause.DIGEST in causes(report)


def test_unsigned_is_not_established() -> None:
    for pdf in (unsigned_pack(), b"%PDF-1.7 nothing", b""):
        report = judged(pdf)
        assert report.judgement is Judgement.NOT_ESTABLISHED
        assert [reason.cause for reason in report.reasons] == [Cause.UNSIGNED]


def test_whole_file_written_anew() -> None:
    buffer = io.BytesIO()
    with pikepdf.open(io.BytesIO(signed_pack())) as pdf:
        pdf.save(buffer)
    assert judged(buffer.getvalue()).judgement is not Judgement.GOOD


def test_foreign_certificate_is_named() -> None:
    pdf = signed_pack("prepared", "checked")
    pdf = signed_once(
        pdf, "approved", signer("Stranger Four", issuer="Elsewhere"), when=SIGNED_AT + timedelta(hours=1)
    )
    report = judged(pdf)
    assert report.judgement is Judgement.NOT_ESTABLISHED
    *ours, foreign = report.signatures
    assert [one.judgement for one in ours] == [Judgement.GOOD] * 2
    (reason,) = foreign.reasons
    assert reason.cause is Cause.FOREIGN
    assert "Stranger Four" in reason.says
    assert "CN=Elsewhere" in reason.says


def test_namesake_of_the_authority_is_no_authority() -> None:
    """Another works' authority may have our name: then it is foreign. If it claims our key: forged."""
    namesake = keys.make_authority(
        WORKS, validity=keys.Validity(start=SIGNED_AT, end=SIGNED_AT + timedelta(days=900)), serial=2,
        passphrase="another passphrase",
    )  # fmt: skip
    report = judged(signed_pack(), trust=[namesake.certificate_pem])
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert causes(report) == {Cause.FOREIGN}

    forger = forged_signer(keys.open_key(namesake.p12, "another passphrase"))
    pdf = signed_pack("prepared", "checked")
    pdf = signed_once(pdf, "approved", forger, when=SIGNED_AT + timedelta(hours=1))
    report = judged(pdf)
    assert report.judgement is Judgement.BAD
    assert causes(report) == {Cause.FORGED}


def forged_signer(forging: keys.OpenKey) -> sign.Signer:
    """A signer whose certificate names our authority and its key, but is signed with another."""
    ours = authority(WORKS)[1]
    real = keys.x509.AuthorityKeyIdentifier.from_issuer_public_key(ours.private.public_key())
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(
            keys.x509.AuthorityKeyIdentifier, "from_issuer_public_key", staticmethod(lambda _: real)
        )
        made = keys.make_signer(
            keys.OpenKey(private=forging.private, certificate=ours.certificate),
            "Forger Five",
            validity=keys.Validity(start=SIGNED_AT, end=SIGNED_AT + timedelta(days=900)),
            serial=3,
            passphrase="another passphrase",
        )
    return sign.open_signer(made.p12, "another passphrase", when=SIGNED_AT + timedelta(hours=1))


@pytest.mark.parametrize("by", ["name", "key"])
def test_one_person_in_two_roles(by: str, monkeypatch: pytest.MonkeyPatch) -> None:
    if by == "key":
        first, second = signers_with_one_key("Alias One", "Alias Two")
    else:
        first, second = signer("Preparer One"), signer("preparer one")
    monkeypatch.setattr(sign, "_check_turn", lambda *_: None)
    two = ("prepared", "approved")
    pdf = signed_once(unsigned_pack(), "prepared", first, needed=two)
    pdf = signed_once(pdf, "approved", second, needed=two)
    report = judged(pdf, needed=two)
    assert report.judgement is Judgement.BAD
    assert causes(report) == {Cause.PERSONS}
    assert f"one person by {by}" in report.signatures[1].reasons[0].says


def test_signed_in_the_wrong_order(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sign, "_check_turn", lambda *_: None)
    pdf = unsigned_pack()
    for role in reversed(ROLES):
        pdf = signed_once(pdf, role, signer(PEOPLE[role]))
    report = judged(pdf)
    assert report.judgement is Judgement.BAD
    assert causes(report) == {Cause.ORDER}


def test_signature_of_the_right_person_in_another_field(monkeypatch: pytest.MonkeyPatch) -> None:
    """The reason in the signature says approved, the field says checked."""
    plain = sign.SignatureObject
    monkeypatch.setattr(sign, "SignatureObject", lambda **said: plain(**{**said, "reason": "approved"}))
    report = judged(signed_once(unsigned_pack(), "prepared", signer("Preparer One")))
    assert report.judgement is Judgement.BAD
    assert causes(report) >= {Cause.FORM}


def test_name_beside_the_signature_that_the_certificate_does_not_bear(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    plain = sign.SignatureObject
    monkeypatch.setattr(sign, "SignatureObject", lambda **said: plain(**{**said, "name": "Chief Nobody"}))
    report = judged(signed_once(unsigned_pack(), "prepared", signer("Preparer One")))
    assert report.judgement is Judgement.BAD
    assert "another person" in report.reasons[0].says


def two_signers(info: cms.ContentInfo) -> bytes:
    body = info["content"]
    body["signer_infos"] = cms.SignerInfos([body["signer_infos"][0], body["signer_infos"][0]])
    return info.dump(force=True)


def no_signer(info: cms.ContentInfo) -> bytes:
    info["content"]["signer_infos"] = cms.SignerInfos([])
    return info.dump(force=True)


def longer_length(info: cms.ContentInfo) -> bytes:
    """The outermost length in three bytes where two do: the same to a lenient reader."""
    packed = info.dump()
    assert packed[1] == 0x82
    return packed[:1] + b"\x83\0" + packed[2:]


def further_certificate(info: cms.ContentInfo) -> bytes:
    body = info["content"]
    other = signer("Stranger Four", issuer="Elsewhere").certificate
    der = other.public_bytes(keys.serialization.Encoding.DER)
    found = [*(one.chosen for one in body["certificates"]), x509.Certificate.load(der)]
    body["certificates"] = found
    return info.dump(force=True)


def other_version(info: cms.ContentInfo) -> bytes:
    info["content"]["version"] = "v3"
    return info.dump(force=True)


def other_digest_list(info: cms.ContentInfo) -> bytes:
    info["content"]["digest_algorithms"] = [{"algorithm": "sha512"}]
    return info.dump(force=True)


def unsigned_attribute(info: cms.ContentInfo) -> bytes:
    info["content"]["signer_infos"][0]["unsigned_attrs"] = cms.CMSAttributes(
        [cms.CMSAttribute({"type": "1.2.3.4", "values": [core.OctetString(b"x")]})]
    )
    return info.dump(force=True)


@pytest.mark.parametrize(
    "change",
    [
        two_signers,
        no_signer,
        longer_length,
        further_certificate,
        other_version,
        other_digest_list,
        unsigned_attribute,
    ],
    ids=lambda one: one.__name__,
)
def test_container_that_lenient_readers_accept(change: Callable[[cms.ContentInfo], bytes]) -> None:
    """None of these parts is covered by the signature in the container."""
    pdf = signed_pack()
    info = cms.ContentInfo.load(container_bytes(pdf, signed_ranges(pdf)[-1]))
    report = judged(with_container(pdf, change(info)))
    assert report.judgement is not Judgement.GOOD
    assert causes(report) & {Cause.CONTAINER, Cause.FOREIGN}


def test_another_certificate_over_the_same_key() -> None:
    """Same key, issuer and serial number, another name: the signature alone would fit both."""
    first, second = signers_with_one_key("Alias One", "Alias Two")
    pdf = signed_once(unsigned_pack(), "prepared", first)
    info = cms.ContentInfo.load(container_bytes(pdf, signed_ranges(pdf)[0]))
    der = second.certificate.public_bytes(keys.serialization.Encoding.DER)
    info["content"]["certificates"] = [x509.Certificate.load(der)]
    report = judged(with_container(pdf, info.dump(force=True)))
    assert report.judgement is Judgement.BAD
    assert causes(report) == {Cause.ATTRIBUTES}


def test_short_keys_are_not_established(monkeypatch: pytest.MonkeyPatch) -> None:
    weak = rsa.generate_private_key(public_exponent=65537, key_size=1024)
    issuer = authority(WORKS)[1]  # kept for other tests, so made before its key would be the weak one
    monkeypatch.setattr(keys, "_new_key", lambda _: weak)
    made = keys.make_signer(
        issuer,
        "Weak Six",
        validity=keys.Validity(start=SIGNED_AT, end=SIGNED_AT + timedelta(days=9)),
        serial=4,
        passphrase="another passphrase",
    )
    who = sign.open_signer(made.p12, "another passphrase", when=SIGNED_AT)
    with pytest.raises(NotEstablishedError, match="allowed algorithm"):
        signed_once(unsigned_pack(), "prepared", who)
    monkeypatch.setattr(sign, "_check_made", lambda *_: None)
    report = judged(signed_once(unsigned_pack(), "prepared", who))
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert Cause.ALGORITHM in causes(report)


def test_an_authority_signs_nothing_itself() -> None:
    made, _ = authority(WORKS)
    who = sign.open_signer(made.p12, "lapped spool sleeve", when=SIGNED_AT)
    report = judged(signed_once(unsigned_pack(), "prepared", who))
    assert report.judgement is Judgement.BAD
    assert Cause.KEY_USAGE in causes(report)


def test_a_trust_list_that_cannot_be_read_is_an_error_and_an_empty_one_trusts_nobody() -> None:
    with pytest.raises(InputError, match="entry 1"):
        judged(signed_pack(), trust=["-----BEGIN CERTIFICATE-----\nnothing\n-----END CERTIFICATE-----"])
    report = judge_signatures(signed_pack(), trust=[], now=SIGNED_AT + timedelta(days=9))
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert causes(report) == {Cause.FOREIGN}


def test_signers_own_certificate_may_stand_in_the_trust_list() -> None:
    listed = [
        signer(person).certificate.public_bytes(keys.serialization.Encoding.PEM).decode()
        for person in PEOPLE.values()
    ]
    assert judged(signed_pack(), trust=listed).judgement is Judgement.GOOD
    assert judged(signed_pack(), trust=listed[:2]).judgement is Judgement.NOT_ESTABLISHED
