"""What must hold on every placed document. Each rule gives the sentences that say where it is broken."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from itertools import combinations

from sheets.pages.document import Act, Document, SheetKind, Steps, Table, TagSheet
from sheets.pages.placed import MM, Code, Extent, Mark, PlacedPage, TextRun, extent

LEAST_MARGIN = 12 * MM
CROP = 5 * MM
SLACK = 0.05


def inside(inner: Extent, outer: Extent, slack: float = SLACK) -> bool:
    return (
        inner[0] >= outer[0] - slack
        and inner[1] >= outer[1] - slack
        and inner[2] <= outer[2] + slack
        and inner[3] <= outer[3] + slack
    )


def meet(one: Extent, other: Extent, slack: float = 0.3) -> bool:
    return (
        one[0] < other[2] - slack
        and other[0] < one[2] - slack
        and one[1] < other[3] - slack
        and other[1] < one[3] - slack
    )


def of_mark(mark: Mark) -> Extent:
    return (mark.x, mark.y, mark.x + mark.width, mark.y + mark.height)


def letters(run: TextRun) -> Extent:
    """The room of capitals and descenders, a little less than the extent."""
    left, top, right, bottom = extent(run)
    if run.upward:
        return (left + 0.06 * run.size, top, right - 0.05 * run.size, bottom)
    return (left, top + 0.06 * run.size, right, bottom - 0.05 * run.size)


def margins(page: PlacedPage) -> Iterator[str]:
    room = (LEAST_MARGIN, LEAST_MARGIN, page.width - LEAST_MARGIN, page.height - LEAST_MARGIN)
    for item in page.items:
        if not inside(extent(item), room):
            yield f"page {page.number}: outside the margins: {str(item)[:120]}"


def overlaps(page: PlacedPage) -> Iterator[str]:
    for one, other in combinations(page.runs, 2):
        if meet(letters(one), letters(other)):
            yield f"page {page.number}: “{one.text}” over “{other.text}”"


def beyond_frames(page: PlacedPage) -> Iterator[str]:
    """Text of a framed region stays in it."""
    framed = ("warning", "hold", "emphasis", "row", "tag", "banner", "title block", "face")
    for mark in page.marks:
        if mark.kind not in framed:
            continue
        room = of_mark(mark)
        for run in page.runs:
            box = letters(run)
            if meet(box, room) and not inside(box, room, 0.6):
                yield f"page {page.number}: “{run.text}” crosses the edge of {mark.kind} {mark.key[:40]}"


def clear_codes(page: PlacedPage) -> Iterator[str]:
    for code in (item for item in page.items if isinstance(item, Code)):
        left, top, right, bottom = extent(code)
        quiet = 4 * code.module
        zone = (left - quiet, top - quiet, right + quiet, bottom + quiet)
        for item in page.items:
            if item is not code and meet(extent(item), zone, SLACK):
                yield f"page {page.number}: in the quiet zone of a code: {str(item)[:100]}"
        if code.module < 0.5 * MM - 1e-9:
            yield f"page {page.number}: modules of {code.module / MM:.2f} mm"


def above_footer(page: PlacedPage) -> Iterator[str]:
    (foot,) = page.marked("footer")
    for mark in page.marks:
        if mark.kind in ("footer", "tag", "face", "code", "draft"):
            continue
        if mark.y + mark.height > foot.y + SLACK and page.kind is not SheetKind.TAGS:
            yield f"page {page.number}: {mark.kind} {mark.key[:40]} is cut by the foot of the page"


def headings(page: PlacedPage) -> Iterator[str]:
    for heading in (*page.marked("heading"), *page.marked("table head")):
        below = [
            mark
            for mark in page.marks
            if mark.kind in ("step", "row", "paragraph", "panel", "hold", "emphasis", "key line", "warning")
            and mark.y >= heading.y + heading.height - SLACK
        ]
        if not below:
            yield f"page {page.number}: heading “{heading.key}” ends the page"


def warnings(page: PlacedPage) -> Iterator[str]:
    """After a warning the next thing below is another one of its step, or its step."""
    for warning in page.marked("warning"):
        below = [
            mark
            for mark in (*page.marked("step"), *page.marked("warning"))
            if mark.y >= warning.y + warning.height - SLACK
        ]
        following = min(below, key=lambda mark: mark.y, default=None)
        if following is None or following.key != warning.key:
            yield f"page {page.number}: warning of {warning.key} stands apart from its step"


def holds(page: PlacedPage) -> Iterator[str]:
    steps = page.marked("step")
    for hold in page.marked("hold"):
        if not any(step.y < hold.y for step in steps):
            yield f"page {page.number}: hold “{hold.key}” stands without a step before it"


def numbers(page: PlacedPage, document: Document) -> Iterator[str]:
    words = document.words.page.format(number=page.number, total=page.total)
    if words not in [run.text for run in page.runs]:
        yield f"page {page.number}: doesn't say {words}"


def small_text(page: PlacedPage) -> Iterator[str]:
    least = 7.0 if page.kind is SheetKind.TAGS else 8.5
    for run in page.runs:
        if run.size < least - 1e-9:
            yield f"page {page.number}: “{run.text}” in {run.size} pt"


def draft_marks(page: PlacedPage, document: Document) -> Iterator[str]:
    """The word twice on a page, and on a tag once where a crop of 5 mm leaves it."""
    word = document.words.draft
    runs = [run for run in page.runs if run.text == word and run.white]
    if page.kind is not SheetKind.TAGS and len(runs) < 2:
        yield f"page {page.number}: DRAFT {len(runs)} times"
    for tag in page.marked("tag"):
        left, top, right, bottom = of_mark(tag)
        room = (left + CROP, top + CROP, right - CROP, bottom - CROP)
        kept = [run for run in runs if inside(extent(run), room)]
        if len(kept) < 2 or max(run.size for run in kept) < 13:
            yield f"page {page.number}: tag {tag.key} loses DRAFT in a crop"
    if page.marked("sign") or page.marked("code") or any(isinstance(item, Code) for item in page.items):
        yield f"page {page.number}: a draft has a code or something to sign"


def codes(page: PlacedPage) -> Iterator[str]:
    found = [item for item in page.items if isinstance(item, Code)]
    tags = page.marked("tag")
    if len(found) != (len(tags) or 1):
        yield f"page {page.number}: {len(found)} codes"


def banners(page: PlacedPage) -> Iterator[str]:
    """On every page of a section that has one, and on every page with steps."""
    found = page.marked("banner")
    if (page.marked("step") or page.kind in (SheetKind.LOCKOUT, SheetKind.WORK_INSTRUCTION)) and not found:
        yield f"page {page.number}: steps without a banner"
    if page.kind in (SheetKind.TAGS, SheetKind.COVER) and found:
        yield f"page {page.number}: a banner where nobody works"


def everything(pages: Sequence[PlacedPage], document: Document) -> Iterator[str]:
    """Nothing is lost and nothing stands twice: steps, holds, warnings, rows, tags, panels."""
    found = Counter(mark.kind for page in pages for mark in page.marks)
    blocks = [block for section in document.sections for block in section.blocks]
    steps = [step for block in blocks if isinstance(block, Steps) for step in block.steps]
    rows = [step for block in blocks if isinstance(block, Act) for step in block.rows]
    wanted = {
        "step": len(steps) + len(rows),
        "warning": sum(len(step.warnings) for step in (*steps, *rows)),
        "tag": sum(len(block.tags) for block in blocks if isinstance(block, TagSheet)),
    }
    for kind, count in wanted.items():
        if found[kind] != count:
            yield f"{found[kind]} of kind {kind}, not {count}"
    keys = Counter(mark.key for page in pages for mark in page.marked("row"))
    for table in (block for block in blocks if isinstance(block, Table)):
        for index in range(len(table.rows)):
            if keys[f"{table.title} {index}"] != 1:
                yield f"row {index} of {table.title} stands {keys[f'{table.title} {index}']} times"


def broken(pages: Sequence[PlacedPage], document: Document, *, draft: bool) -> list[str]:
    """Every sentence of every rule over a whole pack."""
    found: list[str] = list(everything(pages, document))
    for page in pages:
        found.extend(margins(page))
        found.extend(overlaps(page))
        found.extend(beyond_frames(page))
        found.extend(clear_codes(page))
        found.extend(above_footer(page))
        found.extend(headings(page))
        found.extend(warnings(page))
        found.extend(holds(page))
        found.extend(numbers(page, document))
        found.extend(small_text(page))
        found.extend(banners(page))
        found.extend(draft_marks(page, document) if draft else codes(page))
    if [page.number for page in pages] != list(range(1, len(pages) + 1)):
        found.append("pages are not numbered through")
    if any(page.total != len(pages) for page in pages):
        found.append("the number of pages is wrong")
    return found
