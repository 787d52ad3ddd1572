"""The archive form of every pack, its metadata, its colour space, and the fields to sign."""

from __future__ import annotations

import io
from collections.abc import Callable
from dataclasses import replace

import hearing
import numpy as np
import pikepdf
import pytest
from PIL import Image, ImageCms
from sample_document import DIGEST, ISSUE, SAMPLE

from sheets.pages.archive import archive_flaws
from sheets.pages.attached import Attachment
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout, SheetKind
from sheets.pages.layout import place
from sheets.pages.placed import MM
from sheets.pages.press import print_pack
from sheets.pages.profile import colorants, linear, srgb_profile
from sheets.pipeline import pack

NOTE = Attachment(
    name="note.yaml",
    media_type="application/yaml",
    data="größer: 5 °C\n".encode(),
    relationship="Source",
    description="an input",
)
DATA = Attachment(
    name="Data.json", media_type="application/json", data=b"{}", relationship="Data", description="an output"
)


def printed(issue: IssueContext | None, **options: object) -> bytes:
    return print_pack(SAMPLE, layout=Layout(), digest=DIGEST, issue=issue, **options)  # type: ignore[arg-type]  # a test's shorthand


def spoilt(data: bytes, spoil: Callable[[pikepdf.Pdf], None]) -> tuple[str, ...]:
    with pikepdf.open(io.BytesIO(data)) as pdf:
        spoil(pdf)
        buffer = io.BytesIO()
        pdf.save(buffer)
    return archive_flaws(buffer.getvalue())


@pytest.mark.parametrize("issue", [None, ISSUE], ids=["draft", "issued"])
@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_every_pack_is_in_archive_form(any_sample: Matter, paper: str, issue: IssueContext | None) -> None:
    assert archive_flaws(pack(any_sample, Layout(paper=paper), issue)) == ()  # type: ignore[arg-type]  # a literal


@pytest.mark.parametrize("issue", [None, ISSUE], ids=["draft", "issued"])
def test_the_sample_is_in_archive_form(issue: IssueContext | None) -> None:
    """With Greek and Cyrillic names, signs drawn as paths, a digital gauge, attachments."""
    assert archive_flaws(printed(issue, attachments=(NOTE, DATA))) == ()


def test_the_judge_sees_what_is_wrong() -> None:
    """A check of the check, for what the library judges and for what is judged here."""

    def no_font(pdf: pikepdf.Pdf) -> None:
        for held in pdf.objects:
            if isinstance(held, pikepdf.Dictionary) and "/FontFile2" in held:
                del held["/FontFile2"]

    def no_colour(pdf: pikepdf.Pdf) -> None:
        del pdf.Root["/OutputIntents"]

    def no_relationship(pdf: pikepdf.Pdf) -> None:
        del pdf.Root.AF[0]["/AFRelationship"]

    def left_to_reader(pdf: pikepdf.Pdf) -> None:
        pdf.Root.AcroForm.NeedAppearances = True

    def action(pdf: pikepdf.Pdf) -> None:
        pdf.Root.AcroForm.Fields[0].AA = pikepdf.Dictionary()

    def hidden(pdf: pikepdf.Pdf) -> None:
        pdf.Root.AcroForm.Fields[1].F = 2

    def bare(pdf: pikepdf.Pdf) -> None:
        del pdf.Root.AcroForm.Fields[2]["/AP"]

    def text_field(pdf: pikepdf.Pdf) -> None:
        pdf.Root.AcroForm.Fields[2].FT = pikepdf.Name.Tx

    data = printed(ISSUE, attachments=(NOTE,))
    for spoil, words in (
        (no_font, "font"),
        (no_colour, "OutputIntent"),
        (no_relationship, "AFRelationship"),
        (left_to_reader, "leaves its appearance"),
        (action, "prepared carries an action"),
        (hidden, "checked isn't printed"),
        (bare, "approved has no appearance"),
        (text_field, "approved isn't an empty field to sign"),
    ):
        flaws = spoilt(data, spoil)
        assert any(words in flaw for flaw in flaws), (spoil.__name__, flaws)


def test_what_the_file_says_of_itself() -> None:
    for issue, day in ((None, SAMPLE.data_dated), (ISSUE, "2027-03-01")):
        with pikepdf.open(io.BytesIO(printed(issue))) as pdf:
            packet = pdf.open_metadata()
            assert packet.pdfa_status == "3B"
            assert packet["dc:title"] == str(pdf.docinfo.Title) == f"{SAMPLE.number} {SAMPLE.title}"
            assert packet["dc:language"] == {"en"}
            assert packet["xmp:CreateDate"] == packet["xmp:ModifyDate"] == day
            assert pdf.pdf_version == "1.7"
            assert "/Encrypt" not in pdf.trailer


def test_markup_in_a_title_stays_text() -> None:
    document = replace(SAMPLE, title="Pump <b>&amp; co")
    with pikepdf.open(io.BytesIO(print_pack(document, layout=Layout(), digest=DIGEST))) as pdf:
        assert pdf.open_metadata()["dc:title"] == f"{SAMPLE.number} Pump <b>&amp; co"


def test_every_font_is_a_subset_and_no_page_is_transparent() -> None:
    with pikepdf.open(io.BytesIO(printed(ISSUE))) as pdf:
        names = {
            str(held.BaseFont)
            for held in pdf.objects
            if isinstance(held, pikepdf.Dictionary) and held.get("/Type") == "/Font"
        }
        assert names
        assert all(name[7] == "+" and name[1:7].isupper() for name in names), names
        for page in pdf.pages:
            assert "/Group" not in page
            assert "/ExtGState" not in page.resources


def test_attachments_come_out_as_they_went_in() -> None:
    with pikepdf.open(io.BytesIO(printed(None, attachments=(NOTE, DATA)))) as pdf:
        names = pdf.Root.Names.EmbeddedFiles.Names
        assert [str(names[k]) for k in (0, 2)] == ["Data.json", "note.yaml"]
        assert [file.objgen for file in pdf.Root.AF] == [names[k].objgen for k in (1, 3)]
        for file, wanted in zip(pdf.Root.AF, (DATA, NOTE), strict=True):
            assert file.EF.F.read_bytes() == wanted.data
            assert str(file.EF.F.Subtype) == f"/{wanted.media_type}"
            assert str(file.AFRelationship) == f"/{wanted.relationship}"
            assert int(file.EF.F.Params.Size) == len(wanted.data)


def test_attachments_change_bytes_by_what_they_are_and_not_by_their_order() -> None:
    both = printed(None, attachments=(NOTE, DATA))
    assert printed(None, attachments=(DATA, NOTE)) == both
    assert printed(None, attachments=(DATA, replace(NOTE, data=b"x"))) != both


def test_two_attachments_of_one_name_are_refused() -> None:
    with pytest.raises(ValueError, match="same name"):
        printed(None, attachments=(NOTE, replace(DATA, name=NOTE.name)))


def test_an_issued_pack_has_three_empty_fields_over_its_title_block() -> None:
    (cover,) = [page for page in place(SAMPLE, Layout(), ISSUE, digest=DIGEST) if page.marked("title block")]
    (block,) = cover.marked("title block")
    with pikepdf.open(io.BytesIO(printed(ISSUE))) as pdf:
        form = pdf.Root.AcroForm
        assert [str(field.T) for field in form.Fields] == ["prepared", "checked", "approved"]
        assert "/NeedAppearances" not in form
        page = pdf.pages[cover.number - 1]
        assert [one.objgen for one in page.Annots] == [one.objgen for one in form.Fields]
        edges: list[float] = []
        for field in form.Fields:
            assert (str(field.FT), str(field.Subtype), "/V" in field) == ("/Sig", "/Widget", False)
            left, bottom, right, top = (float(edge) for edge in field.Rect)
            assert block.x <= left < right <= block.x + block.width
            assert block.y <= cover.height - top < cover.height - bottom <= block.y + block.height
            assert right - left > 45 * MM
            assert top - bottom > 7 * MM
            text = [run for run in cover.runs if left < run.x < right and bottom < cover.height - run.y < top]
            assert text == [], "something is printed where the stamp comes"
            beside = [run.text for run in cover.runs if bottom < cover.height - run.y < top and run.x < left]
            assert str(field.T) in beside, "the field isn't in the row of its meaning"
            edges += [top, bottom]
        assert edges == sorted(edges, reverse=True), "fields cover each other"


def test_fields_stand_in_the_structure() -> None:
    with pikepdf.open(io.BytesIO(printed(ISSUE))) as pdf:
        forms = hearing.tree_of(pdf).of("Form")
        fields = list(pdf.Root.AcroForm.Fields)
        assert [one.fields[0].objgen for one in forms] == [field.objgen for field in fields]
        numbers = pdf.Root.StructTreeRoot.ParentTree.Nums
        parents = {int(numbers[k]): numbers[k + 1] for k in range(0, len(numbers), 2)}
        for one, field in zip(forms, fields, strict=True):
            assert parents[int(field.StructParent)].objgen == one.object.objgen
        assert int(pdf.Root.StructTreeRoot.ParentTreeNextKey) == max(parents) + 1


def test_no_fields_in_a_draft_nor_where_it_is_signed_in_ink_nor_without_a_cover() -> None:
    layout = Layout(kinds=(SheetKind.RECORD,))
    for data in (
        printed(None),
        printed(ISSUE, fillable=False),
        print_pack(SAMPLE, layout=layout, digest=DIGEST, issue=ISSUE),
    ):
        with pikepdf.open(io.BytesIO(data)) as pdf:
            assert "/AcroForm" not in pdf.Root
            assert all("/Annots" not in page for page in pdf.pages)


def test_who_needn_t_sign_has_no_field() -> None:
    two = replace(ISSUE, signers=(("prepared", "R. Quillby"), ("approved", "M. Fennick")))
    with pikepdf.open(io.BytesIO(printed(two))) as pdf:
        assert [str(field.T) for field in pdf.Root.AcroForm.Fields] == ["prepared", "approved"]


def test_colorants_are_the_published_ones() -> None:
    """Published: the colorants of sRGB under D50, as in the profiles of IEC 61966-2-1, to four digits."""
    published = ((0.4361, 0.2225, 0.0139), (0.3851, 0.7169, 0.0971), (0.1431, 0.0606, 0.7141))
    for found, wanted in zip(colorants(), published, strict=True):
        assert found == pytest.approx(wanted, abs=2.5e-4)


def test_the_curve_meets_its_published_points() -> None:
    """IEC 61966-2-1: the straight part ends at 0.04045, where the light is 0.0031308; middle grey by hand."""
    assert linear(0.04045) == pytest.approx(0.0031308, abs=1e-7)
    assert linear(0.5) == pytest.approx(0.21404, abs=1e-5)
    assert (linear(0.0), linear(1.0)) == (0.0, pytest.approx(1.0))


def test_another_program_reads_the_profile_as_srgb() -> None:
    """LittleCMS with its own sRGB: colours go through ours and back through its within one step of 255."""
    ours = ImageCms.ImageCmsProfile(io.BytesIO(srgb_profile()))
    theirs = ImageCms.createProfile("sRGB")
    steps = np.stack(np.meshgrid(*[np.arange(0, 256, 51, dtype=np.uint8)] * 3), axis=-1).reshape(6, 36, 3)
    there = ImageCms.profileToProfile(Image.fromarray(steps), ours, theirs)
    assert there is not None
    assert np.abs(np.asarray(there).astype(int) - steps).max() <= 1
