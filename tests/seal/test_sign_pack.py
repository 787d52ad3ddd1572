"""A whole pack of a sample machine, signed three times."""

from __future__ import annotations

import io
import sys
from itertools import pairwise
from pathlib import Path

import pikepdf
import pytest
from signing_bench import PEOPLE, judged, signed_once, signer
from test_sign import run, tool

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "pages"))

from sample_document import ISSUE

from sheets.pages.compose.matter import Matter
from sheets.pages.document import Layout
from sheets.pages.layout import place
from sheets.pages.press import pdf_bytes
from sheets.pipeline.attaching import attachments_of
from sheets.pipeline.printing import whole_content
from sheets.seal.sign import signing_fields
from sheets.seal.signatures_report import ROLES, Judgement


@pytest.fixture(scope="module")
def states(clay_mixer: Matter) -> list[bytes]:
    """The pack unsigned, then after each signature."""
    said = whole_content(clay_mixer)
    files = attachments_of(clay_mixer, Layout(), said.data)
    pages = place(said.document, Layout(), ISSUE, digest=said.digest)
    found = [pdf_bytes(pages, said.document, issue=ISSUE, attachments=files)]
    for role in ROLES:
        found.append(signed_once(found[-1], role, signer(PEOPLE[role])))
    return found


def test_fields_of_a_pack_are_the_three_and_nobody_signed(states: list[bytes]) -> None:
    assert [(name, one.signed) for name, one in signing_fields(states[0]).items()] == [
        (role, False) for role in ROLES
    ]


def test_a_signed_pack_is_good_and_begins_as_it_was(states: list[bytes]) -> None:
    assert judged(states[-1]).judgement is Judgement.GOOD
    assert all(later.startswith(earlier) for earlier, later in pairwise(states))


def test_every_font_of_a_signed_pack_is_embedded_and_its_files_are_still_there(states: list[bytes]) -> None:
    with pikepdf.open(io.BytesIO(states[0])) as before, pikepdf.open(io.BytesIO(states[-1])) as after:
        descriptors = [
            one
            for one in after.objects
            if isinstance(one, pikepdf.Dictionary) and one.get("/Type") == pikepdf.Name.FontDescriptor
        ]
        fonts = [
            one
            for one in after.objects
            if isinstance(one, pikepdf.Dictionary) and one.get("/Type") == pikepdf.Name.Font
        ]
        assert len(fonts) >= 3
        assert all("/FontDescriptor" in one or "/DescendantFonts" in one for one in fonts)
        assert all("/FontFile2" in one for one in descriptors)
        assert after.pdf_version == "1.7"
        assert after.Root.Metadata.read_bytes() == before.Root.Metadata.read_bytes()
        assert len(after.attachments) > 0
        for name, spec in before.attachments.items():
            assert after.attachments[name].get_file().read_bytes() == spec.get_file().read_bytes()


def test_stamps_lie_in_their_fields(states: list[bytes]) -> None:
    with pikepdf.open(io.BytesIO(states[-1])) as pdf:
        widgets = [one for page in pdf.pages for one in page.get("/Annots", ()) if one.get("/FT") == "/Sig"]
        assert {str(one.T) for one in widgets} == set(ROLES)
        for one in widgets:
            left, bottom, right, top = (float(edge) for edge in one.Rect)
            box = [float(edge) for edge in one.AP.N.BBox]
            assert box == pytest.approx([0, 0, right - left, top - bottom], abs=0.01)


def test_pdfsig_accepts_a_whole_pack(states: list[bytes], tmp_path: Path) -> None:
    (tmp_path / "pack.pdf").write_bytes(states[-1])
    said = run(tool("pdfsig"), "-nocert", str(tmp_path / "pack.pdf"))
    assert said.count("Signature Validation: Signature is Valid.") == 3
