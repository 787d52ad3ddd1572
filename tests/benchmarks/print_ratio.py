"""What structure, archive form, attachments and fields cost, against plain drawing of the same pages.

Run: PYTHONPATH=. python tests/benchmarks/print_ratio.py. It prints times, sizes and their ratios; nothing is
asserted, since times hang on the computer.
"""

from __future__ import annotations

import io
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path

from reportlab.pdfgen.canvas import Canvas

sys.path.insert(0, str(Path(__file__).parents[1] / "pages"))

from sample_document import ISSUE

from sheets import pipeline
from sheets.pages.archive import archive_flaws
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout
from sheets.pages.draw import draw_item
from sheets.pages.layout import place
from sheets.pages.placed import PlacedPage
from sheets.pages.press import pdf_bytes
from sheets.pipeline.attaching import attachments_of
from sheets.pipeline.printing import whole_content

SAMPLES = Path(__file__).parents[2] / "sample_machines"
REPEATS = 7


def plain(pages: Sequence[PlacedPage]) -> bytes:
    """The same ink and nothing else, compressed by the drawing library."""
    buffer = io.BytesIO()
    canvas = Canvas(buffer, invariant=1, pageCompression=1)
    for page in pages:
        canvas.setPageSize((page.width, page.height))
        for item in page.items:
            draw_item(canvas, item, page.height)
        canvas.showPage()
    canvas.save()
    return buffer.getvalue()


def least_ms(work: Callable[[], object]) -> float:
    """Least time of some, in ms of this process."""
    times = []
    for _ in range(REPEATS):
        begun = time.process_time()
        work()
        times.append(1000 * (time.process_time() - begun))
    return min(times)


def compare(name: str, matter: Matter, issue: IssueContext | None) -> None:
    """Print one machine, plain and whole."""
    said = whole_content(matter)
    layout = Layout()
    files = attachments_of(matter, layout, said.data)
    pages = place(said.document, layout, issue, digest=said.digest)
    data = pdf_bytes(pages, said.document, issue=issue, attachments=files)
    placing = least_ms(lambda: place(said.document, layout, issue, digest=said.digest))
    drawing = least_ms(lambda: plain(pages))
    printing = least_ms(lambda: pdf_bytes(pages, said.document, issue=issue, attachments=files))
    judging = least_ms(lambda: archive_flaws(data))
    print(
        f"{name}, {'issued' if issue else 'draft'}, {len(pages)} pages: plain drawing {drawing:.0f} ms, "
        f"whole printing {printing:.0f} ms, {printing / drawing:.2f} times; with placing ({placing:.0f} ms) "
        f"{(placing + printing) / (placing + drawing):.2f} times; {len(plain(pages)) / 1000:.0f} and "
        f"{len(data) / 1000:.0f} kB; judging the archive form {judging:.0f} ms"
    )


def main() -> None:
    """Each sample machine, as a draft and issued."""
    for name in ("clay_mixer", "glaze_press", "kiln_pusher"):
        matter = pipeline.steps(pipeline.check(SAMPLES / f"{name}.yaml"))
        for issue in (None, ISSUE):
            compare(name, matter, issue)


if __name__ == "__main__":
    main()
