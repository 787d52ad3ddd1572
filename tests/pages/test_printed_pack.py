"""Second and third ring: the PDF as a reader and a camera see it."""

from __future__ import annotations

import io
import os
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pikepdf
import pypdfium2
import pytest
import zxingcpp
from sample_document import DIGEST, GREEK_NAME, ISSUE, LONG_NAME, MARKUP_NAME, SAMPLE

from sheets.pages.document import IssueContext, Layout, SheetKind
from sheets.pages.layout import place
from sheets.pages.press import print_pack

URL = "https://records.brackwater.example/jamnut/r/7Q2M4KXT9B?d=7K4Q2M9D&v=C"
HERE = Path(__file__).parent


@pytest.fixture(scope="module", params=["A4", "Letter"])
def paper(request: pytest.FixtureRequest) -> str:
    return str(request.param)


def printed(paper: str, issue: IssueContext | None) -> bytes:
    return print_pack(SAMPLE, layout=Layout(paper=paper), digest=DIGEST, issue=issue)  # type: ignore[arg-type]  # a literal


@pytest.fixture(scope="module")
def draft(paper: str) -> Iterator[pypdfium2.PdfDocument]:
    with pypdfium2.PdfDocument(printed(paper, None)) as pdf:
        yield pdf


@pytest.fixture(scope="module")
def issued(paper: str) -> Iterator[pypdfium2.PdfDocument]:
    with pypdfium2.PdfDocument(printed(paper, ISSUE)) as pdf:
        yield pdf


def text_of(page: pypdfium2.PdfPage) -> str:
    return " ".join(page.get_textpage().get_text_range().split())


def test_paper_size(paper: str, draft: pypdfium2.PdfDocument) -> None:
    width, height = draft[0].get_size()
    inches = {"A4": (210 / 25.4, 297 / 25.4), "Letter": (8.5, 11)}[paper]
    assert (width / 72, height / 72) == pytest.approx(inches, abs=0.001)


def test_each_page_says_what_its_foot_must(
    draft: pypdfium2.PdfDocument, issued: pypdfium2.PdfDocument
) -> None:
    for pdf, revision in ((draft, "DRAFT"), (issued, "rev C")):
        for number, page in enumerate(pdf, start=1):
            text = text_of(page)
            for wanted in (
                f"page {number} of {len(pdf)}",
                "machine data 2026-11-20",
                "content 7K4Q-2M9D-X1TB-60RA",
                "WI-0147",
                "Brackwater Tileworks",
                "Not valid unless checked current before this job",
                revision,
            ):
                assert wanted in text, f"page {number} lacks {wanted}"
            assert ("DRAFT" in text) is (pdf is draft)


def test_markup_and_other_scripts_come_out_as_written(draft: pypdfium2.PdfDocument) -> None:
    cover = text_of(draft[0])
    assert MARKUP_NAME in cover
    assert GREEK_NAME in cover
    assert LONG_NAME in cover.replace("\ufffe", "").replace("- ", "-")
    assert "\ufffd" not in cover


def test_text_lies_where_it_was_placed(paper: str) -> None:
    """The drawing turns y over and shifts nothing: compared with the text boxes that the reader finds."""
    pages = place(SAMPLE, Layout(paper=paper), digest=DIGEST)  # type: ignore[arg-type]  # a literal
    with pypdfium2.PdfDocument(printed(paper, None)) as pdf:
        for page in pages[1:2]:
            textpage = pdf[page.number - 1].get_textpage()
            for run in [run for run in page.runs if run.size >= 12 and len(run.text) > 4]:
                match = textpage.search(run.text, match_case=True).get_next()
                assert match is not None, run.text
                boxes = [textpage.get_charbox(match[0] + k) for k in (0, match[1] - 1)]
                again = [other for other in page.runs if run.text in other.text]
                if len(again) > 1:
                    continue
                assert boxes[0][0] == pytest.approx(run.x, abs=2.5)
                assert page.height - boxes[0][1] == pytest.approx(run.y, abs=run.size * 0.25)


def test_orders_are_large_and_targets_larger() -> None:
    pages = place(SAMPLE, Layout(), digest=DIGEST)
    steps = pages[1]
    sizes = {run.text: run.size for run in steps.runs}
    assert sizes["Close hand valve HV2."] >= 12
    assert sizes["206 bar"] >= 24


def test_bookmarks_lead_to_the_sections(issued: pypdfium2.PdfDocument) -> None:
    found = [(item.get_title(), item.get_dest().get_index()) for item in issued.get_toc()]
    assert [title for title, _ in found] == [section.bookmark for section in SAMPLE.sections]
    for (_, index), section in zip(found, SAMPLE.sections, strict=True):
        assert section.title.split()[-1] in text_of(issued[index])
        assert " ".join(section.title.split()[:4]) in text_of(issued[index])


def test_every_page_and_tag_carries_a_readable_code(issued: pypdfium2.PdfDocument) -> None:
    for number, page in enumerate(issued, start=1):
        picture = page.render(scale=150 / 72, grayscale=True).to_numpy().squeeze()
        codes = zxingcpp.read_barcodes(picture, formats=zxingcpp.BarcodeFormat.QRCode)
        tags = text_of(page).count("setting record, not a lockout tag")
        assert [code.text for code in codes] == [URL] * max(tags, 1), f"page {number}"
        assert {code.ec_level for code in codes} == {"M"}


def test_a_code_of_the_longest_address_reads(paper: str) -> None:
    address = "https://" + "a" * (84 - len("https:///r/7Q2M4KXT9B?d=7K4Q2M9D&v=C"))
    data = print_pack(
        replace(SAMPLE, sections=(SAMPLE.sections[1], SAMPLE.sections[4])),
        layout=Layout(paper=paper),  # type: ignore[arg-type]  # a literal
        digest=DIGEST,
        issue=replace(ISSUE, record_address=address),
    )
    with pypdfium2.PdfDocument(data) as pdf:
        for page, count in zip(pdf, (1, 10 if paper == "A4" else 8), strict=False):
            picture = page.render(scale=150 / 72, grayscale=True).to_numpy().squeeze()
            codes = zxingcpp.read_barcodes(picture, formats=zxingcpp.BarcodeFormat.QRCode)
            assert [len(code.text) for code in codes] == [84] * count


def test_a_draft_has_no_code(draft: pypdfium2.PdfDocument) -> None:
    for page in draft:
        picture = page.render(scale=150 / 72, grayscale=True).to_numpy().squeeze()
        assert zxingcpp.read_barcodes(picture) == []


def test_only_black_and_white() -> None:
    """Every colour set on a page is black or white: nothing is grey, nothing coloured."""
    data = printed("A4", ISSUE)
    with pikepdf.open(io.BytesIO(data)) as pdf:
        for page in pdf.pages:
            for operands, operator in pikepdf.parse_content_stream(page):
                if str(operator) in ("g", "G"):
                    assert float(operands[0]) in (0, 1)
                assert str(operator) not in ("rg", "RG", "k", "K", "sc", "SC", "scn", "SCN", "Do", "sh")


def test_the_file_says_what_it_is_and_embeds_its_fonts() -> None:
    with pikepdf.open(io.BytesIO(printed("A4", ISSUE))) as pdf:
        assert pdf.pdf_version == "1.7"
        assert str(pdf.Root.Lang) == "en"
        assert bool(pdf.Root.ViewerPreferences.DisplayDocTitle)
        assert str(pdf.docinfo.Title) == "WI-0147 Kiln-car pusher PU-07 · Brackwater Tileworks"
        assert "Set the relief valve" in str(pdf.docinfo.Subject)
        assert "/CreationDate" not in pdf.docinfo
        fonts = [
            item
            for item in pdf.objects
            if isinstance(item, pikepdf.Dictionary) and item.get("/Type") == "/Font"
        ]
        assert fonts
        for font in fonts:
            assert "/FontFile2" in font.FontDescriptor, str(font.BaseFont)


def test_equal_content_gives_equal_bytes_whatever_the_environment(tmp_path: Path) -> None:
    """Two fresh processes, one with a stray build date and another zone and locale."""
    program = (
        "import sys; sys.path.insert(0, sys.argv[1])\n"
        "from sample_document import SAMPLE, DIGEST, ISSUE\n"
        "from sheets.pages.document import Layout\n"
        "from sheets.pages.press import print_pack\n"
        "open(sys.argv[2], 'wb').write(print_pack(SAMPLE, layout=Layout(), digest=DIGEST, issue=ISSUE))\n"
    )
    stray = {"SOURCE_DATE_EPOCH": "946684800", "TZ": "Asia/Tokyo", "LC_ALL": "C", "RL_useA85": "1"}
    results = []
    for index, extra in enumerate(({"PYTHONHASHSEED": "1"}, {"PYTHONHASHSEED": "2", **stray})):
        path = tmp_path / f"{index}.pdf"
        subprocess.run(
            [sys.executable, "-c", program, str(HERE), str(path)],
            env={**os.environ, **extra},
            cwd=HERE.parents[1],
            check=True,
        )
        results.append(path.read_bytes())
    assert results[0] == results[1]
    assert results[0] == printed("A4", ISSUE)


def test_other_content_gives_another_id() -> None:
    ids = set()
    for number in ("WI-0147", "WI-0148"):
        data = print_pack(replace(SAMPLE, number=number), layout=Layout(), digest=DIGEST)
        with pikepdf.open(io.BytesIO(data)) as pdf:
            ids.add(bytes(pdf.trailer.ID[0]))
    assert len(ids) == 2


def test_single_documents_are_cut_from_the_same_pages(issued: pypdfium2.PdfDocument, paper: str) -> None:
    layout = Layout(paper=paper, kinds=(SheetKind.LOCKOUT,))  # type: ignore[arg-type]  # a literal
    with pypdfium2.PdfDocument(print_pack(SAMPLE, layout=layout, digest=DIGEST, issue=ISSUE)) as single:
        texts = [text_of(page) for page in single]
    whole = [text_of(page) for page in issued]
    assert texts
    assert all(text in whole for text in texts)


def photocopied(picture: object) -> object:
    """Twice blurred, lightened and thresholded, as two worn copiers do it."""
    from PIL import Image, ImageFilter

    image = Image.fromarray(picture)  # type: ignore[arg-type]  # an array of grey values
    for level in (110, 150):
        image = image.filter(ImageFilter.GaussianBlur(1.2)).point(
            lambda grey, level=level: 255 * (grey > level)
        )
    return image


def test_a_code_reads_after_two_photocopies(issued: pypdfium2.PdfDocument) -> None:
    picture = issued[1].render(scale=200 / 72, grayscale=True).to_numpy().squeeze()
    codes = zxingcpp.read_barcodes(photocopied(picture), formats=zxingcpp.BarcodeFormat.QRCode)
    assert [code.text for code in codes] == [URL]
