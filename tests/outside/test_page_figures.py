"""Sizes and codes on the placed and printed pages of a real sample, against the standards that fix them."""

from __future__ import annotations

from collections import Counter

import pypdfium2
import pytest
import zxingcpp
from outside_bench import Published

from sheets import pipeline
from sheets.errors import InputError
from sheets.pages.code import matrix
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout
from sheets.pages.layout import place
from sheets.pages.placed import MM, Code, PlacedPage, extent

ISSUE = IssueContext(
    record_id="7Q2M4KXT9B",
    record_address="https://records.brackwater.example/jamnut",
    revision="C",
    state="issued",
    date="2027-03-01",
    zone="UTC+01:00",
    signers=(("prepared", "R. Quillby"),),
)
ID_1 = "ISO/IEC 7810:2019, ID-1"
WIDTH = Published(printed="85.60 mm", source=ID_1, evidence="from memory", within=1e-4)
HEIGHT = Published(printed="53.98 mm", source=ID_1, evidence="from memory", within=1e-4)


@pytest.fixture(scope="module", params=["A4", "Letter"])
def layout(request: pytest.FixtureRequest) -> Layout:
    return Layout(paper=request.param)


@pytest.fixture(scope="module")
def pages(clay_mixer: Matter, layout: Layout) -> tuple[PlacedPage, ...]:
    document, digest = pipeline.content(clay_mixer)
    return place(document, layout, ISSUE, digest=digest)


def test_setting_tags_have_the_size_of_a_card(clay_mixer: Matter, pages: tuple[PlacedPage, ...]) -> None:
    tags = [tag for page in pages for tag in page.marked("tag")]
    assert [tag.key for tag in tags] == list(clay_mixer.procedure.order.sequence)
    for tag in tags:
        assert WIDTH.agrees(tag.width / MM, "mm")
        assert HEIGHT.agrees(tag.height / MM, "mm")


def test_codes_keep_a_quiet_zone_of_four_modules(pages: tuple[PlacedPage, ...]) -> None:
    """ISO/IEC 18004: 4 modules, on all four sides. Reported."""
    for page in pages:
        codes = [item for item in page.items if isinstance(item, Code)]
        assert codes
        for code in codes:
            quiet = 4 * code.module
            left, top, right, bottom = extent(code)
            assert min(left - quiet, top - quiet) >= 0
            assert right + quiet <= page.width
            assert bottom + quiet <= page.height
            for item in page.items:
                if item is code:
                    continue
                x1, y1, x2, y2 = extent(item)
                beside = x2 <= left - quiet or x1 >= right + quiet
                above_or_below = y2 <= top - quiet or y1 >= bottom + quiet
                assert beside or above_or_below, f"page {page.number}: {item}"


# ISO/IEC 18004, byte mode, level M: version and most bytes. Reported; side = 17 + 4·version
CAPACITIES = [(1, 14), (2, 26), (3, 42), (4, 62), (5, 84)]


@pytest.mark.parametrize(("version", "most"), CAPACITIES)
def test_code_versions_hold_what_the_standard_says(version: int, most: int) -> None:
    side = 17 + 4 * version
    rows = matrix("x" * most)
    assert len(rows) == side
    assert {len(row) for row in rows} == {side}
    if version < 5:
        assert len(matrix("x" * (most + 1))) == side + 4
    else:
        with pytest.raises(InputError):
            matrix("x" * (most + 1))


def test_an_independent_reader_reads_every_page_and_tag(
    clay_mixer: Matter, layout: Layout, pages: tuple[PlacedPage, ...]
) -> None:
    """At 150 dpi, with a reader that shares nothing with the writer."""
    _, digest = pipeline.content(clay_mixer)
    url = f"https://records.brackwater.example/jamnut/r/7Q2M4KXT9B?d={digest[:8]}&v=C"
    with pypdfium2.PdfDocument(pipeline.pack(clay_mixer, layout, ISSUE)) as pdf:
        assert len(pdf) == len(pages)
        read: Counter[int] = Counter()
        for placed, page in zip(pages, pdf, strict=True):
            picture = page.render(scale=150 / 72, grayscale=True).to_numpy().squeeze()
            codes = zxingcpp.read_barcodes(picture, formats=zxingcpp.BarcodeFormat.QRCode)
            assert {code.text for code in codes} == {url}
            assert {code.ec_level for code in codes} == {"M"}
            read[placed.number] = len(codes)
    assert read == {page.number: max(1, len(page.marked("tag"))) for page in pages}
