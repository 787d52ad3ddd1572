"""What who hears a page is told: the whole content, once, in order, and the frame of the page not at all."""

from __future__ import annotations

import io
import re
from collections import Counter
from collections.abc import Iterator
from dataclasses import fields, is_dataclass, replace

import hearing
import pikepdf
import pytest
from sample_document import DIGEST, ISSUE, LONG_RUN, SAMPLE

from sheets.pages.compose.matter import Matter
from sheets.pages.document import (
    Box,
    Document,
    Emphasis,
    Heading,
    IssueContext,
    Layout,
    Paragraph,
    Section,
    SheetKind,
    Step,
    Steps,
    Table,
    TagSheet,
    Warning,
)
from sheets.pages.fonts import PATH_ADVANCE, spans
from sheets.pages.layout import place
from sheets.pages.placed import PlacedPage, TextRun
from sheets.pages.press import print_pack
from sheets.pages.roles import ARTIFACT, HOLDING, home
from sheets.pages.structure import Held, Node, runs, structure
from sheets.pipeline import content

PAPERS = ("A4", "Letter")


def printed(document: Document, digest: str, paper: str, issue: IssueContext | None) -> bytes:
    return print_pack(document, layout=Layout(paper=paper), digest=digest, issue=issue)  # type: ignore[arg-type]  # a literal


def text_of(node: Node, pages: tuple[PlacedPage, ...]) -> str:
    """What is heard of an element and all below it."""
    parts = []
    for child in node.children:
        if isinstance(child, Node):
            parts.append(text_of(child, pages))
        elif isinstance(child, Held):
            (run,) = [run for run in runs(pages[child.page].items) if run.number == child.run]
            parts += [item.text for item in run.items if isinstance(item, TextRun)]
    return " ".join(part for part in parts if part)


def plain(text: str) -> str:
    """Without blanks: where a line breaks is no part of what is said."""
    return re.sub(r"\s+", "", text)


@pytest.mark.parametrize("issue", [None, ISSUE], ids=["draft", "issued"])
@pytest.mark.parametrize("paper", PAPERS)
def test_every_rule_holds_on_the_sample(paper: str, issue: IssueContext | None) -> None:
    assert hearing.broken(printed(SAMPLE, DIGEST, paper, issue)) == []


@pytest.mark.parametrize("issue", [None, ISSUE], ids=["draft", "issued"])
def test_every_rule_holds_on_each_machine(any_sample: Matter, issue: IssueContext | None) -> None:
    document, digest = content(any_sample)
    for paper in PAPERS:
        assert hearing.broken(printed(document, digest, paper, issue)) == []


@pytest.mark.parametrize("kind", SheetKind)
def test_every_rule_holds_on_single_documents(kind: SheetKind) -> None:
    data = print_pack(SAMPLE, layout=Layout(kinds=(kind,)), digest=DIGEST, issue=ISSUE)
    assert hearing.broken(data) == []


def test_the_rules_see_what_is_wrong() -> None:
    """A check of the check: ink without a mark, a lost run, a cell too few, a figure without words."""
    data = printed(SAMPLE, DIGEST, "A4", None)

    def spoilt(spoil: object) -> list[str]:
        with pikepdf.open(io.BytesIO(data)) as pdf:
            spoil(pdf, hearing.tree_of(pdf))  # type: ignore[operator]  # one of the functions below
            buffer = io.BytesIO()
            pdf.save(buffer)
        return hearing.broken(buffer.getvalue())

    def bare(pdf: pikepdf.Pdf, _: hearing.Heard) -> None:
        stream = pdf.pages[0].Contents.read_bytes()
        pdf.pages[0].Contents = pdf.make_stream(stream + b"\n0 0 10 10 re f")

    def lost(_: pikepdf.Pdf, tree: hearing.Heard) -> None:
        del tree.of("P")[0].object["/K"]

    def short(_: pikepdf.Pdf, tree: hearing.Heard) -> None:
        del tree.of("TR")[1].object.K[0]

    def mute(_: pikepdf.Pdf, tree: hearing.Heard) -> None:
        del tree.of("Figure")[0].object["/Alt"]

    def swapped(pdf: pikepdf.Pdf, _: hearing.Heard) -> None:
        entry = pdf.Root.StructTreeRoot.ParentTree.Nums[1]
        entry[0], entry[1] = entry[1], entry[0]

    for spoil, words in (
        (bare, "f is neither content nor artifact"),
        (lost, "stands 0 times in the tree"),
        (short, "columns in one table"),
        (mute, "without words in its place"),
        (swapped, "has another parent"),
    ):
        assert any(words in line for line in spoilt(spoil)), spoil.__name__


@pytest.mark.parametrize("issue", [None, ISSUE], ids=["draft", "issued"])
def test_no_text_is_layout_and_nothing_is_held_by_what_cannot(issue: IssueContext | None) -> None:
    for page in place(SAMPLE, Layout(), issue, digest=DIGEST):
        for run in page.runs:
            (*_, last) = home(run.path, text=True)
            if last.type == ARTIFACT:
                assert last.key in ("Header", "Footer"), run.text
            else:
                assert last.type in HOLDING, run.text


def said(value: object) -> Iterator[str]:
    """Every text of a block that is printed as it stands."""
    if isinstance(value, str):
        yield value
    elif isinstance(value, tuple):
        for one in value:
            yield from said(one)
    elif isinstance(value, Paragraph):
        yield value.text
    elif isinstance(value, Box):
        yield from (value.label, value.unit, value.never_exceed)
    elif isinstance(value, Heading):
        yield from (value.text, value.light)
    elif isinstance(value, Step):
        yield from said((value.number, value.order, value.lines, value.boxes, value.warnings))
    elif isinstance(value, Warning):
        yield from said((value.signal, value.hazard, value.lines))
    elif isinstance(value, Steps):
        yield from said(value.steps)
        if value.panel:
            yield from said((value.panel.boxes, value.panel.notes, value.panel.face.caption))
    elif isinstance(value, Table):
        yield from said((value.title, value.light, value.head, value.rows))
    elif isinstance(value, Emphasis):
        yield from said((value.lead, value.lines, value.right))
    elif isinstance(value, TagSheet):
        yield from said(tuple((tag.adjuster, tag.value, tag.window, tag.footer) for tag in value.tags))
    elif is_dataclass(value):
        yield from said(tuple(getattr(value, one.name) for one in fields(value)))


def rows_of(document: Document) -> Iterator[tuple[Section, str]]:
    for section in document.sections:
        for block in section.blocks:
            for text in said(block):
                if text.strip():
                    yield section, text


@pytest.mark.parametrize("paper", PAPERS)
def test_everything_said_is_heard_in_its_section(paper: str) -> None:
    pages = place(SAMPLE, Layout(paper=paper), ISSUE, digest=DIGEST)  # type: ignore[arg-type]  # a literal
    root = structure(pages).root
    heard = [plain(text_of(node, pages)) for node in root.nodes]
    assert len(heard) == len(SAMPLE.sections)
    texts = dict(zip((id(section) for section in SAMPLE.sections), heard, strict=True))
    missing = [text for section, text in rows_of(SAMPLE) if plain(text) not in texts[id(section)]]
    assert missing == []


def test_what_repeats_on_a_page_is_heard_once() -> None:
    """Head, banner, names of acts and heads of tables come again on each page, to the eye only."""
    pages = place(SAMPLE, Layout(), None, digest=DIGEST)
    nodes = structure(pages).root.nodes
    continued = [page for page in pages if page.bookmark is None]
    assert continued
    for section, node in zip(SAMPLE.sections, nodes, strict=True):
        titles = [text_of(one, pages) for one in node.walk() if one.element.type == "H1"]
        assert [plain(title) for title in titles] == [plain(f"{section.title} {section.subject}")]
        assert SAMPLE.words.continued not in text_of(node, pages).replace(section.title, "")
        tables = [block for block in section.blocks if isinstance(block, Table)]
        heads = [one for one in node.walk() if one.element.type == "TR" and one.element.head]
        assert len(heads) == sum(any(table.head) for table in tables)


def test_how_to_check_that_it_is_current_is_heard_once() -> None:
    """With number, mark and digest, on the cover; at the foot of every other page it is for the eye only."""
    document = replace(SAMPLE, sections=SAMPLE.sections[:4])
    pages = place(document, Layout(), replace(ISSUE, mark="DEMONSTRATION"), digest=DIGEST)
    root = structure(pages).root
    heard = plain(text_of(root, pages))
    cover = plain(text_of(root.nodes[0], pages))
    for text in (SAMPLE.footer, f"{SAMPLE.words.content} 7K4Q-2M9D-X1TB-60RA"):
        assert (cover.count(plain(text)), heard.count(plain(text))) == (1, 1)
    assert "DEMONSTRATION" in cover
    assert plain(SAMPLE.words.page.format(number=1, total=len(pages))) not in heard


def test_a_panel_that_stands_on_several_pages_is_heard_once() -> None:
    document = replace(SAMPLE, sections=(LONG_RUN,))
    pages = place(document, Layout(), None, digest=DIGEST)
    panels = sum(isinstance(block, Steps) and block.panel is not None for block in LONG_RUN.blocks)
    assert sum(len(page.marked("panel")) for page in pages) > panels
    types = Counter(node.element.type for node in structure(pages).root.walk())
    assert (types["SettingPanel"], types["Figure"]) == (panels, panels)


def test_a_step_is_heard_number_warning_order_reason() -> None:
    """The warning comes before the order also where it stands above the number on paper."""
    step = next(
        step
        for section in SAMPLE.sections
        for block in section.blocks
        if isinstance(block, Steps)
        for step in block.steps
        if step.warnings and step.lines
    )
    pages = place(SAMPLE, Layout(), None, digest=DIGEST)
    items = [node for node in structure(pages).root.walk() if node.element.type == "LI"]
    heard = next(
        text for text in (plain(text_of(item, pages)) for item in items) if plain(step.order) in text
    )
    wanted = [step.number, step.warnings[0].hazard, step.order, step.lines[0]]
    found = [heard.index(plain(text)) for text in wanted]
    assert found == sorted(found)
    assert found[0] == 0


def test_what_goes_on_over_a_page_stays_one_element() -> None:
    """Eighty lines of one paragraph, and a table of eighty rows."""
    text = " ".join(f"line {number} of this text fills the width of the page, or so" for number in range(140))
    table = Table(
        title="many", head=("a", "b"), rows=tuple((str(k), "x") for k in range(80)), shares=(0.5, 0.5)
    )
    cover = replace(SAMPLE.sections[0], blocks=(Paragraph(text=text), table))
    pages = place(replace(SAMPLE, sections=(cover,)), Layout(), None, digest=DIGEST)
    nodes = list(structure(pages).root.walk())

    (long,) = [node for node in nodes if node.element.type == "P" and "line 0 of" in text_of(node, pages)]
    assert plain(text_of(long, pages)) == plain(text)
    assert [child.page for child in long.children if isinstance(child, Held)] == [0, 1]
    (many,) = [node for node in nodes if node.element.type == "Table"]
    rows = [node for node in many.nodes if node.element.type == "TR"]
    assert [text_of(row, pages) for row in rows] == ["a b", *(f"{k} x" for k in range(80))]
    assert len({child.page for row in rows for cell in row.nodes for child in cell.children}) > 1  # type: ignore[union-attr]  # cells hold ink


def test_figures_say_what_they_show() -> None:
    """Expected words: those of the look, with the numbers of the sample's first face."""
    with pikepdf.open(io.BytesIO(printed(SAMPLE, DIGEST, "A4", ISSUE))) as pdf:
        told = Counter(str(one.object.Alt) for one in hearing.tree_of(pdf).of("Figure"))
        codes = told.pop("code with the record address")
    tags = sum(
        len(block.tags)
        for section in SAMPLE.sections
        for block in section.blocks
        if isinstance(block, TagSheet)
    )
    assert codes == len(SAMPLE.sections) - 1 + tags  # a sheet of tags has one on each tag instead
    assert "G1 at test point TP1: target 206 bar, accept 202 to 210 bar, never exceed 225 bar" in told


def test_signs_drawn_as_paths_are_heard_too() -> None:
    document = replace(
        SAMPLE,
        sections=(
            replace(
                SAMPLE.sections[0], blocks=(Heading(text="△p across the filter"), *SAMPLE.sections[0].blocks)
            ),
        ),
    )
    with pikepdf.open(io.BytesIO(printed(document, DIGEST, "A4", None))) as pdf:
        spans = [
            str(operands[1].ActualText)
            for operands, operator in pikepdf.parse_content_stream(pdf.pages[0])
            if str(operator) == "BDC" and str(operands[0]) == "/Span"
        ]
    assert "△" in [span.strip() for span in spans]


def test_lines_of_one_element_do_not_run_together() -> None:
    """A blank ends each line, so that its last word and the first of the next stay two (14.8.2.5)."""
    pages = place(SAMPLE, Layout(), None, digest=DIGEST)
    with pikepdf.open(io.BytesIO(printed(SAMPLE, DIGEST, "A4", None))) as pdf:
        for placed, page in zip(pages, pdf.pages, strict=True):
            shown = [
                bytes(operands[0])
                for operands, operator in pikepdf.parse_content_stream(page)
                if str(operator) == "Tj"
            ]
            parts = [span.text for run in placed.runs for span in spans(run.text, run.weight)]
            drawn = [run for run in placed.runs if run.text[-1] not in PATH_ADVANCE]
            assert shown.count(b" ") == len(drawn) + parts.count(" ")


@pytest.mark.parametrize("issue", [None, ISSUE], ids=["draft", "issued"])
def test_no_standard_is_claimed_that_is_not_checked_here(issue: IssueContext | None) -> None:
    with pikepdf.open(io.BytesIO(printed(SAMPLE, DIGEST, "A4", issue))) as pdf:
        packet = pdf.Root.Metadata.read_bytes().decode()
    assert not re.search(r"pdfua|PDF/UA|accessib", packet, re.IGNORECASE)
