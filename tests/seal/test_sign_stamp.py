"""The stamp in a signature's field."""

from __future__ import annotations

import io
from datetime import UTC, datetime, timedelta, timezone

import pikepdf
import pypdfium2
import pytest

from sheets.errors import InputError
from sheets.pages.stamp import stamp_pdf, when_line

WHEN = datetime(2026, 3, 5, 14, 7, 9, tzinfo=timezone(timedelta(hours=-3, minutes=-30)))


def stamp(name: str = "Preparer One", width: float = 160, height: float = 50) -> bytes:
    return stamp_pdf(
        meaning="prepared", name=name, when=WHEN, zone="America/St_Johns", width=width, height=height
    )


def test_it_says_who_as_what_and_when_with_the_zone() -> None:
    page = pypdfium2.PdfDocument(stamp("Ωmega Žižka"))[0]
    assert page.get_size() == (160, 50)
    said = " ".join(page.get_textpage().get_text_range().split())
    assert said == "Ωmega Žižka prepared 2026-03-05 14:07:09 America/St_Johns (UTC-03:30)"


def test_universal_time_is_said_once() -> None:
    assert when_line(datetime(2026, 3, 5, 14, 7, tzinfo=UTC), "UTC") == "2026-03-05 14:07:00 UTC"
    with pytest.raises(ValueError, match="zone"):
        when_line(datetime(2026, 3, 5), "UTC")


def test_same_stamp_same_bytes_and_every_font_embedded_under_a_name_of_its_own() -> None:
    assert stamp() == stamp()
    names: dict[str, bytes] = {}
    for name in ("Preparer One", "Жукова", "Ωmega Žižka"):
        with pikepdf.open(io.BytesIO(stamp(name))) as pdf:
            fonts = list(pdf.pages[0].Resources.Font.values())
            assert fonts
            for font in fonts:
                held = font.FontDescriptor.FontFile2.read_bytes()
                assert font.BaseFont == font.FontDescriptor.FontName
                assert names.setdefault(str(font.BaseFont), held) == held
    assert len(names) > 2


def test_long_names_take_more_lines_and_then_are_refused_by_name() -> None:
    long = "Bartholomew Featherstonehaugh Cholmondeley Marjoribanks"
    assert len(pypdfium2.PdfDocument(stamp(long))) == 1
    with pytest.raises(InputError, match=r"Bartholomew.*doesn't fit into 60 by 20"):
        stamp(long, width=60, height=20)


def test_a_field_of_two_lines_has_the_meaning_beside_the_name() -> None:
    page = pypdfium2.PdfDocument(stamp(width=145, height=22))[0].get_textpage()
    assert page.get_text_range().splitlines() == [
        "Preparer One · prepared",
        "2026-03-05 14:07:09 America/St_Johns (UTC-03:30)",
    ]
