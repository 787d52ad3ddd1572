"""Signing step by step: one after the other, each in turn, and only what the register knows."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path

import pikepdf
import pytest
from works import ADA, BRAM, CLEO, LATER, Works, told, words

from sheets import pipeline
from sheets.errors import InputError, JamnutError, RefusedError
from sheets.machine.files import aside_of
from sheets.pages.document import Layout
from sheets.pipeline import signing
from sheets.register.revisions import RevisionState
from sheets.seal.signatures_report import Cause


def test_one_after_the_other_until_it_is_issued(waiting: Works) -> None:
    found = waiting.verify()
    assert words(found) == ("not established", "good", "bad")
    assert {reason.cause for reason in found.signatures.reasons} == {Cause.MISSING}
    assert "reserved and not issued; the current one is revision 1" in told(found)

    made = waiting.sign("checked")
    assert made.waiting == ("approved",)
    assert "not issued yet; still to sign: approved" in list(pipeline.issued_text(made))
    assert waiting.revisions()[1].state is RevisionState.RESERVED
    assert words(waiting.verify()) == ("not established", "good", "bad")

    made = waiting.sign("approved")
    assert (made.waiting, made.revision) == ((), "2")
    assert "issued" in list(pipeline.issued_text(made))
    assert [one.state for one in waiting.revisions()] == [RevisionState.SUPERSEDED, RevisionState.ISSUED]
    found = waiting.verify()
    assert words(found) == ("good", "good", "good")
    assert [one.person for one in found.signatures.signatures] == [ADA, BRAM, CLEO]


@pytest.mark.parametrize(
    ("meaning", "who", "says"),
    [
        ("checked", "cleo-harnett", f"The pack names '{BRAM}' for it, not '{CLEO}'"),
        ("approved", "bram-tolliver", f"The pack names '{CLEO}' for it, not '{BRAM}'"),
        ("approved", "ada-quarrow", f"The pack names '{CLEO}' for it, not '{ADA}'"),
        ("approved", "cleo-harnett", "it isn't signed as checked yet"),
    ],
)
def test_the_wrong_person_the_wrong_turn_and_the_wrong_meaning(
    waiting: Works, meaning: str, who: str, says: str
) -> None:
    before = waiting.files()
    with pytest.raises(RefusedError, match=says):
        waiting.sign(meaning, who)
    assert waiting.files() == before


def test_what_is_signed_is_not_signed_again(waiting: Works) -> None:
    """The last signature given once more changes nothing; an earlier one is refused."""
    waiting.sign("checked")
    before = waiting.pack.read_bytes(), len(waiting.revisions()[1].signatures)
    assert waiting.sign("checked").waiting == ("approved",)
    with pytest.raises(RefusedError, match="It is signed as prepared already"):
        waiting.sign("prepared")
    assert before == (waiting.pack.read_bytes(), len(waiting.revisions()[1].signatures))


def test_a_namesake_whom_the_site_does_not_trust_signs_nothing(waiting: Works, tmp_path: Path) -> None:
    """Another authority may call anybody Bram Tolliver."""
    sample = waiting.machine
    pipeline.demo(sample, tmp_path / "far", when=LATER, random_bytes=lambda length: bytes(range(length)))
    shutil.copy(tmp_path / "far" / "keys" / "bram-tolliver.p12", waiting.key("bram-tolliver"))
    before = waiting.files()
    with pytest.raises(RefusedError, match=r"checked: The certificate of Bram Tolliver .*no such authority"):
        waiting.sign("checked")
    assert waiting.files() == before


# --- a file that was altered in between ------------------------------------------------------------------


def rewritten(works: Works, change: Callable[[pikepdf.Pdf], None]) -> bytes:
    with pikepdf.open(works.pack) as pdf:
        change(pdf)
        pdf.save(works.folder / "changed.pdf")
    return (works.folder / "changed.pdf").read_bytes()


def pages_swapped(works: Works) -> bytes:
    return rewritten(works, lambda pdf: pdf.pages.reverse())


def attachment_swapped(works: Works) -> bytes:
    def swap(pdf: pikepdf.Pdf) -> None:
        held = pdf.attachments["machine.yaml"].get_file()
        text = held.read_bytes().replace(b"180 bar", b"200 bar")
        del pdf.attachments["machine.yaml"]
        pdf.attachments["machine.yaml"] = pikepdf.AttachedFileSpec(pdf, text, filename="machine.yaml")

    return rewritten(works, swap)


def bytes_appended(works: Works) -> bytes:
    return works.pack.read_bytes() + b"\n% seen by nobody\n"


def one_byte(works: Works) -> bytes:
    data = bytearray(works.pack.read_bytes())
    data[len(data) // 3] ^= 1
    return bytes(data)


def older_copy(works: Works) -> bytes:
    """The pack before its last signature."""
    data = works.pack.read_bytes()
    works.sign("checked")
    return data


@pytest.mark.parametrize(
    ("alter", "meaning"),
    [
        (pages_swapped, "checked"),
        (attachment_swapped, "checked"),
        (bytes_appended, "checked"),
        (one_byte, "checked"),
        (older_copy, "approved"),
    ],
)
def test_a_file_that_was_altered_in_between_is_not_signed(
    waiting: Works, alter: Callable[[Works], bytes], meaning: str
) -> None:
    waiting.pack.write_bytes(alter(waiting))
    before = waiting.files()
    with pytest.raises(RefusedError, match="changed since it was signed last, or it is an older copy"):
        waiting.sign(meaning)
    assert waiting.files() == before


def test_what_the_register_knows_is_still_made_again(waiting: Works, monkeypatch: pytest.MonkeyPatch) -> None:
    """Somebody who can write both file and register is met by the engine."""
    monkeypatch.setattr(signing, "_check_known", lambda *_: None)
    for alter in (pages_swapped, attachment_swapped, bytes_appended):
        kept = waiting.pack.read_bytes()
        waiting.pack.write_bytes(alter(waiting))
        with pytest.raises(JamnutError, match=r"made again|after the end of"):
            waiting.sign("checked")
        waiting.pack.write_bytes(kept)


def test_what_is_no_issued_pack_is_not_signed(waiting: Works) -> None:
    matter = pipeline.steps(pipeline.check(waiting.machine))
    for data, says in (
        (pipeline.pack(matter, Layout()), "carries no issue"),
        (b"GIF89a", "can't be read as a PDF"),
    ):
        waiting.pack.write_bytes(data)
        with pytest.raises(InputError, match=says):
            waiting.sign("checked")
        with pytest.raises(InputError, match=says):
            pipeline.reject(waiting.pack, register_at=waiting.register, by=BRAM, reason="no", when=LATER)
    waiting.pack.unlink()
    with pytest.raises(InputError, match="can't be read"):
        waiting.sign("checked")


# --- rejecting -------------------------------------------------------------------------------------------


def test_a_rejected_pack_ends_there(waiting: Works) -> None:
    waiting.sign("checked")
    ended = pipeline.reject(
        waiting.pack, register_at=waiting.register, by=CLEO, reason="plate of RV1 is another", when=LATER
    )
    assert (ended.number, ended.state, ended.ended_by) == (2, RevisionState.REJECTED, CLEO)
    found = waiting.verify()
    assert words(found) == ("not established", "good", "bad")
    assert "rejected, for “plate of RV1 is another”; the current one is revision 1" in told(found)
    before = waiting.files()
    for meaning in ("checked", "approved"):
        with pytest.raises(RefusedError, match="It is rejected, for 'plate of RV1 is another'"):
            waiting.sign(meaning)
    assert waiting.files() == before


def test_an_issued_pack_is_neither_rejected_nor_signed(works: Works) -> None:
    before = works.files()
    with pytest.raises(RefusedError, match="It is issued"):
        pipeline.reject(works.pack, register_at=works.register, by=BRAM, reason="late", when=LATER)
    with pytest.raises(RefusedError, match="It is issued; nobody signs it any more"):
        works.sign("checked")
    assert works.files() == before


# --- what breaks off -------------------------------------------------------------------------------------


def lamp(*_: object, **__: object) -> None:
    raise KeyboardInterrupt


def full(*_: object, **__: object) -> None:
    raise OSError(28, "No space left on device")


def broken_at(works: Works, patch: pytest.MonkeyPatch, meaning: str, where: object, name: str) -> None:
    how = full if where is Path else lamp
    with patch.context() as inner:
        inner.setattr(where, name, how)
        with pytest.raises((KeyboardInterrupt, InputError)):
            works.sign(meaning)


def test_a_signature_that_the_register_did_not_hear_of_is_gone(
    waiting: Works, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = waiting.files()
    for where, name in ((Path, "write_bytes"), (signing, "tell_signed")):
        broken_at(waiting, monkeypatch, "checked", where, name)
        assert waiting.files() == before
    assert waiting.sign("checked").waiting == ("approved",)


@pytest.mark.parametrize("meaning", ["checked", "approved"])
def test_a_signature_that_did_not_come_into_its_place_is_taken_up(
    waiting: Works, monkeypatch: pytest.MonkeyPatch, meaning: str
) -> None:
    """The disk was full, or the folder shut, just when the register had been told."""
    if meaning == "approved":
        waiting.sign("checked")
    broken_at(waiting, monkeypatch, meaning, Path, "replace")
    assert aside_of(waiting.pack).exists()
    made = waiting.sign(meaning)
    assert made.waiting == (("approved",) if meaning == "checked" else ())
    assert not aside_of(waiting.pack).exists()
    if meaning == "checked":
        waiting.sign("approved")
    assert words(waiting.verify()) == ("good", "good", "good")
    assert [one.meaning for one in waiting.revisions()[1].signatures] == ["prepared", "checked", "approved"]


def test_the_next_person_takes_up_what_the_last_one_left(
    waiting: Works, monkeypatch: pytest.MonkeyPatch
) -> None:
    broken_at(waiting, monkeypatch, "checked", Path, "replace")
    assert waiting.sign("approved").waiting == ()
    assert words(waiting.verify()) == ("good", "good", "good")


def test_a_last_signature_that_was_not_committed_is_committed(
    waiting: Works, monkeypatch: pytest.MonkeyPatch
) -> None:
    waiting.sign("checked")
    broken_at(waiting, monkeypatch, "approved", signing, "commit_pack")
    assert waiting.revisions()[1].state is RevisionState.RESERVED
    assert waiting.sign("approved").waiting == ()
    assert words(waiting.verify()) == ("good", "good", "good")


def test_what_lies_aside_and_nobody_was_told_of_is_passed_over(waiting: Works) -> None:
    for left in (b"%PDF-1.7 half", b"", bytes_appended(waiting)):
        aside_of(waiting.pack).write_bytes(left)
        with pytest.raises(RefusedError, match="isn't signed as checked yet"):
            waiting.sign("approved")
    assert waiting.sign("checked").waiting == ("approved",)
    assert not aside_of(waiting.pack).exists()
