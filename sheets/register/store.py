"""The register as an SQLite file: opened, read in one view, written by one writer at a time.

Rollback journal and full sync: an event that was acknowledged is on the disk. A write-ahead log would be
faster, but it doesn't work in a folder on the network, a read-only copy of the file couldn't be opened, and a
copy made by hand would lack the last events.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Callable, Collection, Iterator, Sequence
from contextlib import contextmanager
from datetime import datetime
from functools import partial
from pathlib import Path
from types import TracebackType
from typing import Final, Self

from sqlalchemy import Column, Integer, MetaData, Table, Text, create_engine, select
from sqlalchemy.engine import Connection, Engine
from sqlalchemy.exc import DBAPIError
from sqlalchemy.pool import QueuePool

from sheets.errors import InputError, Problem
from sheets.register.events import (
    FIRST,
    FORMAT,
    NO_EVENT,
    Entry,
    Event,
    EventKind,
    contradiction,
    hash_of,
)
from sheets.register.form import LONGEST_NAME, canonical, name_text, utc_text

APPLICATION_ID: Final = 0x4A414D4E
"""In the file's head: tells a register from another SQLite file ("JAMN")."""
WAIT_S: Final = 10.0
"""How long a writer waits for another one, unless told otherwise."""
LARGEST_DATA: Final = 1_000_000
_PAGE: Final = 1000

_TEXTS: Final = ("time", "who", "kind", "machine", "document", "record_id", "data", "previous", "hash")
EVENTS: Final = Table(
    "events",
    MetaData(),
    Column("sequence", Integer, primary_key=True),
    *(Column(name, Text, nullable=False) for name in _TEXTS),
)
_LAST: Final = select(EVENTS.c.sequence, EVENTS.c.hash).order_by(EVENTS.c.sequence.desc()).limit(1)

_SCHEMA: Final = (
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
)
_OBJECTS: Final = {
    "events",
    "events_document",
    "events_record",
    "events_kind",
    "no_update",
    "no_delete",
    "only_append",
}


class View:
    """The register as it stands within one transaction."""

    def __init__(self, connection: Connection) -> None:
        self._connection = connection

    def events(
        self,
        *,
        document: str | None = None,
        record_id: str | None = None,
        kinds: Collection[str] | None = None,
        saying: str | None = None,
        after: int = 0,
    ) -> Iterator[Event]:
        """Events in their order; ``saying`` keeps those whose data hold that text as a value.

        Raises InputError for one that can't be read.
        """
        for row in self.rows(document=document, record_id=record_id, kinds=kinds, saying=saying, after=after):
            event = event_of(row)
            if event is None:
                raise contradiction(str(row[0]), "one of its fields isn't text in UTF-8")
            yield event

    def rows(
        self,
        *,
        document: str | None = None,
        record_id: str | None = None,
        kinds: Collection[str] | None = None,
        saying: str | None = None,
        after: int = 0,
    ) -> Iterator[tuple[object, ...]]:
        """Events as they stand in the table, whatever that is, some at a time."""
        query = select(EVENTS).order_by(EVENTS.c.sequence).limit(_PAGE)
        if document is not None:
            query = query.where(EVENTS.c.document == document)
        if record_id is not None:
            query = query.where(EVENTS.c.record_id == record_id)
        if kinds is not None:
            query = query.where(EVENTS.c.kind.in_(sorted(kinds)))
        if saying is not None:
            query = query.where(EVENTS.c.data.contains(canonical(saying), autoescape=True))
        while True:
            page = self._connection.execute(query.where(EVENTS.c.sequence > after)).all()
            for row in page:
                yield tuple(row)
            if len(page) < _PAGE:
                return
            after = page[-1][0]

    def last(self) -> tuple[int, str]:
        """Sequence number and hash of the last event; 0 and NO_EVENT if there is none."""
        row = self._connection.execute(_LAST).one_or_none()
        return (FIRST - 1, NO_EVENT) if row is None else (row.sequence, row.hash)


class Writer(View):
    """The one writer: what it read stays true until it has written."""

    def append(self, entry: Entry) -> Event:
        """Adds an event. Raises InputError for a text that can't stand in one."""
        sequence, previous = self.last()
        data = canonical(dict(entry.data))
        if len(data) > LARGEST_DATA:
            raise InputError(
                Problem(
                    where=f"the event '{entry.kind}'",
                    what=f"Its data have {len(data)} characters; at most {LARGEST_DATA} fit.",
                    fix="Shorten the texts in it.",
                )
            )
        event = Event(
            sequence=sequence + 1,
            time=utc_text(entry.when),
            who=name_text("name of the person", entry.who),
            kind=entry.kind.value,
            machine=_named("machine tag", entry.machine),
            document=_named("document number", entry.document),
            record_id=entry.record_id,
            data=data,
            previous=previous,
            hash="",
        )
        values = {**vars(event), "hash": hash_of(event)}
        self._connection.execute(EVENTS.insert(), values)
        return Event(**values)


def _named(what: str, text: str) -> str:
    return name_text(what, text, longest=LONGEST_NAME) if text else text


def event_of(row: Sequence[object]) -> Event | None:
    """The event in a row, or None if a field is of another type than ours: SQLite keeps any."""
    sequence, *texts = row
    words = [text for text in texts if isinstance(text, str)]
    try:
        "".join(words).encode()
    except UnicodeEncodeError:  # bytes that aren't UTF-8 were read as lone surrogates
        return None
    if not isinstance(sequence, int) or len(words) != len(texts):
        return None
    return Event(sequence=sequence, **dict(zip(_TEXTS, words, strict=True)))


class Register:
    """An open register. Use it in a ``with`` statement, or close it."""

    def __init__(self, engine: Engine, path: Path) -> None:
        self._engine = engine
        self.path = path

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def close(self) -> None:
        """Gives the file back."""
        self._engine.dispose()

    @contextmanager
    def reading(self) -> Iterator[View]:
        """One view of the register; what others write meanwhile isn't in it."""
        with told(self.path), self._engine.connect() as connection:
            connection.exec_driver_sql("BEGIN")
            yield View(connection)

    @contextmanager
    def writing(self) -> Iterator[Writer]:
        """The turn to write: all of it is kept when the block ends, or nothing if it raises.

        Raises InputError if another program holds the turn for longer than the wait, and if the file can't
        be written to.
        """
        with told(self.path), self._engine.connect() as connection:
            connection.exec_driver_sql("BEGIN IMMEDIATE")
            yield Writer(connection)
            connection.commit()


def create_register(path: Path, *, by: str, when: datetime, wait_s: float = WAIT_S) -> Register:
    """Makes a new register with its first event. Raises InputError if something stands there already.

    wait_s: how many seconds a writer waits for another one.
    """
    if path.exists() and (not path.is_file() or path.stat().st_size > 0):
        raise _taken(path)
    engine = _engine(path, mode="rwc", wait_s=wait_s)
    register = Register(engine, path)
    try:
        with told(path), engine.connect() as connection:
            connection.exec_driver_sql("BEGIN IMMEDIATE")
            _check_empty(path, connection)
            for statement in _SCHEMA:
                connection.exec_driver_sql(statement)
            connection.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
            connection.exec_driver_sql(f"PRAGMA user_version = {FORMAT}")
            Writer(connection).append(
                Entry(when=when, who=by, kind=EventKind.OPENED, data={"format": FORMAT})
            )
            connection.commit()
    except BaseException:
        register.close()
        raise
    return register


def open_register(path: Path, *, read_only: bool = False, wait_s: float = WAIT_S) -> Register:
    """Opens a register that is there; ``read_only`` also where nobody may write.

    wait_s: how many seconds a writer waits for another one. Raises InputError if the file is missing, isn't a
    register, is of a newer format, or lacks the guards that keep events from being changed.
    """
    if not path.is_file():
        raise InputError(
            Problem(
                where=str(path),
                what="There is no register there.",
                fix="Name the file of the register, or make a new one there.",
            )
        )
    register = Register(_engine(path, mode="ro" if read_only else "rw", wait_s=wait_s), path)
    try:
        with told(path), register._engine.connect() as connection:
            _check_head(path, connection)
    except BaseException:
        register.close()
        raise
    return register


def _check_empty(path: Path, connection: Connection) -> None:
    """Once the turn is ours: another program may have been faster."""
    if connection.exec_driver_sql("SELECT count(*) FROM sqlite_master").scalar_one():
        raise _taken(path)


def _check_head(path: Path, connection: Connection) -> None:
    if connection.exec_driver_sql("PRAGMA application_id").scalar_one() != APPLICATION_ID:
        raise _no_register(path)
    written = connection.exec_driver_sql("PRAGMA user_version").scalar_one()
    if written > FORMAT:
        raise InputError(
            Problem(
                where=str(path),
                what=f"This register has format {written}; this version reads up to format {FORMAT}.",
                fix="Use the version that wrote it, or a newer one.",
            )
        )
    names = connection.exec_driver_sql(
        "SELECT name FROM sqlite_master WHERE name NOT LIKE 'sqlite\\_%' ESCAPE '\\'"
    )
    if written != FORMAT or set(names.scalars()) != _OBJECTS:
        raise InputError(
            Problem(
                where=str(path),
                what="The tables and guards of this register were altered by another program.",
                fix="Go back to a copy that was kept outside, and find out who did it.",
            )
        )


def _engine(path: Path, *, mode: str, wait_s: float) -> Engine:
    connect: Callable[[], sqlite3.Connection] = partial(_connect, path, mode=mode, wait_s=wait_s)
    return create_engine("sqlite://", creator=connect, poolclass=QueuePool)


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


@contextmanager
def told(path: Path) -> Iterator[None]:
    """Turns what SQLite says into an InputError for a user; what can only be a bug passes."""
    try:
        yield
    except (DBAPIError, sqlite3.Error) as error:
        origin = error.orig if isinstance(error, DBAPIError) else error
        code = getattr(origin, "sqlite_errorcode", None)
        if code is None or code & 0xFF not in _SAYINGS:
            raise
        what, fix = _SAYINGS[code & 0xFF]
        raise InputError(Problem(where=str(path), what=what, fix=fix)) from error


_NO_REGISTER: Final = ("This file is no register.", "Name the file of the register, or make a new one.")
_DISK: Final = (
    "The disk doesn't take what is written, or doesn't give back what was.",
    "Look for room on it and for its health. Nothing half-written counts.",
)
_SAYINGS: Final = {
    sqlite3.SQLITE_BUSY: (
        "Another program is using the register.",
        "Nothing was written. Try again when it has finished.",
    ),
    sqlite3.SQLITE_READONLY: (
        "The register can't be written to, or another program was stopped while it wrote.",
        "Open it once with the right to write to the file and its folder.",
    ),
    sqlite3.SQLITE_CANTOPEN: (
        "The register can't be opened.",
        "Name a file in a folder that exists, that you may read and, to write to it, write to.",
    ),
    sqlite3.SQLITE_NOTADB: _NO_REGISTER,
    sqlite3.SQLITE_CORRUPT: (
        "The file of the register is damaged.",
        "Go back to a copy that was kept outside.",
    ),
    sqlite3.SQLITE_FULL: _DISK,
    sqlite3.SQLITE_IOERR: _DISK,
}


def _no_register(path: Path) -> InputError:
    what, fix = _NO_REGISTER
    return InputError(Problem(where=str(path), what=what, fix=fix))


def _taken(path: Path) -> InputError:
    return InputError(
        Problem(
            where=str(path),
            what="Something stands there already.",
            fix="Open it if it is your register, or name a file that isn't there yet.",
        )
    )
