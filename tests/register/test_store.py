"""The register as a file: what opens, what doesn't and why, and that nothing in it is ever changed."""

from __future__ import annotations

import os
import sqlite3
import threading
from collections.abc import Callable
from pathlib import Path

import pytest
from register_bench import NOON, rehash
from sqlalchemy.exc import SQLAlchemyError

from sheets.errors import InputError
from sheets.register.chain import check_chain
from sheets.register.currency import Standing, currency_of
from sheets.register.events import Entry, EventKind
from sheets.register.finding import document_revisions
from sheets.register.issuing import Reservation
from sheets.register.opening import Place, create_register, open_register
from sheets.register.revisions import Revision
from sheets.register.sqlite import APPLICATION_ID
from sheets.register.store import LARGEST_DATA, Register


def entry(who: str = "Ines Kurz", **data: object) -> Entry:
    return Entry(when=NOON, who=who, kind=EventKind.VOIDED, data=data)


@pytest.mark.usefixtures("path")
def test_full_sync_and_a_journal_that_stays_with_the_file(register: Register) -> None:
    """TRUNCATE with FULL syncs the journal once more after the commit: SQLite's documentation of both."""
    with register.writing() as writer:
        pragma = writer._connection.exec_driver_sql
        assert pragma("PRAGMA synchronous").scalar_one() == 2
        assert pragma("PRAGMA journal_mode").scalar_one() == "truncate"


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE events SET who = 'x' WHERE sequence = 1",
        "DELETE FROM events WHERE sequence = 1",
        "INSERT OR REPLACE INTO events SELECT * FROM events WHERE sequence = 1",
        "INSERT INTO events SELECT 7, time, who, kind, machine, document, record_id, data, hash, hash"
        " FROM events",
        "INSERT INTO events SELECT 2, time, who, kind, machine, document, record_id, data, '', hash"
        " FROM events",
        "INSERT INTO events SELECT NULL, time, who, kind, machine, document, record_id, data, hash, hash"
        " FROM events",
    ],
)
def test_the_file_itself_refuses_change(register: Register, path: Path, statement: str) -> None:
    before = check_chain(register).last
    database = sqlite3.connect(path)
    with pytest.raises(sqlite3.IntegrityError, match="events are"):
        database.execute(statement)
    database.close()
    assert check_chain(register).last == before


def test_a_block_that_raises_leaves_nothing(register: Register) -> None:
    class OnPurposeError(Exception):
        pass

    def stopped() -> None:
        with register.writing() as writer:
            writer.append(entry())
            raise OnPurposeError

    with pytest.raises(OnPurposeError):
        stopped()
    with register.reading() as view:
        assert [event.kind for event in view.events()] == ["opened"]


def test_a_view_stays_as_it_was(register: Register, path: Path) -> None:
    with open_register(path, wait_s=0.1) as other, register.reading() as view:
        first = view.last()
        with pytest.raises(InputError, match="using the register"), other.writing() as writer:
            writer.append(entry())
        assert view.last() == first


def test_more_than_a_page_of_events_comes_in_order(register: Register) -> None:
    with register.writing() as writer:
        for _ in range(2500):
            writer.append(entry())
    with register.reading() as view:
        assert [event.sequence for event in view.events()] == list(range(1, 2502))
        assert [event.sequence for event in view.events(after=1999)] == list(range(2000, 2502))
    assert check_chain(register).holds


def test_missing(path: Path) -> None:
    with pytest.raises(InputError, match="no register there"):
        open_register(path)
    with pytest.raises(InputError, match="can't be opened"):
        create_register(path / "deeper" / "file", by="Ines Kurz", when=NOON)


@pytest.mark.parametrize(
    "content",
    [b"", b"name: kiln pusher\n", b"\x00" * 4096, b"SQLite format 3\x00" + b"\xff" * 2000, os.urandom(3000)],
    ids=["empty", "text", "zeros", "only the head", "random"],
)
@pytest.mark.parametrize("read_only", [True, False])
def test_no_register(path: Path, content: bytes, read_only: bool) -> None:
    path.write_bytes(content)
    with pytest.raises(InputError, match="no register"):
        open_register(path, read_only=read_only)
    assert path.read_bytes() == content


def test_another_programs_database(path: Path) -> None:
    with sqlite3.connect(path) as database:
        database.execute("CREATE TABLE events (sequence INTEGER PRIMARY KEY)")
    database.close()
    with pytest.raises(InputError, match="no register"):
        open_register(path)


def test_a_newer_format_is_refused(register: Register, path: Path) -> None:
    register.close()
    with sqlite3.connect(path) as database:
        database.execute("PRAGMA user_version = 3")
    database.close()
    with pytest.raises(InputError, match="format 3; this version reads up to format 2"):
        open_register(path)


@pytest.mark.parametrize(
    "statement",
    [
        "DROP TRIGGER no_delete",
        "DROP INDEX events_kind",
        "CREATE TABLE more (x)",
        "PRAGMA user_version = 0",
        "CREATE TRIGGER quiet AFTER INSERT ON events BEGIN SELECT 1; END",
    ],
)
def test_altered_guards_are_refused(register: Register, path: Path, statement: str) -> None:
    register.close()
    with sqlite3.connect(path) as database:
        database.execute(statement)
    database.close()
    with pytest.raises(InputError, match="altered"):
        open_register(path, read_only=True)


def test_nothing_is_made_over_what_stands_there(register: Register, path: Path) -> None:
    register.close()
    before = path.read_bytes()
    with pytest.raises(InputError, match="stands there already"):
        create_register(path, by="Ines Kurz", when=NOON)
    assert path.read_bytes() == before
    assert sqlite3.connect(path).execute("PRAGMA application_id").fetchone() == (APPLICATION_ID,)


def test_an_empty_file_is_what_a_stopped_making_leaves(path: Path) -> None:
    path.touch()
    with create_register(path, by="Ines Kurz", when=NOON) as made:
        assert check_chain(made).holds


def test_signs_of_an_address_in_the_name_of_the_file(tmp_path: Path) -> None:
    odd = tmp_path / "a?mode=memory#b %41 é.register"
    create_register(odd, by="Ines Kurz", when=NOON).close()
    assert [file.name for file in tmp_path.iterdir() if not file.name.endswith("-journal")] == [odd.name]
    with open_register(odd, read_only=True) as opened:
        assert check_chain(opened).holds


def test_locked_by_another_program(path: Path, register: Register) -> None:
    other = sqlite3.connect(path, isolation_level=None)
    other.execute("BEGIN IMMEDIATE")
    with open_register(path, wait_s=0.05) as waiting:
        with pytest.raises(InputError, match="using the register"), waiting.writing():
            pass
        assert check_chain(waiting).holds  # reading goes on while somebody prepares to write
    other.close()
    with register.writing() as writer:
        assert writer.append(entry()).sequence == 2


@pytest.fixture
def nobody_writes(path: Path) -> Callable[[], None]:
    def close_up() -> None:
        for journal in path.parent.glob("*-journal"):
            journal.unlink()
        path.chmod(0o444)

    return close_up


def test_a_read_only_file_in_a_read_only_folder_can_be_read(
    register: Register, path: Path, issue: Callable[..., Revision], nobody_writes: Callable[[], None]
) -> None:
    revision = issue()
    register.close()
    nobody_writes()
    path.parent.chmod(0o555)
    try:
        with open_register(path, read_only=True) as opened:
            assert currency_of(opened, revision.record_id).standing is Standing.CURRENT
            with pytest.raises(InputError, match="can't be written to"), opened.writing() as writer:
                writer.append(entry())
        assert [file.name for file in path.parent.iterdir()] == [path.name]
    finally:
        path.parent.chmod(0o755)


@pytest.mark.parametrize(
    ("who", "wrong"),
    [
        ("", "empty"),
        ("   ", "empty"),
        (" Ines", "Take that blank away"),
        ("Ines\nKurz", "printed"),
        ("Ines\x00", "printed"),
        ("Ines \u202egnorw", "printed"),
        ("Ines \ud800", "printed"),
        ("I" * 201, "201 characters"),
    ],
)
def test_names_that_cannot_stand_in_an_event(register: Register, who: str, wrong: str) -> None:
    with pytest.raises(InputError, match=wrong), register.writing() as writer:
        writer.append(entry(who=who))
    assert check_chain(register).last.sequence == 1


def test_data_have_a_limit_and_no_floats(register: Register) -> None:
    with pytest.raises(InputError, match="at most"), register.writing() as writer:
        writer.append(entry(reason="x" * LARGEST_DATA))
    for value in (1.5, float("nan"), 2**53, b"x", {"é": 1}, {1: 2}, {"a": {"b": 0.0}}, "\ud800"):
        with pytest.raises(ValueError, match=r"canonical|surrogates"), register.writing() as writer:
            writer.append(entry(value=value))
    assert check_chain(register).last.sequence == 1


def test_a_time_without_a_zone_is_a_bug_of_the_caller(register: Register) -> None:
    naive = Entry(when=NOON.replace(tzinfo=None), who="Ines Kurz", kind=EventKind.VOIDED)
    with pytest.raises(ValueError, match="zone"), register.writing() as writer:
        writer.append(naive)


HOSTILE = {
    "data no JSON": ("reserved", "data = '{'"),
    "data a list": ("reserved", "data = '[]'"),
    "data not canonical": ("reserved", "data = '{\"revision\": 1}'"),
    "data deep": ("reserved", f"data = '{'[' * 50_000}'"),
    "data endless number": ("reserved", f"data = '{{\"revision\":{'1' * 18_000}}}'"),
    "revision true": ("reserved", "data = '{\"revision\":true}'"),
    "revision 2": ("reserved", "data = '{\"revision\":2}'"),
    "time": ("reserved", "time = 'noon'"),
    "time without zone": ("reserved", "time = '2031-03-04T12:00:00'"),
    "issued twice": ("signed", "kind = 'issued', data = (SELECT data FROM events WHERE kind = 'issued')"),
    "another machine": ("issued", "machine = 'KP-3'"),
    "signer a number": ("issued", "data = replace(data, '\"signers\":[', '\"signers\":[7,')"),
    "engine a text": ("issued", 'data = replace(data, \'"engine":3\', \'"engine":"3"\')'),
    "no content": ("issued", "data = replace(data, '\"file\":', '\"fill\":')"),
}
"""Kind of event, and what another program wrote into it before it computed all hashes anew."""


@pytest.mark.parametrize(("kind", "change"), HOSTILE.values(), ids=HOSTILE.keys())
def test_events_that_another_program_wrote_are_told_and_never_believed(
    register: Register,
    issue: Callable[..., Revision],
    meddle: Callable[..., None],
    place: Place,
    kind: str,
    change: str,
) -> None:
    revision = issue()
    meddle(f"UPDATE events SET {change} WHERE kind = '{kind}'")
    rehash(place, 1)
    with pytest.raises(InputError, match="contradicts itself"):
        document_revisions(register, revision.document)
    currency = currency_of(register, revision.record_id)
    assert currency.chain.holds
    assert currency.standing is Standing.NOT_ESTABLISHED
    assert "contradicts itself" in currency.trouble


@pytest.mark.usefixtures("path")
@pytest.mark.parametrize("value", ["x'ff'", "CAST(x'ff' AS TEXT)"])
def test_a_field_that_is_no_text(
    register: Register, issue: Callable[..., Revision], meddle: Callable[..., None], value: str
) -> None:
    revision = issue()
    meddle(f"UPDATE events SET who = {value} WHERE kind = 'reserved'")
    with pytest.raises(InputError, match="isn't text in UTF-8"):
        document_revisions(register, revision.document)
    assert currency_of(register, revision.record_id).standing is Standing.NOT_ESTABLISHED


def test_a_flipped_byte_anywhere_is_never_read_as_whole(
    register: Register, issue: Callable[..., Revision], path: Path
) -> None:
    """Every 97th byte: an error by name, a chain that doesn't hold, or the same events as before."""
    revision = issue()
    with register.reading() as view:
        whole = list(view.events())
    register.close()
    content = path.read_bytes()
    seen = {"error": 0, "broken": 0, "same": 0}
    for place in range(0, len(content), 97):
        path.write_bytes(content[:place] + bytes([content[place] ^ 0x55]) + content[place + 1 :])
        try:
            with open_register(path, read_only=True) as opened:
                if not check_chain(opened).holds:
                    seen["broken"] += 1
                    continue
                with opened.reading() as view:
                    assert list(view.events()) == whole, place
                seen["same"] += 1
                standing = currency_of(opened, revision.record_id).standing
                assert standing in (Standing.CURRENT, Standing.UNKNOWN, Standing.NOT_ESTABLISHED)
        except InputError:
            seen["error"] += 1
    assert min(seen.values()) > 0, seen


def test_one_register_serves_several_threads(register: Register, hold: Callable[..., Reservation]) -> None:
    failed: list[Exception] = []

    def work(document: str) -> None:
        try:
            for _ in range(5):
                hold(document)
        except (InputError, SQLAlchemyError) as error:
            failed.append(error)

    threads = [threading.Thread(target=work, args=(f"WI-{number}",)) for number in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failed == []
    assert check_chain(register).holds
    assert {len(document_revisions(register, f"WI-{number}")) for number in range(4)} == {5}
