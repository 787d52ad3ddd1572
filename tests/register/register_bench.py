"""Times, digests and another program's meddling, for the register's tests."""

from __future__ import annotations

import hashlib
import json
import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, datetime, timedelta
from pathlib import Path

NOON = datetime(2031, 3, 4, 12, tzinfo=UTC)
CONTENT, MACHINE = "0123456789ABCDEF", "FEDCBA9876543210"
FILE = "ab" * 32
FIELDS = "sequence, time, who, kind, machine, document, record_id, data, previous"


def at(minutes: int) -> datetime:
    return NOON + timedelta(minutes=minutes)


def told_hash(row: tuple[object, ...]) -> str:
    """The hash by its description: SHA-256 of a compact JSON list of the mark and all fields."""
    listed = ["jamnut register 1", *row]
    return hashlib.sha256(json.dumps(listed, ensure_ascii=False, separators=(",", ":")).encode()).hexdigest()


@contextmanager
def unguarded(path: Path) -> Iterator[sqlite3.Connection]:
    """The file without its guards; they are back at the end."""
    database = sqlite3.connect(path)
    guards = dict(database.execute("SELECT name, sql FROM sqlite_master WHERE type = 'trigger'"))
    assert set(guards) == {"no_update", "no_delete", "only_append"}
    for guard in guards:
        database.execute(f"DROP TRIGGER {guard}")
    yield database
    for sql in guards.values():
        database.execute(sql)
    database.commit()
    database.close()


def rehash(path: Path, start: int) -> None:
    """What an administrator can do: write every hash anew from one event on."""
    with unguarded(path) as database:
        previous = "0" * 64
        for row in database.execute(f"SELECT {FIELDS} FROM events ORDER BY sequence").fetchall():
            if row[0] >= start:
                fresh = (*row[:-1], previous)
                values = (previous, told_hash(fresh), row[0])
                database.execute("UPDATE events SET previous = ?, hash = ? WHERE sequence = ?", values)
            query = "SELECT hash FROM events WHERE sequence = ?"
            (previous,) = database.execute(query, (row[0],)).fetchone()
