"""The chain check names the first event that doesn't hold, for each way of meddling."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from register_bench import FIELDS, Meddler, rehash, told_hash

from sheets.errors import InputError
from sheets.register.chain import Anchor, Break, check_chain
from sheets.register.opening import Place
from sheets.register.revisions import Revision
from sheets.register.store import Register


@pytest.fixture
def kept(register: Register, issue: Callable[..., Revision]) -> Anchor:
    """Nine events, and the last of them as an anchor."""
    issue()
    issue(content="0000000000000000")
    verdict = check_chain(register)
    assert verdict.holds
    assert verdict.last is not None
    assert verdict.last.sequence == 9
    return verdict.last


def test_a_whole_chain_holds_and_says_whether_an_anchor_was_seen(register: Register, kept: Anchor) -> None:
    assert not check_chain(register).anchored
    verdict = check_chain(register, kept)
    assert verdict.holds
    assert verdict.anchored


@pytest.mark.usefixtures("kept")
def test_hashes_are_those_of_the_description(place: Place) -> None:
    with Meddler(place) as database:
        for *row, found in database.run(f"SELECT {FIELDS}, hash FROM events"):
            assert found == told_hash(tuple(row))


MEDDLING = {
    "data changed": (["UPDATE events SET data = '{\"revision\":2}' WHERE sequence = 2"], Break.CHANGED, 2),
    "name changed": (["UPDATE events SET who = 'Olaf Brenner' WHERE sequence = 5"], Break.CHANGED, 5),
    "time changed": (["UPDATE events SET time = replace(time, '12', '11')"], Break.CHANGED, 1),
    "event removed": (["DELETE FROM events WHERE sequence = 4"], Break.MISSING, 4),
    "first removed": (["DELETE FROM events WHERE sequence = 1"], Break.MISSING, 1),
    "all removed": (["DELETE FROM events"], Break.MISSING, 1),
    "removed and closed up": (
        [
            "DELETE FROM events WHERE sequence = 4",
            "UPDATE events SET sequence = sequence - 1 WHERE sequence > 4",
        ],
        Break.CHANGED,
        4,
    ),
    "reordered": (
        [
            "UPDATE events SET sequence = 99 WHERE sequence = 3",
            "UPDATE events SET sequence = 3 WHERE sequence = 4",
            "UPDATE events SET sequence = 4 WHERE sequence = 99",
        ],
        Break.CHANGED,
        3,
    ),
    "hash changed": (
        ["UPDATE events SET hash = 'none'"],
        Break.CHANGED,
        1,
    ),
    "appended with a wrong hash": (
        [
            "INSERT INTO events SELECT 10, time, who, kind, machine, document, record_id, data, hash,"
            " replace(hash, 'a', 'b') FROM events WHERE sequence = 9"
        ],
        Break.CHANGED,
        10,
    ),
}
UNTYPED = {
    "bytes for text": "x'31'",
    "bytes that aren't UTF-8": "CAST(x'ff80' AS TEXT)",
}
"""What SQLite keeps and PostgreSQL doesn't."""


@pytest.mark.usefixtures("kept")
@pytest.mark.parametrize(("statements", "wrong", "at"), MEDDLING.values(), ids=MEDDLING.keys())
def test_the_first_broken_event_is_named(
    register: Register,
    meddle: Callable[..., None],
    statements: list[str],
    wrong: Break,
    at: int,
) -> None:
    meddle(*statements)
    verdict = check_chain(register)
    assert (verdict.broken, verdict.broken_at) == (wrong, at)
    assert not verdict.holds


@pytest.mark.usefixtures("kept", "path")
@pytest.mark.parametrize("value", UNTYPED.values(), ids=UNTYPED.keys())
def test_an_event_that_is_no_text_is_named(
    register: Register, meddle: Callable[..., None], value: str
) -> None:
    meddle(f"UPDATE events SET who = {value} WHERE sequence = 6")
    verdict = check_chain(register)
    assert (verdict.broken, verdict.broken_at) == (Break.UNREADABLE, 6)


@pytest.mark.usefixtures("kept")
def test_an_event_with_a_right_hash_on_another_one_is_unlinked(
    register: Register, place: Place, meddle: Callable[..., None]
) -> None:
    meddle("UPDATE events SET previous = 'none' WHERE sequence = 5")
    with Meddler(place) as database:
        (row,) = database.run(f"SELECT {FIELDS} FROM events WHERE sequence = 5")
    meddle("UPDATE events SET hash = :hash WHERE sequence = 5", hash=told_hash(row))
    verdict = check_chain(register)
    assert (verdict.broken, verdict.broken_at) == (Break.UNLINKED, 5)


@pytest.mark.usefixtures("kept")
def test_a_second_opening_breaks_the_chain(
    register: Register, place: Place, meddle: Callable[..., None]
) -> None:
    meddle("UPDATE events SET kind = 'opened' WHERE sequence = 5")
    rehash(place, 5)
    verdict = check_chain(register)
    assert (verdict.broken, verdict.broken_at) == (Break.NOT_OPENED, 5)


def test_only_the_anchor_shows_an_end_that_was_cut_off(
    register: Register, kept: Anchor, meddle: Callable[..., None]
) -> None:
    meddle("DELETE FROM events WHERE sequence > 6")
    assert check_chain(register).holds
    verdict = check_chain(register, kept)
    assert (verdict.broken, verdict.broken_at) == (Break.CUT, 7)
    assert not verdict.anchored


def test_only_the_anchor_shows_a_chain_that_was_written_anew(
    register: Register, kept: Anchor, place: Place, meddle: Callable[..., None]
) -> None:
    meddle("UPDATE events SET who = 'Olaf Brenner' WHERE sequence = 3")
    rehash(place, 3)
    assert check_chain(register).holds
    verdict = check_chain(register, kept)
    assert (verdict.broken, verdict.broken_at) == (Break.REWRITTEN, 9)


def test_of_several_anchors_the_first_that_differs_is_named(register: Register, kept: Anchor) -> None:
    wrong = Anchor(sequence=4, hash="0" * 64)
    assert check_chain(register, kept, wrong).broken_at == 4


def test_anchor_as_text_and_back(kept: Anchor) -> None:
    assert Anchor.read(f" {kept}\n") == kept


@pytest.mark.parametrize(
    "text", ["", "9", "0:" + "a" * 64, "9:" + "A" * 64, "9:" + "a" * 63, "٣:" + "a" * 64]
)
def test_what_is_no_anchor_is_refused(text: str) -> None:
    with pytest.raises(InputError, match="no anchor"):
        Anchor.read(text)
