"""A register of an older format: refused, brought forward by name, and then as one that was made anew."""

from __future__ import annotations

import pytest
from register_bench import NOON, Meddler, at, told_hash

from sheets.errors import InputError
from sheets.register.chain import Anchor, check_chain
from sheets.register.events import FORMAT
from sheets.register.opening import Place, create_register, is_url, migrate_register, open_register

OPENED = (1, "2031-03-04T12:00:00.000000Z", "Ines Kurz", "opened", "", "", "", '{"format":1}', "0" * 64)
"""The one event of a register of format 1."""
FORMAT_1 = {
    "SQLite": (
        """CREATE TABLE events (
        sequence INTEGER PRIMARY KEY, time TEXT NOT NULL, who TEXT NOT NULL, kind TEXT NOT NULL,
        machine TEXT NOT NULL, document TEXT NOT NULL, record_id TEXT NOT NULL, data TEXT NOT NULL,
        previous TEXT NOT NULL, hash TEXT NOT NULL)""",
        "CREATE INDEX events_document ON events (document, sequence)",
        "CREATE INDEX events_record ON events (record_id, sequence)",
        "CREATE INDEX events_kind ON events (kind, sequence)",
        """CREATE TRIGGER no_update BEFORE UPDATE ON events
        BEGIN SELECT RAISE(ABORT, 'events are never changed'); END""",
        """CREATE TRIGGER no_delete BEFORE DELETE ON events
        BEGIN SELECT RAISE(ABORT, 'events are never removed'); END""",
        """CREATE TRIGGER only_append BEFORE INSERT ON events
        WHEN NEW.sequence IS NOT (SELECT coalesce(max(sequence), 0) + 1 FROM events)
          OR NEW.previous IS NOT coalesce((SELECT hash FROM events ORDER BY sequence DESC LIMIT 1), '"""
        + "0" * 64
        + """')
        BEGIN SELECT RAISE(ABORT, 'events are only added at the end'); END""",
        "PRAGMA application_id = 1245793614",
        "PRAGMA user_version = 1",
    ),
    "PostgreSQL": ("DROP INDEX events_machine", "UPDATE head SET format = 1"),
}
"""Format 1 as it was written into files: frozen here, whatever the program does now.

In PostgreSQL no register was ever of format 1; there it is the one of today, without what format 2 brought.
"""


@pytest.fixture
def old(place: Place, database: str) -> Place:
    if is_url(place):
        create_register(place, by="Ines Kurz", when=NOON).close()
    with Meddler(place) as other:
        for statement in FORMAT_1[database]:
            other.run(statement)
        if not is_url(place):
            values = ", ".join(f"'{value}'" if isinstance(value, str) else str(value) for value in OPENED)
            other.run(f"INSERT INTO events VALUES ({values}, '{told_hash(OPENED)}')")
    return place


def anchor_of(place: Place) -> Anchor:
    with open_register(place) as register:
        last = check_chain(register).last
    assert last is not None
    return last


def test_it_is_refused_until_it_is_migrated_by_name(old: Place) -> None:
    for read_only in (True, False):
        with pytest.raises(InputError, match=r"format 1; .* format 2[^M]*jamnut migrate"):
            open_register(old, read_only=read_only)


def test_it_comes_forward_with_all_its_events_and_one_that_tells_it(old: Place) -> None:
    assert migrate_register(old, by="Ines Kurz", when=at(1)) == (1, FORMAT)
    with open_register(old) as register:
        assert check_chain(register).holds
        with register.reading() as view:
            events = list(view.events())
    assert [event.kind for event in events] == ["opened", "migrated"]
    assert events[1].facts == {"from": 1, "to": FORMAT}
    if not is_url(old):
        assert events[0].hash == told_hash(OPENED)  # nothing was written anew


def test_it_ends_as_one_that_was_made_anew(old: Place) -> None:
    """What opening compares: the same tables, indices and guards."""
    migrate_register(old, by="Ines Kurz", when=at(1))
    open_register(old).close()


def test_one_of_this_format_stays_as_it_is(place: Place) -> None:
    create_register(place, by="Ines Kurz", when=NOON).close()
    before = anchor_of(place)
    assert migrate_register(place, by="Ines Kurz", when=at(1)) == (FORMAT, FORMAT)
    assert anchor_of(place) == before


@pytest.mark.parametrize("statement", ["CREATE TABLE more (x integer)", "DROP INDEX events_kind"])
def test_an_altered_one_is_never_brought_forward(old: Place, statement: str) -> None:
    with Meddler(old) as other:
        other.run(statement)
    with pytest.raises(InputError, match="altered"):
        migrate_register(old, by="Ines Kurz", when=at(1))


def test_what_breaks_off_leaves_the_old_one(old: Place) -> None:
    with pytest.raises(InputError, match="name of the person"):
        migrate_register(old, by="", when=at(1))  # told last, when the tables are built already
    with pytest.raises(InputError, match="format 1"):
        open_register(old)
