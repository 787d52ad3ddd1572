"""The audit bundle: every line traced to its event, the chain's verdict and anchor, files in step."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable
from datetime import UTC, date, datetime
from pathlib import Path

import pikepdf
import pytest
from register_bench import rehash
from told_year import GITA, START, TODAY, Numbers, tell_year

from sheets import pipeline
from sheets.errors import InputError, NotEstablishedError
from sheets.pages.archive import archive_flaws
from sheets.pages.attached import Attachment, attachments_in, write_attachments
from sheets.pages.compose.audit import LONGEST_CELL, audit_document
from sheets.pages.document import Layout
from sheets.pages.layout import place as placed
from sheets.pages.placed import TextRun
from sheets.pipeline.auditing import Audited
from sheets.pipeline.listing import lists_of
from sheets.pipeline.replacing import keep_issued
from sheets.register.chain import Anchor, check_chain
from sheets.register.events import EventKind
from sheets.register.instruments import InstrumentListed
from sheets.register.jobs import jobs
from sheets.register.listing_instruments import list_instrument
from sheets.register.opening import Place
from sheets.register.store import Register

KINDS = {
    "machines": {EventKind.ISSUED, EventKind.WITHDRAWN},
    "due": {EventKind.INSPECTED, EventKind.ISSUED},
    "deviations": {EventKind.DEVIATION_NOTED},
    "work": {EventKind.JOB_OPENED, EventKind.LOCK_PUT_ON, EventKind.ZERO_READ, EventKind.TAG_POSTED},
    "inspections": {EventKind.INSPECTED},
    "revisions": {EventKind.ISSUED, EventKind.RESERVED},
    "copies": {EventKind.COPY_HUNG},
    "instruments": {EventKind.INSTRUMENT_LISTED},
    "people": {EventKind.AUTHORISED, EventKind.TRAINED, EventKind.AUTHORISATION_ENDED},
}
"""What each list's lines follow from."""


@pytest.fixture
def year(register: Register) -> Numbers:
    return tell_year(register)


@pytest.fixture
def audited(place: Place, year: Numbers, tmp_path: Path) -> Audited:
    assert year
    return pipeline.audit(place, tmp_path / "audit.pdf", day=TODAY)


def lines(audited: Audited) -> dict[str, list[tuple[str, ...]]]:
    return {one.name: list(one.rows) for one in audited.lists}


def test_every_line_names_an_event_of_its_kind(register: Register, audited: Audited) -> None:
    with register.reading() as view:
        kinds = {event.sequence: event.kind for event in view.events()}
    found = lines(audited)
    assert found.keys() == KINDS.keys()
    for name, rows in found.items():
        assert rows, name
        assert {kinds[int(row[0])] for row in rows} <= KINDS[name], name


def test_what_it_says_of_the_year(audited: Audited, year: Numbers) -> None:
    """Each line as told_year.py told it."""
    found = lines(audited)
    assert [(row[1], row[3], row[-1]) for row in found["machines"]] == [
        ("PU-03", "none", "in service; no sheet is current"),
        ("PU-07", "2", "in service"),
        ("PU-11", "1", "in service"),
    ]
    # 2026-09-14 and a year; issued 2026-02-02 and never inspected: a day is left on 2027-02-01
    assert [(row[1], row[3], row[5]) for row in found["due"]] == [
        ("PU-11", "never", "2027-02-02"),
        ("PU-07", "2026-09-14", "2027-09-14"),
    ]
    assert [row[-1] for row in found["due"]] == ["in 1 day", "in 225 days"]
    assert [(row[0], row[-1]) for row in found["deviations"]] == [(str(year.open_deviation), "OPEN")]
    assert [row[-1] for row in found["inspections"]] == [
        f"{year.open_deviation - 2} corrected; {year.open_deviation} open"
    ]
    taken = [row[-1] for row in found["copies"]]
    assert taken[0].startswith("2026-11-03 by Bram Tolliver, event ")
    assert taken[1:] == ["TAKE IT DOWN: not current", "hangs", "hangs"]
    assert [row[-1].split(",")[0] for row in found["instruments"]] == [
        "usable",
        "FOUND BAD 2026-12-01",
        "usable",
    ]
    # Bram's authorisation ended on 2026-11-30; his training counts
    assert [(row[1], row[2], row[3]) for row in found["people"]] == [
        ("Ada Quarrow", "authorised", "lockout"),
        ("Ada Quarrow", "authorised", "setting under power"),
        ("Ada Quarrow", "trained", "lockout"),
        ("Bram Tolliver", "trained", "lockout"),
        ("Edda Fenn", "authorised", "inspection"),
    ]


def test_work_that_stands_is_listed_by_machine(register: Register, audited: Audited, year: Numbers) -> None:
    rows = lines(audited)["work"]
    assert str(year.zero) in {row[0] for row in rows if row[2] == "zero read"}
    with register.reading() as view:
        opened = {str(one.number) for one in jobs(view) if one.open}
    assert {row[0] for row in rows if row[2] == "open job"} == opened


def test_who_was_not_included_stands_in_the_list(place: Place, register: Register, year: Numbers) -> None:
    """Bram Tolliver read PU-07 on 2026-03-09, within the year before this inspection."""
    assert year
    pipeline.inspect(
        place,
        document="WI-0142",
        record_id=None,
        inspector="Edda Fenn",
        employees=("Ada Quarrow",),
        on=date(2027, 1, 20),
        deviations=(),
        corrections=(),
        by="Edda Fenn",
        today=TODAY,
        when=datetime(2027, 1, 31, 12, tzinfo=UTC),
    )
    with register.reading() as view:
        (rows,) = (one.rows for one in lists_of(view, TODAY) if one.name == "inspections")
    assert rows[-1][6] == "Ada Quarrow; used it and weren't included: Bram Tolliver"
    assert "included:" not in rows[0][6]


def test_later_something_is_overdue(register: Register, year: Numbers) -> None:
    assert year
    with register.reading() as view:
        found = {one.name: one.rows for one in lists_of(view, date(2027, 4, 1))}
    assert (
        found["due"][0][-1] == "OVERDUE by 58 days"
    )  # February has 26 days left after the 2nd, March 31, April 1
    assert [row[-1] for row in found["instruments"]] == [
        "usable",
        "FOUND BAD 2026-12-01, event 35",
        "OVERDUE",
    ]


def test_pdf_and_files_say_the_same(audited: Audited) -> None:
    target, *files = audited.files
    data = target.read_bytes()
    assert archive_flaws(data) == ()
    held = attachments_in(data)
    assert {file.name.removeprefix("audit-"): file.read_bytes() for file in files} == held
    for one in audited.lists:
        head, *rows = csv.reader(io.StringIO(held[f"{one.name}.csv"].decode(), newline=""))
        assert (tuple(head), [tuple(row) for row in rows]) == (one.head, list(one.rows))


def test_the_same_day_gives_the_same_bytes(place: Place, audited: Audited, tmp_path: Path) -> None:
    again = pipeline.audit(place, tmp_path / "again.pdf", day=TODAY)
    assert again.files[0].read_bytes() == audited.files[0].read_bytes()
    assert again.digest == audited.digest


def printed(register: Register, layout: Layout) -> str:
    """All words on the pages of the lists of a register."""
    with register.reading() as view:
        document = audit_document(
            register="a register", day=TODAY, engine="1", facts=(), notes=(), lists=lists_of(view, TODAY)
        )
    pages = placed(document, layout, digest="0123456789ABCDEF")
    return " ".join(item.text for page in pages for item in page.items if isinstance(item, TextRun))


def test_anything_that_was_told_can_be_printed(register: Register, year: Numbers) -> None:
    """Signs without a glyph stand as their code; a long text is cut on paper, and says so."""
    assert year
    said = InstrumentListed(
        serial="王 <b>=1+1</b>",
        what="dial gauge " + "very long " * 100 + "end",
        range_end="400",
        unit="bar",
        largest_error="4",
        certificate="C" * 190,
        due=TODAY,
    )
    list_instrument(register, said, by=GITA, when=START)
    words = printed(register, Layout())
    assert "[U+738B]" in words
    assert "<b>=1+1</b>" in words.replace(" ", "")
    assert "end" not in words.split("very long")[-1].split("400")[0]
    assert "The CSV files hold it whole".lower() in words.lower()
    assert len(said.what) > LONGEST_CELL


def test_a_spreadsheet_computes_nothing(place: Place, register: Register, tmp_path: Path) -> None:
    said = InstrumentListed(
        serial="=1+1",
        what='@sum "a", b',
        range_end="400",
        unit="bar",
        largest_error="4",
        certificate="-3",
        due=TODAY,
    )
    list_instrument(register, said, by=GITA, when=START)
    pipeline.audit(place, tmp_path / "audit.pdf", day=TODAY)
    text = (tmp_path / "audit-instruments.csv").read_text(encoding="utf-8")
    (_, row) = csv.reader(io.StringIO(text, newline=""))
    assert (row[1], row[3], row[6]) == ("'=1+1", '\'@sum "a", b', "'-3")


def test_an_empty_list_is_an_answer(register: Register) -> None:
    words = printed(register, Layout(paper="Letter"))
    assert "Instruments: none is listed." in words
    assert "Deviations: none is open or accepted." in words


def test_a_register_written_anew_gives_no_bundle(
    place: Place, register: Register, year: Numbers, tmp_path: Path, meddle: Callable[..., None]
) -> None:
    assert year
    last = check_chain(register).last
    good = pipeline.audit(place, tmp_path / "good.pdf", day=TODAY, anchors=(str(last),))
    assert good.anchor == last
    meddle("UPDATE events SET who = 'Bram Tolliver' WHERE sequence = 12")
    target = tmp_path / "bad.pdf"
    with pytest.raises(NotEstablishedError, match="event 12"):
        pipeline.audit(place, target, day=TODAY)
    rehash(place, 12)  # the administrator writes every hash anew: only the anchor from outside shows it
    with pytest.raises(NotEstablishedError, match=f"event {last.sequence if last else 0}"):
        pipeline.audit(place, target, day=TODAY, anchors=(str(last),))
    assert not target.exists()
    assert list(tmp_path.glob("bad*")) == []


def test_anchors_are_read_as_printed_in_groups(place: Place, audited: Audited, tmp_path: Path) -> None:
    number, hash_ = str(audited.anchor).split(":")
    grouped = f"{number}: {hash_[:8]} {hash_[8:40]}\n{hash_[40:]}"
    assert Anchor.read(grouped) == audited.anchor
    pipeline.audit(place, tmp_path / "again.pdf", day=TODAY, anchors=(grouped,))
    with pytest.raises(InputError):
        Anchor.read(grouped[:-1])


def test_nothing_is_written_over_another_file(place: Place, year: Numbers, tmp_path: Path) -> None:
    assert year
    (tmp_path / "audit.pdf").write_text("a letter")
    with pytest.raises(InputError, match="isn't a PDF"):
        pipeline.audit(place, tmp_path / "audit.pdf", day=TODAY)
    assert [file.name for file in tmp_path.glob("audit*")] == ["audit.pdf"]


def pdf_with(target: Path, *names: str) -> bytes:
    """A PDF in which files of those names travel."""
    with pikepdf.new() as pdf:
        pdf.add_blank_page()
        files = [
            Attachment(name=name, media_type="text/csv", data=b"a", relationship="Data", description=name)
            for name in names
        ]
        write_attachments(pdf, files)
        pdf.save(target)
    return target.read_bytes()


@pytest.mark.parametrize(
    ("names", "told"), [(("issue.json",), "An issued pack stands there"), ((), "A PDF that is no audit")]
)
def test_an_audit_replaces_no_other_pdf(
    place: Place, year: Numbers, tmp_path: Path, names: tuple[str, ...], told: str
) -> None:
    assert year
    target = tmp_path / "audit.pdf"
    held = pdf_with(target, *names)
    with pytest.raises(InputError, match=told):
        pipeline.audit(place, target, day=TODAY)
    assert target.read_bytes() == held
    assert [file.name for file in tmp_path.glob("audit*")] == ["audit.pdf"]


def test_an_audit_replaces_an_audit_and_nobody_s_list(place: Place, audited: Audited, tmp_path: Path) -> None:
    pipeline.audit(place, tmp_path / "audit.pdf", day=TODAY)
    own = tmp_path / "audit-people.csv"
    own.write_text("name,telephone\n", encoding="utf-8")
    with pytest.raises(InputError, match="isn't this list of an audit"):
        pipeline.audit(place, audited.files[0], day=TODAY)
    assert own.read_text(encoding="utf-8") == "name,telephone\n"


def test_what_is_printed_replaces_no_audit(audited: Audited) -> None:
    with pytest.raises(InputError, match="An audit of the register stands there"):
        keep_issued(audited.files[0])
