"""Signing: what other programs say of it, what it leaves alone, and whom it refuses."""

from __future__ import annotations

import io
import shutil
import subprocess
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pikepdf
import pypdfium2
import pytest
from asn1crypto import cms
from pyhanko.keys import load_certs_from_pemder_data
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign.validation import validate_pdf_signature
from pyhanko_certvalidator import ValidationContext
from signing_bench import (
    NOW,
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

from sheets.errors import InputError, RefusedError
from sheets.seal.keys import KeyKind
from sheets.seal.sign import sign_field, signing_fields
from sheets.seal.signatures_bytes import container_bytes, signed_ranges
from sheets.seal.signatures_report import ROLES, Judgement


def tool(name: str) -> str:
    found = shutil.which(name)
    if found is None:
        pytest.skip(f"{name} isn't installed")
    return found


def run(*command: str) -> str:
    done = subprocess.run(command, capture_output=True, encoding="utf-8", errors="replace", check=False)
    assert done.returncode == 0, f"{command}\n{done.stdout}\n{done.stderr}"
    return done.stdout + done.stderr


@pytest.fixture(params=list(KeyKind), ids=lambda kind: kind.name)
def any_pack(request: pytest.FixtureRequest) -> bytes:
    pdf = unsigned_pack()
    for role in ROLES:
        pdf = signed_once(pdf, role, signer(PEOPLE[role], kind=request.param))
    return pdf


def test_pdfsig_calls_all_three_valid(any_pack: bytes, tmp_path: Path) -> None:
    (tmp_path / "pack.pdf").write_bytes(any_pack)
    said = run(tool("pdfsig"), "-nocert", str(tmp_path / "pack.pdf"))
    assert said.count("Signature Validation: Signature is Valid.") == 3
    assert said.count("Signature Type: ETSI.CAdES.detached") == 3
    assert said.count("\n  - Total document signed") == 1
    for role, person in PEOPLE.items():
        assert f"Signature Field Name: {role}\n  - Signer Certificate Common Name: {person}" in said


def test_openssl_accepts_each_container_and_the_bytes_that_it_covers(any_pack: bytes, tmp_path: Path) -> None:
    (tmp_path / "authority.pem").write_text(authority(WORKS)[0].certificate_pem, encoding="ascii")
    ranges = signed_ranges(any_pack)
    assert len(ranges) == 3
    for one in ranges:
        (tmp_path / "container.der").write_bytes(container_bytes(any_pack, one))
        covered = any_pack[: one.gap_start] + any_pack[one.gap_end : one.end]
        for name, content in (("covered", covered), ("other", covered[:-1] + b"?")):
            (tmp_path / name).write_bytes(content)
        command = [tool("openssl"), "cms", "-verify", "-cades", "-binary", "-inform", "DER"]
        command += ["-in", str(tmp_path / "container.der"), "-CAfile", str(tmp_path / "authority.pem")]
        command += ["-attime", str(int(NOW.timestamp())), "-out", str(tmp_path / "out"), "-content"]
        run(*command, str(tmp_path / "covered"))
        changed = subprocess.run([*command, str(tmp_path / "other")], capture_output=True, check=False)
        assert changed.returncode != 0


def test_the_library_s_own_validation_agrees() -> None:
    pdf = signed_pack()
    (root,) = load_certs_from_pemder_data(authority(WORKS)[0].certificate_pem.encode())
    context = ValidationContext(trust_roots=[root], moment=NOW, allow_fetching=False)
    found = PdfFileReader(io.BytesIO(pdf)).embedded_signatures
    assert [one.field_name for one in found] == list(ROLES)
    for one in found:
        status = validate_pdf_signature(one, context)
        assert status.bottom_line, status.pretty_print_details()


def test_each_further_signature_keeps_all_earlier_ones_good() -> None:
    for count in (1, 2, 3):
        report = judged(signed_pack(*ROLES[:count]))
        assert [one.meaning for one in report.signatures] == list(ROLES[:count])
        assert [one.judgement for one in report.signatures] == [Judgement.GOOD] * count
        assert (report.judgement is Judgement.GOOD) == (count == 3)
    assert [one.person for one in report.signatures] == list(PEOPLE.values())
    assert {one.trusted_by for one in report.signatures} == {WORKS}
    assert report.signatures[0].claimed == SIGNED_AT


def test_bytes_that_were_there_stay() -> None:
    state = unsigned_pack()
    for role in ROLES:
        later = signed_once(state, role, signer(PEOPLE[role]))
        assert len(later) > len(state)
        assert later.startswith(state)
        state = later


def test_version_stays_and_nothing_dates_the_file() -> None:
    with (
        pikepdf.open(io.BytesIO(unsigned_pack())) as before,
        pikepdf.open(io.BytesIO(signed_pack())) as after,
    ):
        assert after.pdf_version == "1.7"
        assert after.Root.get("/Version") is None
        assert after.Root.get("/Extensions") is None
        assert dict(after.docinfo) == dict(before.docinfo)
        assert after.trailer.ID[0] == before.trailer.ID[0]
        assert after.attachments["machine.yaml"].get_file().read_bytes() == b"format: 1\n"


def test_stamps_embed_their_fonts_and_show_who_as_what_and_when() -> None:
    with pikepdf.open(io.BytesIO(signed_pack())) as pdf:
        for widget in pdf.pages[0].Annots:
            stamp = widget.AP.N
            fonts = list(stamp.Resources.Font.values())
            assert fonts
            assert all("/FontFile2" in font.FontDescriptor for font in fonts)
    document = pypdfium2.PdfDocument(signed_pack())
    document.init_forms()
    with_stamps = document[0].render(scale=1).to_numpy()
    plain = pypdfium2.PdfDocument(unsigned_pack())[0].render(scale=1).to_numpy()
    assert (with_stamps != plain).any()


def test_first_signature_lets_later_ones_fill_forms_and_nothing_else() -> None:
    with pikepdf.open(io.BytesIO(signed_pack())) as pdf:
        first, *later = (widget.V for widget in pdf.pages[0].Annots)
        (entry,) = first.Reference
        assert (entry.TransformMethod, entry.TransformParams.P) == (pikepdf.Name.DocMDP, 2)
        assert pdf.Root.Perms.DocMDP.objgen == first.objgen
        assert all("/Reference" not in one for one in later)


def test_container_holds_what_b_b_asks_for() -> None:
    """Source: ETSI EN 319 142-1, 6.3: content type, digest, certificate named; no signing time in it."""
    pdf = signed_pack()
    (info,) = cms.ContentInfo.load(container_bytes(pdf, signed_ranges(pdf)[0]))["content"]["signer_infos"]
    found = {one["type"].native for one in info["signed_attrs"]}
    assert {"content_type", "message_digest", "signing_certificate_v2"} <= found
    assert "signing_time" not in found


def test_fields_tell_their_size_and_whether_they_are_signed() -> None:
    fields = signing_fields(signed_pack("prepared"))
    assert {name: one.signed for name, one in fields.items()} == {
        "prepared": True,
        "checked": False,
        "approved": False,
    }
    assert (fields["checked"].width, fields["checked"].height) == (160, 50)


def test_nobody_signs_twice_by_name() -> None:
    with pytest.raises(
        RefusedError, match="PREPARER One signed as prepared and as checked: one person by name"
    ):
        signed_once(signed_pack("prepared"), "checked", signer("PREPARER  One", issuer="Other Authority"))


def test_nobody_signs_twice_by_key() -> None:
    first, second = signers_with_one_key("Alias One", "Alias Two")
    two = ("prepared", "approved")
    pdf = signed_once(unsigned_pack(), "prepared", first, needed=two)
    with pytest.raises(RefusedError, match="Alias Two signed as prepared and as approved: one person by key"):
        signed_once(pdf, "approved", second, needed=two)


def test_roles_are_signed_in_order() -> None:
    with pytest.raises(RefusedError, match="isn't signed as prepared yet"):
        signed_once(unsigned_pack(), "checked", signer("Checker Two"))
    with pytest.raises(RefusedError, match="isn't signed as checked yet"):
        signed_once(signed_pack("prepared"), "approved", signer("Approver Three"))
    with pytest.raises(RefusedError, match="already"):
        signed_once(signed_pack("prepared"), "prepared", signer("Approver Three"))


def test_a_works_may_do_without_the_check_but_not_with_one_person() -> None:
    two = ("prepared", "approved")
    pdf = signed_once(unsigned_pack(), "prepared", signer("Preparer One"), needed=two)
    pdf = signed_once(pdf, "approved", signer("Approver Three"), needed=two)
    assert judged(pdf, needed=two).judgement is Judgement.GOOD
    assert judged(pdf).judgement is Judgement.NOT_ESTABLISHED
    for needed in ((), ("prepared",), ("approved",), ("prepared", "checked"), ("approved", "prepared")):
        with pytest.raises(InputError, match="two persons"):
            judged(pdf, needed=needed)
        with pytest.raises(InputError, match="two persons"):
            signed_once(unsigned_pack(), "prepared", signer("Preparer One"), needed=needed)


def test_a_key_that_does_not_hold_now_signs_nothing() -> None:
    with pytest.raises(RefusedError, match="holds from"):
        signer("Preparer One", when=datetime(2030, 1, 1, tzinfo=UTC))


def test_a_broken_pack_gets_no_further_signature() -> None:
    pdf = bytearray(signed_pack("prepared"))
    pdf[signed_ranges(pdf)[0].gap_start - 2000] ^= 1  # within the stamp
    who = signer("Checker Two")
    with pytest.raises(RefusedError, match="changed after it was signed"):
        sign_field(bytes(pdf), field="checked", signer=who, when=SIGNED_AT, stamp=b"")
    with pytest.raises(RefusedError, match="after the end"):
        sign_field(signed_pack("prepared") + b"\n", field="checked", signer=who, when=SIGNED_AT, stamp=b"")


def test_a_clock_that_went_back_is_noticed() -> None:
    with pytest.raises(RefusedError, match="which is later"):
        signed_once(
            signed_pack("prepared"), "checked", signer("Checker Two"), when=SIGNED_AT - timedelta(hours=1)
        )


def test_a_file_without_fields_is_refused_by_name() -> None:
    buffer = io.BytesIO()
    with pikepdf.open(io.BytesIO(unsigned_pack())) as pdf:
        assert "/AcroForm" in pdf.Root
        del pdf.Root.AcroForm, pdf.pages[0].Annots
        pdf.save(buffer)
    with pytest.raises(InputError, match="no field 'prepared'"):
        sign_field(
            buffer.getvalue(), field="prepared", signer=signer("Preparer One"), when=SIGNED_AT, stamp=b""
        )
    with pytest.raises(InputError, match="can't be read as a PDF"):
        signing_fields(b"no pdf")
