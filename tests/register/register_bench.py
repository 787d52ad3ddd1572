"""Times, digests and another program's meddling, for the register's tests."""

from __future__ import annotations

import hashlib
import json
import re
import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, datetime, timedelta
from typing import Any, Self

import psycopg

from sheets.register.kept import Kept
from sheets.register.opening import Place, is_url
from sheets.register.rows import Row

NOON = datetime(2031, 3, 4, 12, tzinfo=UTC)
CONTENT, MACHINE = "0123456789ABCDEF", "FEDCBA9876543210"
FILE = "ab" * 32
FIELDS = "sequence, time, who, kind, machine, document, record_id, data, previous"


KEPT = Kept(
    rows=(
        Row(
            row=1,
            adjuster="RV1",
            called="RV1",
            gauge="G1",
            test_point="TP1",
            unit="bar",
            target="206",
            low="202",
            high="210",
            never_exceed="250",
            ladder_low="198",
            ladder_high="230",
            drift_low="185",
            drift_high="227",
            gauge_error="2.50",
        ),
        Row(
            row=2,
            adjuster="PU1.compensator",
            called="PU1, compensator",
            gauge="G1",
            test_point="TP1",
            unit="bar",
            target="190",
            low="186",
            high="194",
            never_exceed="250",
            ladder_low="150",
            ladder_high="202",
            drift_low="171",
            drift_high="209",
            gauge_error="2.50",
        ),
    ),
    task="set",
    paper="A4",
    unit="bar",
    zero_limit="2.00",
    machine="format: 1\n",
    content="{}",
)
"""Two rows as a sheet prints them. What is read lies, for the relief, in its window from 202 to 210, in the
order of limits from 198 to 230, and under 250."""


def at(minutes: int) -> datetime:
    return NOON + timedelta(minutes=minutes)


def told_hash(row: tuple[object, ...]) -> str:
    """The hash by its description: SHA-256 of a compact JSON list of the mark and all fields."""
    listed = ["jamnut register 1", *row]
    return hashlib.sha256(json.dumps(listed, ensure_ascii=False, separators=(",", ":")).encode()).hexdigest()


class Meddler:
    """Another program at the database of a register, past all of ours. Values are named: ``:hash``."""

    def __init__(self, place: Place) -> None:
        self.place = place
        self.postgres = is_url(place)

    def __enter__(self) -> Self:
        if self.postgres:
            self.connection: Any = psycopg.connect(str(self.place), options="-c search_path=jamnut")
        else:
            self.connection = sqlite3.connect(self.place)
        return self

    def __exit__(self, *_: object) -> None:
        self.connection.commit()
        self.connection.close()

    def run(self, statement: str, **values: object) -> list[tuple[Any, ...]]:
        """Rows that a statement gives."""
        if self.postgres:
            named = re.sub(r"(?<!:):(\w+)", r"%(\1)s", statement) if values else statement
            found = self.connection.execute(named, values or None)
            return found.fetchall() if found.description else []
        return self.connection.execute(statement, values).fetchall()


@contextmanager
def unguarded(place: Place) -> Iterator[Meddler]:
    """The database without its guards; they are back at the end."""
    with Meddler(place) as other:
        if other.postgres:
            other.run("ALTER TABLE events DISABLE TRIGGER USER")
            yield other
            other.run("ALTER TABLE events ENABLE TRIGGER USER")
            return
        guards = dict(other.run("SELECT name, sql FROM sqlite_master WHERE type = 'trigger'"))
        assert set(guards) == {"no_update", "no_delete", "only_append"}
        for guard in guards:
            other.run(f"DROP TRIGGER {guard}")
        yield other
        for sql in guards.values():
            other.run(sql)


def rehash(place: Place, start: int) -> None:
    """What an administrator can do: write every hash anew from one event on."""
    with unguarded(place) as database:
        previous = "0" * 64
        for row in database.run(f"SELECT {FIELDS} FROM events ORDER BY sequence"):
            if row[0] >= start:
                fresh = (*row[:-1], previous)
                previous_hash = told_hash(fresh)
                database.run(
                    "UPDATE events SET previous = :previous, hash = :hash WHERE sequence = :sequence",
                    previous=previous,
                    hash=previous_hash,
                    sequence=row[0],
                )
            query = "SELECT hash FROM events WHERE sequence = :sequence"
            ((previous,),) = database.run(query, sequence=row[0])
