"""A register in an SQLite file: the embedded default.

Rollback journal and full sync: an event that was acknowledged is on the disk. A write-ahead log would be
faster, but it doesn't work in a folder on the network, a read-only copy of the file couldn't be opened, and a
copy made by hand would lack the last events.
"""

from __future__ import annotations

import contextlib
import sqlite3
from collections.abc import Callable
from functools import partial
from pathlib import Path
from typing import Final

from sqlalchemy import create_engine
from sqlalchemy.engine import Connection
from sqlalchemy.exc import DBAPIError
from sqlalchemy.pool import QueuePool

from sheets.errors import Problem
from sheets.register.database import BUSY, DISK, NO_REGISTER, Database
from sheets.register.events import NO_EVENT

APPLICATION_ID: Final = 0x4A414D4E
"""In the file's head: tells a register from another SQLite file ("JAMN")."""

_STEPS: Final = {
    1: (
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
        # INSERT OR REPLACE would remove an event without a word to the trigger above.
        """CREATE TRIGGER only_append BEFORE INSERT ON events
        WHEN NEW.sequence IS NOT (SELECT coalesce(max(sequence), 0) + 1 FROM events)
          OR NEW.previous IS NOT coalesce((SELECT hash FROM events ORDER BY sequence DESC LIMIT 1), '"""
        + NO_EVENT
        + """')
        BEGIN SELECT RAISE(ABORT, 'events are only added at the end'); END""",
    ),
    2: (
        # Work at a machine is asked for by machine: readings, locks, tags.
        "CREATE INDEX events_machine ON events (machine, sequence)",
    ),
}


class SqliteFile(Database):
    """A file, by its path."""

    steps = _STEPS

    def __init__(self, path: Path, *, mode: str, wait_s: float) -> None:
        """``mode``: ro, rw, or rwc to make it; ``wait_s``: seconds that a writer waits for another one."""
        self.where = str(path)
        self._path, self._mode, self._wait_s = path, mode, wait_s
        connect: Callable[[], sqlite3.Connection] = partial(_connect, path, mode=mode, wait_s=wait_s)
        self.engine = create_engine("sqlite://", creator=connect, poolclass=QueuePool)

    def begin_view(self, connection: Connection) -> None:
        """Where a program was stopped while it wrote, its half is taken back: a reader alone can't."""
        if self._mode == "ro" and self._left_half():
            with contextlib.suppress(sqlite3.Error):  # in a folder that can't be written to, reading tells
                writer = _connect(self._path, mode="rw", wait_s=self._wait_s)
                try:
                    writer.execute("SELECT count(*) FROM sqlite_master").fetchall()
                finally:
                    writer.close()
        connection.exec_driver_sql("BEGIN")

    def _left_half(self) -> bool:
        """Whether a journal stands beside the file: of a program that writes just now, or was stopped."""
        try:
            return self._path.with_name(f"{self._path.name}-journal").stat().st_size > 0
        except OSError:
            return False

    def begin_turn(self, connection: Connection) -> None:
        connection.exec_driver_sql("BEGIN IMMEDIATE")

    def check_empty(self, connection: Connection) -> None:
        """Once the turn is ours: another program may have been faster."""
        if connection.exec_driver_sql("SELECT count(*) FROM sqlite_master").scalar_one():
            raise self.taken()

    def mark_format(self, connection: Connection, number: int) -> None:
        connection.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.exec_driver_sql(f"PRAGMA user_version = {number}")

    def format_of(self, connection: Connection) -> int:
        if connection.exec_driver_sql("PRAGMA application_id").scalar_one() != APPLICATION_ID:
            raise self.no_register()
        return int(connection.exec_driver_sql("PRAGMA user_version").scalar_one())

    def altered(self, connection: Connection, number: int) -> bool:
        """SQLite keeps the statement that made each thing: these must be ours, all and no other."""
        found = connection.exec_driver_sql(
            "SELECT sql FROM sqlite_master WHERE name NOT LIKE 'sqlite\\_%' ESCAPE '\\'"
        )
        ours = sorted(text for step, texts in _STEPS.items() if step <= number for text in texts)
        return sorted(str(text) for text in found.scalars()) != ours

    def problem_of(self, error: Exception) -> Problem | None:
        origin = error.orig if isinstance(error, DBAPIError) else error
        code = getattr(origin, "sqlite_errorcode", None) if isinstance(origin, sqlite3.Error) else None
        if code is None or code & 0xFF not in _SAYINGS:
            return None
        what, fix = _SAYINGS[code & 0xFF]
        return Problem(where=self.where, what=what, fix=fix)


def _connect(path: Path, *, mode: str, wait_s: float) -> sqlite3.Connection:
    database = sqlite3.connect(
        f"{path.resolve().as_uri()}?mode={mode}",
        uri=True,
        timeout=wait_s,
        isolation_level=None,  # transactions begin where we say so
        check_same_thread=False,  # the pool hands a connection to one thread at a time
    )
    try:
        # Bytes that aren't UTF-8 must reach the chain check, which names the event.
        database.text_factory = partial(str, encoding="utf-8", errors="surrogateescape")
        database.execute("PRAGMA trusted_schema = OFF")
        if mode == "ro":
            database.execute("PRAGMA query_only = ON")
        else:
            database.execute("PRAGMA journal_mode = TRUNCATE")
            database.execute("PRAGMA synchronous = FULL")
    except BaseException:
        database.close()
        raise
    return database


_SAYINGS: Final = {
    sqlite3.SQLITE_BUSY: BUSY,
    sqlite3.SQLITE_READONLY: (
        "The register can't be written to, or another program was stopped while it wrote.",
        "Open it once with the right to write to the file and its folder.",
    ),
    sqlite3.SQLITE_CANTOPEN: (
        "The register can't be opened.",
        "Name a file in a folder that exists, that you may read and, to write to it, write to.",
    ),
    sqlite3.SQLITE_NOTADB: NO_REGISTER,
    sqlite3.SQLITE_CORRUPT: (
        "The file of the register is damaged.",
        "Go back to a copy that was kept outside.",
    ),
    sqlite3.SQLITE_FULL: DISK,
    sqlite3.SQLITE_IOERR: DISK,
}
