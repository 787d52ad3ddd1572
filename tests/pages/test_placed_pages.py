"""First ring: rules on placed pages, before a PDF is written."""

from __future__ import annotations

from dataclasses import replace

import pytest
from rules import broken
from sample_document import (
    BLANK,
    COVER,
    DIGEST,
    HOT,
    INJECTION,
    ISSUE,
    LOCKOUT,
    LONG_NAME,
    LONG_RUN,
    PANEL,
    RELIEF,
    SAMPLE,
    TAGS,
)

from sheets.errors import InputError
from sheets.pages.document import (
    Document,
    Heading,
    Hold,
    IssueContext,
    Layout,
    Paragraph,
    Section,
    SheetKind,
    Step,
    Steps,
    Table,
    TagSheet,
)
from sheets.pages.layout import place
from sheets.pages.placed import PlacedPage

PAPERS = ("A4", "Letter")
CONTEXTS = (None, ISSUE)


def placed(
    document: Document, paper: str = "A4", issue: IssueContext | None = None
) -> tuple[PlacedPage, ...]:
    return place(document, Layout(paper=paper), issue, digest=DIGEST)  # type: ignore[arg-type]  # a literal


def of(*sections: Section) -> Document:
    return replace(SAMPLE, sections=sections)


@pytest.mark.parametrize("issue", CONTEXTS, ids=("draft", "issued"))
@pytest.mark.parametrize("paper", PAPERS)
def test_every_rule_holds_on_the_sample(paper: str, issue: IssueContext | None) -> None:
    assert broken(placed(SAMPLE, paper, issue), SAMPLE, draft=issue is None) == []


@pytest.mark.parametrize("count", range(1, 30, 3))
@pytest.mark.parametrize("paper", PAPERS)
def test_rules_hold_wherever_the_page_ends(paper: str, count: int) -> None:
    """Filler of any length before a heading, steps, a hold and a table: the break moves on."""
    filler = tuple(Paragraph(text=f"Line {index} of the filler.") for index in range(count))
    steps = tuple(
        Step(
            number=str(number),
            order=f"Close hand valve HV{number}.",
            lines=("Else the cylinder moves.",) * (number % 3),
            warnings=(HOT,) * (number % 2),
            hold=Hold(word="HOLD", order="A second person looks.", reason="It shows nowhere.")
            if number == 3
            else None,
        )
        for number in range(1, 7)
    )
    table = Table(
        title=f"Slips {count}",
        head=("step", "slip"),
        shares=(0.3, 0.7),
        rows=tuple((str(i), "x" * i) for i in range(9)),
    )
    for panel in (None, PANEL):
        section = replace(
            RELIEF,
            blocks=(
                *filler,
                Heading(text="Then set it", light="slowly"),
                Steps(steps=steps, panel=panel),
                Hold(word="HOLD", order="A second person reads G1.", reason="Nothing else shows it."),
                Heading(text="Slips", level=2),
                table,
            ),
        )
        document = of(section)
        for issue in CONTEXTS:
            assert broken(placed(document, paper, issue), document, draft=issue is None) == []


def test_a_draft_has_the_pages_of_the_issued_pack() -> None:
    """What a reference to a page says must not change when the pack is issued."""
    draft, issued = placed(SAMPLE), placed(SAMPLE, issue=ISSUE)
    kinds = ("step", "hold", "table head", "tag")

    def standing(pages: tuple[PlacedPage, ...]) -> list[list[str]]:
        return [[mark.key for mark in page.marks if mark.kind in kinds] for page in pages]

    assert standing(draft) == standing(issued)
    assert len(draft) == len(issued)


def test_single_documents_keep_the_page_numbers_of_the_pack() -> None:
    whole = placed(SAMPLE)
    lockout = place(SAMPLE, Layout(kinds=(SheetKind.LOCKOUT,)), digest=DIGEST)
    assert lockout == tuple(page for page in whole if page.kind is SheetKind.LOCKOUT)
    assert lockout
    assert {page.total for page in lockout} == {len(whole)}


def test_a_section_begins_a_page_and_only_its_first_page_has_the_bookmark() -> None:
    pages = placed(SAMPLE)
    assert [page.bookmark for page in pages if page.bookmark] == [
        section.bookmark for section in SAMPLE.sections
    ]
    assert pages[0].bookmark == COVER.bookmark


def test_banner_and_short_head_repeat() -> None:
    pages = placed(of(LONG_RUN))
    assert len(pages) >= 3
    assert all(page.marked("banner")[0].key == "POWERED" for page in pages)
    texts = [" ".join(run.text for run in page.runs) for page in pages]
    assert "(continued)" not in texts[0]
    assert all("control (continued)" in text and "PU1" in text for text in texts[1:])


def test_locked_is_filled_and_powered_open_at_both_ends() -> None:
    for section, filled in ((LOCKOUT, True), (RELIEF, False)):
        (page, *_) = placed(of(section))
        (mark,) = page.marked("banner")
        uprights = [
            item
            for item in page.items
            if type(item).__name__ == "Line"
            and item.x1 == item.x2
            and mark.y <= item.y1 <= mark.y + mark.height
        ]
        rects = [
            item
            for item in page.items
            if type(item).__name__ == "Rect"
            and item.fill == "black"
            and abs(item.width - mark.width) < 0.1
            and abs(item.y - mark.y) < 0.1
        ]
        assert bool(rects) is filled
        assert not uprights


def test_the_panel_stands_right_of_its_steps_and_asks_for_a_reading_once() -> None:
    pages = placed(of(LONG_RUN))
    with_panel = [page for page in pages if page.marked("panel")]
    assert len(with_panel) > 2
    for page in with_panel:
        (panel,) = page.marked("panel")
        level = [
            step for step in page.marked("step") if step.y < panel.y + panel.height and step.y >= panel.y - 1
        ]
        assert level
        assert all(step.x + step.width < panel.x for step in level)
    boxes = [mark.key for page in pages for mark in page.marked("box")]
    assert boxes.count("G3 as found") == boxes.count("G3 as left") == 1


def test_a_draft_says_in_place_of_each_signature_that_it_is_not_signed() -> None:
    draft = [run.text for page in placed(of(LOCKOUT)) for run in page.runs]
    issued = placed(of(LOCKOUT), issue=ISSUE)
    signs = [mark.key for page in issued for mark in page.marked("sign")]
    assert signs.count("owner") == 3
    assert {"name", "sign", "time"} <= set(signs)
    assert (
        draft.count("not signed as a draft")
        == len([key for key in signs if key in ("owner", "by", "seen by")]) + 2
    )
    assert {"owner", "seen by"}.isdisjoint(draft)
    assert "lock no." in draft


def test_a_table_head_repeats_on_each_page() -> None:
    table = Table(
        title="Slips", head=("step", "slip"), shares=(0.3, 0.7), rows=tuple((str(i), "x") for i in range(99))
    )
    pages = placed(of(replace(COVER, kind=SheetKind.ENGINEER, blocks=(table,))))
    assert len(pages) > 1
    for page in pages:
        assert len(page.marked("table head")) == 1
        assert min(page.marked("row"), key=lambda row: row.y).y > page.marked("table head")[0].y


def test_the_code_is_refused_when_the_address_is_too_long() -> None:
    at_most = "https://" + "a" * (84 - len("https:///r/7Q2M4KXT9B?d=7K4Q2M9D&v=C"))
    placed(of(RELIEF), issue=replace(ISSUE, record_address=at_most))
    with pytest.raises(InputError, match="84"):
        placed(of(RELIEF), issue=replace(ISSUE, record_address=at_most + "a"))


@pytest.mark.parametrize("digest", ["7K4Q2M9DX1TB60R", "7k4q2m9dx1tb60ra", "7K4Q2M9DX1TB60RU", ""])
def test_a_digest_that_is_none_is_refused(digest: str) -> None:
    with pytest.raises(InputError, match="digest"):
        place(SAMPLE, Layout(), digest=digest)


def test_what_no_page_holds_is_refused_by_name() -> None:
    step = Step(number="1", order="Close HV2.", lines=(LONG_NAME,) * 40, boxes=(BLANK,))
    for panel in (None, PANEL):
        with pytest.raises(InputError, match=r"Close HV2\."):
            placed(of(replace(RELIEF, blocks=(Steps(steps=(step,), panel=panel),))))


def test_the_foot_line_and_the_document_number_are_never_cut() -> None:
    with pytest.raises(InputError, match="line at the foot"):
        placed(replace(SAMPLE, footer=LONG_NAME))
    with pytest.raises(InputError, match="document number"):
        placed(replace(SAMPLE, number="WI-" + "0147-" * 12), issue=ISSUE)


def test_a_long_document_number_leaves_the_revision_on_page_and_tag() -> None:
    document = replace(SAMPLE, number="BT-MAINTENANCE-WI-0147-03")
    for page in placed(document, issue=ISSUE):
        count = sum(run.text.endswith("rev C") for run in page.runs)
        assert count >= max(1, len(page.marked("tag")))


@pytest.mark.parametrize("name", [LONG_NAME, "Wi1" * 100])
def test_long_names_stay_in_their_room_everywhere(name: str) -> None:
    """A name of 300 characters, with and without spaces, in every place of a page."""
    assert len(name) == 300 or name == LONG_NAME
    assert len(LONG_NAME) >= 295
    section = replace(
        RELIEF,
        title=name,
        subject=name,
        lines=(name,),
        banner=replace(RELIEF.banner, left=name, right=name),
        blocks=(
            Heading(text=name, light=name),
            Paragraph(text=name),
            Steps(
                steps=(
                    Step(
                        number="1",
                        order=name,
                        lines=(name,),
                        warnings=(replace(INJECTION, hazard=name, lines=(name[:90],)),),
                    ),
                    Step(
                        number="2",
                        order=name,
                        hold=Hold(word="HOLD", order=name, reason=name),
                    ),
                ),
                panel=replace(PANEL, notes=(name[:120],)),
            ),
            Table(title=name, head=(name[:60], "b"), shares=(0.2, 0.8), rows=((name, name),)),
        ),
    )
    (sheet,) = TAGS.blocks
    assert isinstance(sheet, TagSheet)
    tags = replace(
        TAGS,
        title=name,
        subject=name,
        blocks=(TagSheet(tags=(replace(sheet.tags[0], adjuster=name, kind=name),)),),
    )
    document = replace(SAMPLE, number="WI-" + "0147-" * 6, title=name, sections=(section, tags))
    for issue in CONTEXTS:
        found = broken(placed(document, issue=issue), document, draft=issue is None)
        assert found == []


def test_tags_are_of_card_size_ten_to_a_page() -> None:
    pages = [page for page in placed(SAMPLE) if page.kind is SheetKind.TAGS]
    assert [len(page.marked("tag")) for page in pages] == [10, 1]
    for tag in pages[0].marked("tag"):
        assert tag.width * 25.4 / 72 == pytest.approx(85.60)  # ISO/IEC 7810:2019, ID-1
        assert tag.height * 25.4 / 72 == pytest.approx(53.98)
    letter = [page for page in placed(SAMPLE, "Letter") if page.kind is SheetKind.TAGS]
    assert [len(page.marked("tag")) for page in letter] == [8, 3]


def test_as_left_of_an_issue_goes_on_its_tag() -> None:
    pages = [page for page in placed(SAMPLE, issue=ISSUE) if page.kind is SheetKind.TAGS]
    lines = [run.text for page in pages for run in page.runs if run.text.startswith("as left")]
    assert [line for line in lines if "205 bar" in line] == [
        "as left 205 bar · 2027-03-04 · by R. Quillby   ·   next check 2028-03"
    ]


def test_a_tag_that_has_no_room_for_its_texts_is_refused() -> None:
    (sheet,) = TAGS.blocks
    assert isinstance(sheet, TagSheet)
    crowded = replace(sheet.tags[0], basis=("deadheaded at 98 L/min and 50 °C",) * 5)
    with pytest.raises(InputError, match="setting tag of RV1"):
        placed(of(replace(TAGS, blocks=(TagSheet(tags=(crowded,)),))))
