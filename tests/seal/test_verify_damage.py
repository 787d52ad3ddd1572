"""One byte changed anywhere in a signed pack: never a good word."""

from __future__ import annotations

import random

import pytest
from signing_bench import judged, signed_pack

from sheets.seal.signatures_bytes import signed_ranges
from sheets.seal.signatures_report import Judgement

BATCHES = 4
"""So that several processes share them."""


def flipped(pdf: bytes, position: int, mask: int) -> bytes:
    return pdf[:position] + bytes((pdf[position] ^ mask,)) + pdf[position + 1 :]


@pytest.mark.parametrize("batch", range(BATCHES))
def test_any_of_500_bytes(batch: int) -> None:
    pdf = signed_pack()
    chance = random.Random(1 + batch)
    for _ in range(500 // BATCHES):
        position, mask = chance.randrange(len(pdf)), 1 << chance.randrange(8)
        assert judged(flipped(pdf, position, mask)).judgement is not Judgement.GOOD, (position, mask)


@pytest.mark.parametrize("batch", range(BATCHES))
def test_every_byte_of_the_last_gap(batch: int) -> None:
    """Its digits, their case, its brackets and its padding: no signature covers them."""
    pdf = signed_pack()
    last = signed_ranges(pdf)[-1]
    chance = random.Random(5 + batch)
    for position in range(last.gap_start + batch, last.gap_end, BATCHES):
        mask = 1 << chance.randrange(8)
        assert judged(flipped(pdf, position, mask)).judgement is not Judgement.GOOD, (position, mask)


def test_every_digit_of_the_last_gap_in_the_other_case() -> None:
    """Small digits would be the same container to every reader."""
    pdf = signed_pack()
    last = signed_ranges(pdf)[-1]
    letters = [place for place in range(last.gap_start, last.gap_end) if pdf[place : place + 1].isalpha()]
    assert len(letters) > 100
    for position in letters[::20]:
        assert judged(flipped(pdf, position, 0x20)).judgement is not Judgement.GOOD, position


def test_the_same_digits_elsewhere_in_the_gap() -> None:
    """A change of two bytes that keeps every digit: the container is moved by one byte."""
    pdf = signed_pack()
    last = signed_ranges(pdf)[-1]
    inside = pdf[last.gap_start + 1 : last.gap_end - 1]
    moved = pdf[: last.gap_start + 1] + inside[-2:] + inside[:-2] + pdf[last.gap_end - 1 :]
    assert judged(moved).judgement is not Judgement.GOOD
