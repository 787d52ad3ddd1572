"""Glyphs, widths and line breaks."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sample_document import CYRILLIC_NAME, GREEK_NAME, LONG_NAME, MARKUP_NAME

from sheets.errors import InputError
from sheets.pages.fonts import Weight, spans, text_width
from sheets.pages.text import fit, fit_cut, style, words, wrap

LATIN = "ÄÖÜäöüßÅåÆæØøÉèêçñÑŁłŃńŐőŰűČčŘřŠšŽžĐđĞğŞşİıȘșȚțÞþ"
SIGNS = "0123456789.,;:!?'\"“”„‚‘’«»()[]{}<>/\\|@#&%‰°²³µ·•–—−+×±=≤≥≠≈√∞→←↑↓½¼…€£§©®_~^`*$Ø"
BODY = style(10)


@pytest.mark.parametrize("weight", list(Weight))
def test_no_sign_of_the_trade_is_missing(weight: Weight) -> None:
    text = LATIN + SIGNS + GREEK_NAME + CYRILLIC_NAME + "ΔΩαβγδηθλμνρστφψω△☐⌀\u00a0\u2009\u202f\u2011"
    assert "".join(span.text for span in spans(text, weight)) == text
    assert all(span.width > 0 for span in spans(text, weight))


def test_the_source_of_each_sign_is_chosen_by_coverage() -> None:
    assert [(span.source, span.text) for span in spans("RV1 Δp ☐△", Weight.REGULAR)] == [
        ("condensed", "RV1 "),
        ("wide", "Δ"),
        ("condensed", "p "),
        ("path", "☐"),
        ("path", "△"),
    ]


@pytest.mark.parametrize("character", ["弁", "\u202e", "\u200b", "😀", "\x07", "\ufffe"])
def test_a_sign_that_no_font_has_is_refused_by_name(character: str) -> None:
    with pytest.raises(InputError) as caught:
        text_width(f"HV2{character}", 10, Weight.BOLD)
    (problem,) = caught.value.problems
    assert f"U+{ord(character):04X}" in problem.where
    assert problem.fix


def test_decomposed_letters_are_composed() -> None:
    assert text_width("e\u0301", 10, Weight.REGULAR) == text_width("é", 10, Weight.REGULAR)


@given(st.text(alphabet="abc MW<>&;ΔЖ0123456789-", max_size=300), st.floats(20, 400))
@settings(max_examples=60, deadline=None)
def test_lines_fit_and_lose_nothing(text: str, width: float) -> None:
    lines = wrap(text, BODY, width)
    assert "".join("".join(lines).split()) == "".join(text.split())
    assert all(BODY.width(line) <= width + 0.001 or len(line) == 1 for line in lines)


def test_a_number_stays_with_its_unit() -> None:
    assert words("Oil at 225 bar, 98 L/min and 65 °C.") == [
        "Oil",
        "at",
        "225 bar,",
        "98 L/min",
        "and",
        "65 °C.",
    ]
    for width in range(30, 200, 7):
        assert not any(
            line.endswith("225") for line in wrap("Oil at up to 225 bar goes through skin", BODY, width)
        )


def test_a_text_fits_into_a_room_of_its_own_width() -> None:
    for text in ("If something reads wrong", MARKUP_NAME, GREEK_NAME):
        assert len(wrap(text, BODY, BODY.width(text) + 4 - 4)) == 1


def test_fit_takes_the_largest_size_and_keeps_every_word() -> None:
    sizes = tuple(style(size) for size in (20, 15, 10))
    assert fit("RV1", width=100, styles=sizes, lines=1)[0].size == 20
    shape, lines = fit(LONG_NAME, width=100, styles=sizes, lines=1)
    assert shape.size == 10
    assert " ".join(lines).split() == LONG_NAME.split()


def test_only_a_cut_ends_in_an_ellipsis_and_stays_in_its_room() -> None:
    shape, lines = fit_cut(LONG_NAME, width=120, styles=(BODY,), lines=2)
    assert len(lines) == 2
    assert lines[-1].endswith("…")
    assert all(shape.width(line) <= 120 for line in lines)
    assert fit_cut("RV1", width=120, styles=(BODY,), lines=2)[1] == ("RV1",)
