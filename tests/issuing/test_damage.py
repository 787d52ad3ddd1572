"""One changed byte anywhere in an issued pack: never good three times, and the signatures never good."""

from __future__ import annotations

import random

from works import LATER, Works

from sheets.errors import InputError
from sheets.pages.attached import attachments_in
from sheets.seal.signatures import judge_signatures
from sheets.seal.signatures_report import Judgement

FLIPS = 500
WHOLE = 10
"""So many of them are judged by content and register, too, which takes a second each."""


def flipped(data: bytes, seed: int, count: int) -> list[tuple[str, bytes]]:
    chance = random.Random(seed)
    made = []
    for _ in range(count):
        place, bit = chance.randrange(len(data)), chance.randrange(8)
        changed = bytearray(data)
        changed[place] ^= 1 << bit
        made.append((f"byte {place}, bit {bit}", bytes(changed)))
    return made


def test_no_flipped_byte_leaves_the_signatures_good(issued: Works) -> None:
    data = issued.pack.read_bytes()
    trust = [(issued.folder / "keys" / "authority.pem").read_text()]
    assert judge_signatures(data, trust=trust, now=LATER).judgement is Judgement.GOOD
    good = [
        where
        for where, changed in flipped(data, 20261201, FLIPS)
        if judge_signatures(changed, trust=trust, now=LATER).judgement is Judgement.GOOD
    ]
    assert good == []


def test_no_flipped_byte_is_a_bug_to_the_reader_of_attachments(issued: Works) -> None:
    read = 0
    for _, changed in flipped(issued.pack.read_bytes(), 20261201, FLIPS):
        try:
            attachments_in(changed)
        except InputError:
            continue
        read += 1
    assert read > FLIPS / 2


def test_flipped_bytes_are_never_good_as_a_whole(works: Works) -> None:
    judged = 0
    for where, changed in flipped(works.pack.read_bytes(), 7, WHOLE):
        works.pack.write_bytes(changed)
        try:
            found = works.verify()
        except InputError:
            continue
        judged += 1
        assert found.signatures.judgement is not Judgement.GOOD, where
        assert found.content.judgement is not Judgement.GOOD, where
        assert found.currency.judgement is not Judgement.GOOD, where
    assert judged
