"""Issuing: what is refused before a number is given out, what breaks off after, and what comes next."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest
from works import ADA, CLEO, LATER, PASSPHRASE, WHEN, Chance, Works, words

from sheets import pipeline
from sheets.errors import InputError, JamnutError, RefusedError
from sheets.machine import files
from sheets.pages.compose.matter import Matter
from sheets.pipeline import issuing
from sheets.pipeline.persons import Signing
from sheets.register.revisions import RevisionState
from sheets.seal import keys as seal_keys

COMPUTED = ("      setting: 180 bar\n      given by: machine manual, sheet 2\n", "")


def edited(works: Works, *replacements: tuple[str, str], file: str = "machine") -> Matter:
    """The job anew, after an edit of one of its files."""
    path: Path = getattr(works, file)
    text = path.read_text(encoding="utf-8")
    for old, new in replacements:
        assert text.count(old) == 1
        text = text.replace(old, new)
    path.write_text(text, encoding="utf-8")
    return pipeline.steps(pipeline.check(works.machine))


def walked_again(works: Works) -> Matter:
    """The walk-down of a changed machine file, answered without an acceptance."""
    described = pipeline.check(works.machine)
    answers = pipeline.Answers(today=WHEN.date(), on="", by=ADA, rest_agrees=True)
    pipeline.write_walkdown(works.machine, described, answers)
    return pipeline.steps(pipeline.check(works.machine))


def no_walkdown(works: Works) -> Matter:
    (works.folder / "kiln_pusher.walkdown.yaml").unlink()
    return pipeline.steps(pipeline.check(works.machine))


def void_walkdown(works: Works) -> Matter:
    return edited(works, ("displacement: 32 cm3/rev", "displacement: 33 cm3/rev"))


def proposal(works: Works) -> Matter:
    edited(works, COMPUTED)
    return walked_again(works)


def refused_job(works: Works) -> Matter:
    edited(works, ("    range: 250 bar", "    range: 160 bar"))
    return walked_again(works)


def no_site(works: Works) -> Matter:
    works.site.unlink()
    return pipeline.steps(pipeline.check(works.machine))


def no_address(works: Works) -> Matter:
    return edited(works, ("record address: https://records.brackwater.example\n", ""), file="site")


def unknown_zone(works: Works) -> Matter:
    return edited(works, ("format: 1\n", "format: 1\nzone: Europe/Atlantis\n"), file="site")


def folder_of_zones(works: Works) -> Matter:
    return edited(works, ("format: 1\n", "format: 1\nzone: Europe\n"), file="site")


def trusts_nobody(works: Works) -> Matter:
    return edited(works, ("  trust: [keys/authority.pem]\n", ""), file="site")


@pytest.mark.parametrize(
    ("change", "says"),
    [
        (no_walkdown, "Nobody has compared the machine file"),
        (void_walkdown, "PU1"),
        (proposal, "RV1"),
        (refused_job, "RV1.*gauge|gauge.*range"),
        (no_site, "record address"),
        (no_address, "record address"),
        (unknown_zone, "'Europe/Atlantis' isn't known"),
        (folder_of_zones, "'Europe' isn't known"),
        (trusts_nobody, "no such authority"),
    ],
)
def test_what_the_files_lack_is_refused_before_a_number_is_given_out(
    works: Works, change: Callable[[Works], Matter], says: str
) -> None:
    matter = change(works)
    before = works.files()
    with pytest.raises(JamnutError, match=says):
        works.issue(matter)
    assert works.files() == before
    assert len(works.revisions()) == 1


def made_key(works: Works, name: str, person: str, **other: object) -> str:
    """A key by the works' own authority, beside the others."""
    authority = seal_keys.open_key((works.folder / "keys" / "authority.p12").read_bytes(), PASSPHRASE)
    validity = seal_keys.Validity(start=WHEN, end=WHEN + timedelta(days=other.pop("days", 90)))  # type: ignore[arg-type]  # a number
    made = seal_keys.make_signer(authority, person, validity=validity, serial=77, passphrase=PASSPHRASE)
    (works.folder / "keys" / f"{name}.p12").write_bytes(made.p12)
    return name


@pytest.mark.parametrize(
    ("people", "says"),
    [
        ({"prepared": None, "checked": None, "approved": None}, "Nobody is named for it"),
        ({"checked": None}, "signature checked: Nobody is named"),
        ({"checked": "   "}, "signature checked: Nobody is named"),
        ({"approved": "ada-quarrow"}, "one person by name"),
        ({"approved": "ADA  Quarrow"}, "one person by name"),
        ({"checked": CLEO, "approved": "cleo-harnett"}, "one person by name"),
        ({"prepared": ADA}, "first signature needs a key"),
        ({"prepared": "nobody"}, "first signature needs a key"),
    ],
)
def test_persons_who_do_not_serve_are_refused(
    works: Works, job: Matter, people: dict[str, str | None], says: str
) -> None:
    before = works.files()
    with pytest.raises(RefusedError, match=says):
        works.issue(job, **people)
    assert works.files() == before


def test_one_key_under_two_names_is_one_person(
    works: Works, job: Matter, monkeypatch: pytest.MonkeyPatch
) -> None:
    private = seal_keys._new_key(seal_keys.KeyKind.ECDSA_P256)
    monkeypatch.setattr(seal_keys, "_new_key", lambda _: private)
    one, other = made_key(works, "one", "Dora Vell"), made_key(works, "other", "Edwin Marsh")
    before = works.files()
    with pytest.raises(RefusedError, match="one person by key"):
        works.issue(job, prepared=one, approved=other)
    assert works.files() == before


def test_keys_that_do_not_open_or_hold_are_refused(works: Works, job: Matter, tmp_path: Path) -> None:
    old = made_key(works, "old", "Dora Vell", days=0.01)
    before = works.files()
    with pytest.raises(InputError, match="the passphrase is wrong"):
        works.issue(job, passphrase=lambda _: "lapped spool sleeve")
    with pytest.raises(RefusedError, match=r"certificate of 'Dora Vell' holds from .* to 2026-12-01"):
        works.issue(job, checked=old)
    with pytest.raises(InputError, match="can't be read"):
        works.issue(job, signings=[Signing(meaning="prepared", key=tmp_path / "none.p12")])
    assert works.files() == before


def test_a_key_of_another_authority_is_refused(works: Works, job: Matter, tmp_path: Path) -> None:
    (tmp_path / "far").mkdir()
    pipeline.keys(
        tmp_path / "far",
        authority_name="Far authority",
        persons=[ADA],
        passphrase=lambda _: PASSPHRASE,
        when=WHEN,
        random_bytes=Chance(9),
    )
    before = works.files()
    foreign = Signing(meaning="prepared", key=tmp_path / "far" / "ada-quarrow.p12")
    others = [works.signing(meaning, None) for meaning in ("checked", "approved")]
    with pytest.raises(RefusedError, match=r"signature prepared: .*Far authority"):
        works.issue(job, signings=[foreign, *others])
    assert works.files() == before


def test_a_target_that_is_no_pdf_stays(works: Works, job: Matter) -> None:
    target = works.folder / "notes.pdf"
    target.write_text("phone the planner", encoding="utf-8")
    before = works.files()
    with pytest.raises(InputError, match="isn't a PDF file"):
        works.issue(job, target)
    with pytest.raises(InputError, match="folder isn't there"):
        works.issue(job, works.folder / "nowhere" / "pack.pdf")
    assert works.files() == before
    assert len(works.revisions()) == 1


def test_an_issued_pack_is_never_overwritten(works: Works, job: Matter) -> None:
    before = works.files()
    with pytest.raises(InputError, match="An issued pack stands there"):
        works.issue(job, works.pack)
    assert works.files() == before
    assert len(works.revisions()) == 1


def test_a_folder_that_takes_no_file_is_told_before_a_number_is_given_out(works: Works, job: Matter) -> None:
    target = works.folder / "again.pdf"
    (works.folder / ".again.pdf.probe").mkdir()  # whoever runs the tests may write into any folder
    with pytest.raises(InputError, match="can't be written"):
        works.issue(job, target)
    assert len(works.revisions()) == 1
    assert not target.exists()


def test_who_stops_it_hears_that_a_number_is_used(
    works: Works, job: Matter, monkeypatch: pytest.MonkeyPatch
) -> None:
    def stop(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(issuing, "printed", stop)
    with pytest.raises(KeyboardInterrupt) as caught:
        works.issue(job)
    (note,) = caught.value.__notes__
    assert note == "revision 2 of WI-0139 was given out, and is void; its number isn't used again"


def test_a_register_that_is_missing_is_made_and_another_machine_s_document_refused(
    works: Works, job: Matter
) -> None:
    made = works.issue(job, register_at=works.folder / "new.db")
    assert (made.revision, made.waiting) == ("1", ())
    other = replace(job, machine=job.machine.model_copy(update={"tag": "PU-99"}))
    before = works.files()
    with pytest.raises(RefusedError, match="of machine 'PU-03', not of 'PU-99'"):
        works.issue(other)
    assert works.files() == before


# --- what breaks off -------------------------------------------------------------------------------------


def fail(*_: object, **__: object) -> None:
    raise RuntimeError("the lamp went out")


def full(*_: object, **__: object) -> None:
    raise OSError(28, "No space left on device")


@pytest.mark.parametrize(
    ("where", "how", "reason"),
    [
        ((issuing, "printed"), fail, "broken off by RuntimeError"),
        ((issuing, "sign_field"), fail, "broken off by RuntimeError"),
        ((Path, "write_bytes"), full, "No space left on device"),
        ((issuing, "sign_event"), fail, "broken off by RuntimeError"),
        ((issuing, "commit"), fail, "broken off by RuntimeError"),
    ],
    ids=["printing", "signing", "writing", "telling", "committing"],
)
def test_what_breaks_off_leaves_a_void_revision_and_no_file(
    works: Works,
    job: Matter,
    monkeypatch: pytest.MonkeyPatch,
    where: tuple[object, str],
    how: Callable[..., None],
    reason: str,
) -> None:
    """The pack that stood under that name, revision 1, stays as it was."""
    before = works.pack.read_bytes()
    with monkeypatch.context() as patch:
        patch.setattr(*where, how)
        with pytest.raises((RuntimeError, InputError)):
            works.issue(job)
    broken = works.revisions()[1]
    assert broken.state is RevisionState.VOID
    assert reason in broken.reason
    assert works.pack.read_bytes() == before
    assert [name for name in works.files() if name.endswith((".part", ".pdf"))] == ["PU-03.pdf"]
    assert works.revisions()[0].state is RevisionState.ISSUED

    made = works.issue(job)
    assert made.revision == "3"
    assert words(works.verify()) == ("good", "good", "good")


def test_a_file_that_cannot_come_into_its_place_after_the_register_has_it_is_kept(
    works: Works, job: Matter, monkeypatch: pytest.MonkeyPatch
) -> None:
    with monkeypatch.context() as patch:
        patch.setattr(Path, "replace", full)
        with pytest.raises(
            InputError, match=r"The register has it already, and it stands as .*\.PU-03\.pdf\.part"
        ):
            works.issue(job)
    assert works.revisions()[1].state is RevisionState.ISSUED
    made = works.sign("approved")  # goes on from there
    assert (made.revision, made.waiting) == ("2", ())
    assert words(works.verify()) == ("good", "good", "good")
    assert not files.aside_of(works.pack).exists()


KILLED = """
import os, signal, sys
from pathlib import Path
sys.path[:0] = sys.argv[2].split(os.pathsep)
from works import Works
from sheets import pipeline
from sheets.pipeline import issuing

works = Works(Path(sys.argv[1]))
def killed(*_, **__):
    os.kill(os.getpid(), signal.SIGKILL)
setattr(issuing, sys.argv[3], killed)
works.issue(pipeline.steps(pipeline.check(works.machine)), works.folder / "second.pdf")
"""


@pytest.mark.parametrize("at", ["sign_field", "commit"])
def test_a_killed_issue_leaves_a_readable_register_and_the_next_one_makes_it_void(
    works: Works, job: Matter, root: Path, at: str
) -> None:
    path = os.pathsep.join((str(root), str(Path(__file__).parent)))
    done = subprocess.run(
        [sys.executable, "-c", KILLED, str(works.folder), path, at], check=False, capture_output=True
    )
    assert done.returncode == -signal.SIGKILL, done.stderr.decode()
    assert [one.state for one in works.revisions()] == [RevisionState.ISSUED, RevisionState.RESERVED]
    assert not (works.folder / "second.pdf").exists()
    assert words(works.verify()) == ("good", "good", "good")  # revision 1 is still the current one

    made = works.issue(job, works.folder / "second.pdf", random_bytes=Chance(3))
    assert made.revision == "3"
    states = [one.state for one in works.revisions()]
    assert states == [RevisionState.SUPERSEDED, RevisionState.VOID, RevisionState.ISSUED]
    assert works.revisions()[1].reason == "reserved and not committed"
    assert not files.aside_of(works.folder / "second.pdf").exists()


# --- what comes out --------------------------------------------------------------------------------------


def test_a_site_that_needs_two_signatures_gets_along_with_two(works: Works) -> None:
    """Who checks need not be named then; with two named, nothing waits for a third."""
    matter = edited(
        works, ("needed: [prepared, checked, approved]", "needed: [prepared, approved]"), file="site"
    )
    made = works.issue(matter, checked=None)
    assert made.waiting == ()
    assert words(works.verify()) == ("good", "good", "good")


def test_a_passphrase_is_asked_for_once_a_key(works: Works, job: Matter) -> None:
    asked: list[str] = []

    def ask(key: Path) -> str:
        asked.append(key.stem)
        return PASSPHRASE

    works.issue(job, passphrase=ask)
    assert asked == ["ada-quarrow", "bram-tolliver", "cleo-harnett"]


def test_a_demonstration_is_made_under_any_clock(root: Path, tmp_path: Path) -> None:
    """The sample is dated in November 2026."""
    early = WHEN - timedelta(days=1500)
    sample = root / "sample_machines" / "kiln_pusher.yaml"
    pipeline.demo(sample, tmp_path / "early", when=early, random_bytes=Chance(1))
    found = Works(tmp_path / "early").verify(now=early + timedelta(days=1))
    assert words(found) == ("good", "good", "good")
    with pytest.raises(InputError, match="It is there already"):
        pipeline.demo(sample, tmp_path / "early", when=early, random_bytes=Chance(1))


def test_names_of_key_files(tmp_path: Path) -> None:
    def make(*persons: str) -> None:
        pipeline.keys(
            tmp_path,
            authority_name="Authority",
            persons=persons,
            passphrase=lambda key: f"for {key.stem} alone",
            when=LATER,
            random_bytes=Chance(4),
        )

    for persons, says in (
        (("Authority",), "authority has that name"),
        ((" .",), "no letter"),
        (("Bo Ek", "bo ek"), "share a file name"),
    ):
        with pytest.raises(InputError, match=says):
            make(*persons)
    assert list(tmp_path.iterdir()) == []

    make("Bo Ek")
    made = {path.name: path.read_bytes() for path in tmp_path.iterdir()}
    assert set(made) == {"authority.p12", "authority.pem", "bo-ek.p12"}
    assert seal_keys.open_key(made["bo-ek.p12"], "for bo-ek alone")
    if os.name == "posix":
        assert {(tmp_path / name).stat().st_mode & 0o077 for name in made if name.endswith(".p12")} == {0}
    with pytest.raises(InputError, match="there already"):
        make("Bo Ek")
    make("Una Lind")  # the authority that is there vouches for her
    assert {path.name for path in tmp_path.iterdir()} == {*made, "una-lind.p12"}
    assert (tmp_path / "authority.p12").read_bytes() == made["authority.p12"]


@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_other_samples_and_papers_are_issued_and_good(root: Path, tmp_path: Path, paper: str) -> None:
    """The two samples that the other tests leave out, each on one paper."""
    name = {"A4": "clay_mixer", "Letter": "glaze_press"}[paper]
    sample = root / "sample_machines" / f"{name}.yaml"
    made = pipeline.demo(sample, tmp_path / "works", when=WHEN, random_bytes=Chance(1))
    works = Works(tmp_path / "works")
    file = made.issued.file
    if paper == "Letter":
        matter = pipeline.steps(pipeline.check(works.folder / sample.name))
        file = works.folder / "letter.pdf"
        fresh = works.folder / "letter.db"  # the paper alone makes no revision
        works.issue(matter, file, layout=pipeline.layout_named("Letter"), register_at=fresh)
        assert words(works.verify(file, register_at=fresh)) == ("good", "good", "good")
        return
    assert words(works.verify(file)) == ("good", "good", "good")


def test_a_draft_never_takes_the_place_of_an_issued_pack(works: Works, job: Matter) -> None:
    before = works.pack.read_bytes()
    with pytest.raises(InputError, match="issued pack stands there"):
        pipeline.write_pack(job, works.pack, paper="A4", only=())
    assert works.pack.read_bytes() == before
