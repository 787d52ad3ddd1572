"""Verifying: three words apart, none of them good about what can't be judged."""

from __future__ import annotations

import io
import json
import shutil
import sqlite3
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pikepdf
import pypdfium2
import pytest
import zxingcpp
from pikepdf import AttachedFileSpec, Dictionary, Name
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign import signers
from works import ADA, BRAM, CLEO, LATER, PASSPHRASE, WHEN, Chance, Works, told, words

from sheets import pipeline
from sheets.errors import ExitStatus, InputError
from sheets.pages.compose.matter import Matter
from sheets.pages.document import Layout
from sheets.pipeline import issuing, verifying
from sheets.pipeline.attaching import CONTENT_NAME, ISSUE_NAME, JOB_NAME, MACHINE_NAME
from sheets.pipeline.printing import whole_content
from sheets.seal.signatures import judge_signatures
from sheets.seal.signatures_report import Cause

NAMES = {"format", "file", "status", "record", "signatures", "content", "currency"}


def test_an_issued_pack_is_good_three_times(issued: Works) -> None:
    found = issued.verify()
    assert words(found) == ("good", "good", "good")
    assert found.status is ExitStatus.GOOD
    for name in (ADA, BRAM, CLEO, "Revision 1 of WI-0139: current", "by the register"):
        assert name in told(found)


def test_names_of_the_data(issued: Works, tmp_path: Path) -> None:
    data = pipeline.verify_json(issued.verify())
    assert set(data) == NAMES
    assert (data["format"], data["status"]) == (1, 0)
    assert set(data["record"]) == {"record_id", "revision", "digest"}  # type: ignore[arg-type]  # a dict
    for part in ("signatures", "content", "currency"):
        assert set(data[part]) == {"word", "lines"}  # type: ignore[arg-type]  # a dict
    assert set(pipeline.verify_json(issued.verify(code="x"))) == NAMES | {"code"}
    failed = pipeline.verify_failed_json(tmp_path, InputError())
    assert set(failed) == {"format", "file", "status", "problems"}


# --- currency --------------------------------------------------------------------------------------------


def test_a_superseded_copy_names_the_current_revision(works: Works) -> None:
    older = shutil.copy(works.pack, works.folder / "older.pdf")
    text = works.machine.read_text(encoding="utf-8")
    works.machine.write_text(text.replace("name: Kiln-car pusher", "name: Second kiln-car pusher"))
    made = works.issue(pipeline.steps(pipeline.check(works.machine)))
    assert made.revision == "2"
    assert words(works.verify()) == ("good", "good", "good")
    found = works.verify(Path(older))
    assert words(found) == ("good", "good", "bad")
    assert found.status is ExitStatus.REFUSED
    assert "Revision 1 of WI-0139: superseded; the current one is revision 2." in told(found)


def test_what_no_register_says_is_not_established(issued: Works, root: Path, tmp_path: Path) -> None:
    found = issued.verify(register_at=None)
    assert words(found) == ("good", "good", "not established")
    assert found.status is ExitStatus.NOT_ESTABLISHED
    assert "No register was asked" in told(found)

    sample = root / "sample_machines" / "kiln_pusher.yaml"
    other = pipeline.demo(sample, tmp_path / "other", when=WHEN, random_bytes=Chance(8))
    found = issued.verify(register_at=other.register)
    assert words(found) == ("good", "good", "not established")
    assert "doesn't know this record" in told(found)

    with pytest.raises(InputError, match="no register there"):
        issued.verify(register_at=tmp_path / "none.db")
    assert not (tmp_path / "none.db").exists()


def test_a_broken_register_says_nothing(works: Works) -> None:
    with sqlite3.connect(works.register) as base:
        (trigger,) = base.execute("SELECT sql FROM sqlite_master WHERE name = 'no_update'").fetchone()
        base.execute("DROP TRIGGER no_update")
        base.execute("UPDATE events SET who = 'Mallory' WHERE sequence = 3")
        base.execute(trigger)
    found = works.verify()
    assert words(found) == ("good", "good", "not established")
    assert "The register contradicts itself" in told(found)
    assert "by the register" not in told(found)


def test_another_file_under_a_record_is_not_current(works: Works) -> None:
    """The register knows the pack as issued, not a copy from before its last signature."""
    data = works.pack.read_bytes()
    before_last = data[: data.rindex(b"%%EOF", 0, len(data) - 10) + 6]
    works.pack.write_bytes(before_last)
    found = works.verify()
    assert words(found) == ("not established", "good", "bad")
    assert "knows another file under this record" in told(found)


# --- trust, persons, time --------------------------------------------------------------------------------


def test_whom_the_verifier_does_not_trust_is_not_established(
    issued: Works, root: Path, tmp_path: Path
) -> None:
    """Never the site file that travels in the pack, and never one beside it."""
    found = issued.verify(site_file=None)
    assert words(found) == ("not established", "good", "good")
    sample = root / "sample_machines" / "kiln_pusher.yaml"
    far = pipeline.demo(sample, tmp_path / "far", when=WHEN, random_bytes=Chance(8))
    found = issued.verify(site_file=far.site)
    assert words(found) == ("not established", "good", "good")
    causes = {reason.cause for one in found.signatures.signatures for reason in one.reasons}
    assert causes == {Cause.FOREIGN}


def test_a_trust_list_that_cannot_be_read_is_wrong_input(works: Works) -> None:
    pem = works.folder / "keys" / "authority.pem"
    for text in (b"\xff", b"no certificate"):
        pem.write_bytes(text)
        with pytest.raises(InputError, match=r"authority\.pem|PEM form"):
            works.verify()
    pem.unlink()
    with pytest.raises(InputError, match=r"keys/authority\.pem' can't be read"):
        works.verify()


def test_time_servers_are_judged_by_their_own_list(works: Works, monkeypatch: pytest.MonkeyPatch) -> None:
    """What the judging makes of it is tested where it stands; here, that it gets what the site file names."""
    text = works.site.read_text(encoding="utf-8")
    server = "  time server: https://time.example\n"
    works.site.write_text(text + server, encoding="utf-8")
    with pytest.raises(InputError, match="No authority is trusted for its time"):
        works.verify()
    works.site.write_text(text + server + "  time trust: [keys/time.pem]\n", encoding="utf-8")
    with pytest.raises(InputError, match=r"time trust: The certificate 'keys/time\.pem' can't be read"):
        works.verify()
    pem = (works.folder / "keys" / "authority.pem").read_text(encoding="ascii")
    (works.folder / "keys" / "time.pem").write_text(pem + "\n", encoding="ascii")
    got: dict[str, object] = {}

    def judge(data: bytes, **given: object) -> object:
        got.update(given)
        return judge_signatures(data, **given)  # type: ignore[arg-type]  # handed through

    monkeypatch.setattr(verifying, "judge_signatures", judge)
    assert words(works.verify()) == ("good", "good", "good")
    assert (got["trust"], got["time_trust"]) == ((pem,), (pem + "\n",))


def test_after_the_end_of_certificates_the_register_still_knows(issued: Works) -> None:
    late = LATER + timedelta(days=4000)
    assert words(issued.verify(now=late)) == ("good", "good", "good")
    found = issued.verify(now=late, register_at=None)
    assert words(found) == ("not established", "good", "not established")


def test_a_signature_of_another_person_than_the_sheets_name_is_bad(
    works: Works, job: Matter, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Somebody whom the site trusts, too, signed in Bram's place."""
    wanted = issuing._context

    def named_otherwise(*args: object) -> object:
        context = wanted(*args)  # type: ignore[arg-type]  # handed through
        return replace(context, signers=(("prepared", ADA), ("checked", "Dora Vell"), ("approved", CLEO)))

    monkeypatch.setattr(issuing, "_context", named_otherwise)
    works.issue(job)
    found = works.verify()
    assert words(found) == ("bad", "good", "good")
    assert f"It is signed by {BRAM}; the sheets name Dora Vell as checked." in told(found)


# --- ink -------------------------------------------------------------------------------------------------


def updated(data: bytes) -> bytes:
    """The same file with an update behind its bytes, that shows another first page."""
    writer = IncrementalPdfFileWriter(io.BytesIO(data))
    page = writer.find_page_for_modification(0)[0].get_object()
    shown = writer.add_object(generic.StreamObject(stream_data=b"BT ET"))
    page["/Contents"] = shown
    writer.update_container(page)
    out = io.BytesIO()
    writer.write(out)
    assert out.getvalue().startswith(data)
    return out.getvalue()


def test_ink_is_not_established_and_the_rest_is_judged(works: Works, job: Matter) -> None:
    made = works.issue(job, ink=True, prepared=ADA, checked=BRAM, approved=CLEO)
    assert (made.waiting, made.revision) == ((), "2")
    found = works.verify()
    assert words(found) == ("not established", "good", "good")
    assert "ink can't be judged here" in told(found)

    data = works.pack.read_bytes()
    for changed in (updated(data), data + b"\n", data + b"%%EOF\n"):
        works.pack.write_bytes(changed)
        assert words(works.verify()) == ("not established", "not established", "bad")


def test_an_update_behind_signatures_is_seen_whatever_it_is(works: Works) -> None:
    data = works.pack.read_bytes()
    for changed in (updated(data), data + b"\n"):
        works.pack.write_bytes(changed)
        assert words(works.verify()) == ("bad", "not established", "bad")


def test_an_update_between_signatures_that_cannot_be_judged_is_not_taken_for_one(
    waiting: Works,
) -> None:
    """Signed once, changed, and then signed by somebody with other tools who says nothing of a form."""
    data = updated(waiting.pack.read_bytes())
    key = signers.SimpleSigner.load_pkcs12(waiting.key("bram-tolliver"), passphrase=PASSPHRASE.encode())
    out = signers.sign_pdf(
        IncrementalPdfFileWriter(io.BytesIO(data)),
        signers.PdfSignatureMetadata(field_name="checked"),
        signer=key,
        existing_fields_only=True,
    )
    waiting.pack.write_bytes(out.getvalue())
    found = waiting.verify()
    assert "good" not in words(found)


# --- content ---------------------------------------------------------------------------------------------


def test_another_engine_says_nothing(issued: Works, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(verifying, "ENGINE", verifying.ENGINE + 1)
    found = issued.verify()
    assert words(found) == ("good", "not established", "good")
    assert "Another engine made it" in told(found)


def reattached(works: Works, **files: bytes | None) -> bytes:
    """The pack written anew with other attachments: its signatures can't survive that."""
    with pikepdf.open(works.pack) as pdf:
        for name, data in files.items():
            del pdf.attachments[name]
            if data is not None:
                pdf.attachments[name] = AttachedFileSpec(pdf, data, filename=name)
        out = io.BytesIO()
        pdf.save(out)
    return out.getvalue()


def held(works: Works, name: str) -> bytes:
    with pikepdf.open(works.pack) as pdf:
        return bytes(pdf.attachments[name].get_file().read_bytes())


def test_a_content_that_its_data_do_not_give_is_bad(works: Works) -> None:
    machine, content = held(works, MACHINE_NAME), held(works, CONTENT_NAME)
    assert content.count(b"180") > 3
    lie = content.replace(b"180", b"200")  # consistent all through, and still JSON
    assert json.loads(lie)
    other = machine.replace(b"setting: 180 bar", b"setting: 170 bar")
    for files, word in (
        ({CONTENT_NAME: lie}, "bad"),
        ({MACHINE_NAME: other}, "bad"),
        ({MACHINE_NAME: b"parts: ["}, "bad"),
        ({JOB_NAME: b"[]"}, "bad"),
        ({JOB_NAME: held(works, JOB_NAME).replace(b"A4", b"A3")}, "bad"),
        ({JOB_NAME: b"[" * 100_000}, "bad"),
        ({CONTENT_NAME: None}, "not established"),
        ({MACHINE_NAME: None}, "not established"),
    ):
        file = works.folder / "changed.pdf"
        file.write_bytes(reattached(works, **files))
        found = works.verify(file)
        assert found.content.judgement.value == word, files.keys()
        assert "good" not in words(found)


def test_data_that_give_what_the_pages_do_not_show_are_not_good(works: Works) -> None:
    """Machine file and content replaced by those of a lower setting; the pages still show the old one."""
    text = works.machine.read_text(encoding="utf-8").replace("setting: 180 bar", "setting: 170 bar")
    works.machine.write_text(text, encoding="utf-8")
    matter = pipeline.steps(pipeline.check(works.machine))
    file = works.folder / "changed.pdf"
    file.write_bytes(
        reattached(works, **{MACHINE_NAME: text.encode(), CONTENT_NAME: whole_content(matter).data})
    )
    assert words(works.verify(file)) == ("not established", "not established", "bad")


@pytest.mark.parametrize("text", [b"", b"[]", b"null", b"[" * 100_000, b'{"record_id":1}'])
def test_an_issue_of_another_form_is_wrong_input(works: Works, text: bytes) -> None:
    file = works.folder / "changed.pdf"
    file.write_bytes(reattached(works, **{ISSUE_NAME: text}))
    with pytest.raises(InputError, match="isn't of the form of one"):
        works.verify(file)


def test_a_draft_is_judged_as_one(works: Works, job: Matter) -> None:
    draft = works.folder / "draft.pdf"
    draft.write_bytes(pipeline.pack(job, Layout()))
    found = works.verify(draft)
    assert words(found) == ("not established", "good", "not established")
    assert "It is no issued pack" in told(found)
    draft.write_bytes(draft.read_bytes() + b"\n")
    assert words(works.verify(draft))[1] == "not established"


def a_pdf_of_others() -> bytes:
    out = io.BytesIO()
    with pikepdf.new() as pdf:
        pdf.add_blank_page()
        pdf.attachments["notes.txt"] = AttachedFileSpec(pdf, b"hello", filename="notes.txt")
        pdf.save(out)
    return out.getvalue()


def test_what_is_not_ours_gets_no_good_word(issued: Works, tmp_path: Path) -> None:
    file = tmp_path / "other.pdf"
    file.write_bytes(a_pdf_of_others())
    found = issued.verify(file)
    assert words(found) == ("not established", "not established", "not established")
    assert "doesn't carry what it was made from" in told(found)
    for data in (b"", b"GIF89a", b"%PDF-1.7\n%%EOF\n", issued.pack.read_bytes()[:5000]):
        file.write_bytes(data)
        with pytest.raises(InputError, match="can't be read as a PDF"):
            issued.verify(file)
    with pytest.raises(InputError, match="can't be read"):
        issued.verify(tmp_path / "nowhere.pdf")


def test_attachments_without_their_file_are_no_bug(works: Works) -> None:
    with pikepdf.open(works.pack) as pdf:
        names = pdf.Root.Names.EmbeddedFiles.Names
        names[1] = pdf.make_indirect(Dictionary(Type=Name.Filespec, F="issue.json"))
        pdf.save(works.folder / "changed.pdf")
    try:
        found = works.verify(works.folder / "changed.pdf")
    except InputError:
        return
    assert "good" not in words(found)


# --- the code on a page ----------------------------------------------------------------------------------


def codes_on(file: Path) -> set[str]:
    document = pypdfium2.PdfDocument(file)
    try:
        pictures = [document[page].render(scale=3).to_pil() for page in (0, len(document) - 1)]
    finally:
        document.close()
    return {
        code.text
        for picture in pictures
        for code in zxingcpp.read_barcodes(picture, formats=zxingcpp.BarcodeFormat.QRCode)
    }


def test_codes_of_the_pages_are_those_of_the_file(issued: Works, tmp_path: Path, root: Path) -> None:
    found = codes_on(issued.pack)
    assert len(found) == 1
    (code,) = found
    judged = issued.verify(code=code)
    assert judged.code is not None
    assert judged.code.judgement.value == "good"
    assert judged.status is ExitStatus.GOOD

    sample = root / "sample_machines" / "kiln_pusher.yaml"
    pipeline.demo(sample, tmp_path / "other", when=WHEN, random_bytes=Chance(8))
    (pasted,) = codes_on(tmp_path / "other" / "PU-03.pdf")
    judged = issued.verify(code=pasted)
    assert judged.code is not None
    assert judged.code.judgement.value == "bad"
    assert judged.status is ExitStatus.REFUSED
    (mismatch,) = judged.code.mismatches  # the same content and revision, of another record
    assert mismatch.part == "record"
    assert mismatch.scanned.strip("'") in pasted
    assert "  Code: bad\n      The code names record '" in told(judged)


@pytest.mark.parametrize(
    ("old", "new", "parts"),
    [
        ("https://records.brackwater", "https://records.breakwater", ["address"]),
        ("https://", "http://", ["address"]),
        ("?d=", "?d=0", ["content"]),
        ("v=1", "v=2", ["revision"]),
        ("v=1", "v=1&", ["revision"]),
        ("/r/", "/r/0", ["record"]),
        ("/r/", "/s/", []),
        ("https", "mailto", []),
        ("&v=1", "", []),
    ],
)
def test_a_code_that_was_altered_is_named_by_its_part(
    issued: Works, old: str, new: str, parts: list[str]
) -> None:
    (code,) = codes_on(issued.pack)
    assert code.count(old) == 1
    with pytest.MonkeyPatch.context() as patch:  # the content isn't the matter here
        patch.setattr(
            verifying,
            "judge_content",
            lambda *_, **__: verifying.ContentReport(
                judgement=verifying.Judgement.GOOD, reason="made_from_this"
            ),
        )
        report = issued.verify(code=code.replace(old, new)).code
    assert report is not None
    assert report.judgement.value == "bad"
    assert [one.part for one in report.mismatches] == parts


def test_no_code_belongs_to_a_draft(works: Works, job: Matter) -> None:
    draft = works.folder / "draft.pdf"
    draft.write_bytes(pipeline.pack(job, Layout()))
    report = works.verify(draft, code="https://records.example/r/0123456789?d=01234567&v=1").code
    assert report is not None
    assert report.judgement.value == "not established"
