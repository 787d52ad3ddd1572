"""A few pages as pictures: the picture and the difference are kept when one fails.

After a wanted change of the look, renew them and look at them:
PYTHONPATH=. python tests/pictures/test_page_pictures.py
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pypdfium2
import pytest
from PIL import Image

HERE = Path(__file__).parent
sys.path.insert(0, str(HERE.parent / "pages"))

from sample_document import DIGEST, ISSUE, SAMPLE  # noqa: E402  # the sample stands beside the tests of pages

from sheets.pages.document import IssueContext, Layout  # noqa: E402  # follows the line above
from sheets.pages.press import print_pack  # noqa: E402  # follows the line above

PICTURES: dict[str, tuple[IssueContext | None, int]] = {
    "step-card-issued": (ISSUE, 1),
    "lockout-draft": (None, 5),
    "tags-issued": (ISSUE, 7),
}
DPI = 80
MEAN_MOST = 1.0
"""Mean difference of grey values, of 255: renderers differ at edges, a moved block is far above."""


def drawn(issue: IssueContext | None, index: int) -> np.ndarray:
    data = print_pack(SAMPLE, layout=Layout(), digest=DIGEST, issue=issue)
    with pypdfium2.PdfDocument(data) as pdf:
        return np.array(pdf[index].render(scale=DPI / 72, grayscale=True).to_numpy()).squeeze()


@pytest.mark.parametrize("name", PICTURES)
def test_page_looks_as_it_was_approved(name: str, tmp_path: Path) -> None:
    found = drawn(*PICTURES[name])
    approved = np.array(Image.open(HERE / f"{name}.png").convert("L"))
    assert found.shape == approved.shape
    difference = np.abs(found.astype(int) - approved.astype(int))
    if difference.mean() > MEAN_MOST:
        Image.fromarray(found).save(tmp_path / f"{name}.found.png")
        Image.fromarray((255 - difference).astype(np.uint8)).save(tmp_path / f"{name}.difference.png")
        pytest.fail(
            f"{name} differs by {difference.mean():.2f} of 255 in the mean; pictures are in {tmp_path}"
        )


if __name__ == "__main__":
    for name, where in PICTURES.items():
        Image.fromarray(drawn(*where)).quantize(16).save(HERE / f"{name}.png", optimize=True)
