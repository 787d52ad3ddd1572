"""Opens a register by its place: a path is an SQLite file, a postgresql:// URL a PostgreSQL database."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from pathlib import Path

from sheets.errors import InputError, Problem
from sheets.register.database import WAIT_S, Database
from sheets.register.events import FORMAT, Entry, EventKind
from sheets.register.postgres import SCHEMES, PostgresDatabase
from sheets.register.sqlite import SqliteFile
from sheets.register.store import Register, Writer

Place = str | Path
"""Where a register stands: a path, or a URL as text."""


def is_url(place: Place) -> bool:
    """Whether a place is a database by URL; everything else is the path of a file."""
    return isinstance(place, str) and place.startswith(SCHEMES)


def is_there(place: Place) -> bool:
    """Whether something stands at that place, a register or not. Raises InputError if it can't be reached."""
    if not is_url(place):
        return Path(place).exists()
    database = PostgresDatabase(str(place), read_only=True, wait_s=WAIT_S)
    try:
        with database.told(), database.engine.connect() as connection:
            database.check_empty(connection)
    except InputError as error:
        if error.problems == database.taken().problems:
            return True
        raise
    finally:
        database.engine.dispose()
    return False


def create_register(place: Place, *, by: str, when: datetime, wait_s: float = WAIT_S) -> Register:
    """Makes a new register with its first event. Raises InputError if something stands there already.

    wait_s: how many seconds a writer waits for another one.
    """

    def opened(writer: Writer) -> None:
        writer.append(Entry(when=when, who=by, kind=EventKind.OPENED, data={"format": FORMAT}))

    return make_register(place, opened, wait_s=wait_s)


def make_register(place: Place, fill: Callable[[Writer], None], *, wait_s: float = WAIT_S) -> Register:
    """Makes a new register of what ``fill`` writes, in one transaction: all of it, or nothing.

    wait_s: how many seconds a writer waits for another one. Raises InputError if something stands there.
    """
    if not is_url(place):
        path = Path(place)
        if path.exists() and (not path.is_file() or path.stat().st_size > 0):
            raise _database(place, read_only=True, wait_s=wait_s).taken()
    database = _database(place, read_only=False, wait_s=wait_s, new=True)
    try:
        with database.told(), database.engine.connect() as connection:
            database.begin_turn(connection)
            database.check_empty(connection)  # once the turn is ours: another program may have been faster
            database.build(connection, after=0)
            fill(Writer(connection))
            connection.commit()
    except BaseException:
        database.engine.dispose()
        raise
    return Register(database)


def open_register(place: Place, *, read_only: bool = False, wait_s: float = WAIT_S) -> Register:
    """Opens a register that is there; ``read_only`` also where nobody may write.

    wait_s: how many seconds a writer waits for another one. Raises InputError if it is missing, isn't a
    register, is of another format, or lacks the guards that keep events from being changed.
    """
    database = _present(place, read_only=read_only, wait_s=wait_s)
    try:
        with database.told(), database.engine.connect() as connection:
            database.begin_view(connection)
            database.check_head(connection)
    except BaseException:
        database.engine.dispose()
        raise
    return Register(database)


def migrate_register(place: Place, *, by: str, when: datetime, wait_s: float = WAIT_S) -> tuple[int, int]:
    """Brings a register of an older format forward, in one transaction; gives both formats.

    No event changes, and one is added that tells it. wait_s: how many seconds to wait for another writer.
    Raises InputError as `open_register` does; one of this format stays as it is.
    """
    database = _present(place, read_only=False, wait_s=wait_s)
    try:
        with database.told(), database.engine.connect() as connection:
            database.begin_turn(connection)
            written = database.format_of(connection)
            database.check_readable(written)
            if written == FORMAT or database.altered(connection, written):
                database.check_head(connection)
                return written, written
            database.build(connection, after=written)
            data = {"from": written, "to": FORMAT}
            Writer(connection).append(Entry(when=when, who=by, kind=EventKind.MIGRATED, data=data))
            connection.commit()
    finally:
        database.engine.dispose()
    return written, FORMAT


def _present(place: Place, *, read_only: bool, wait_s: float) -> Database:
    database = _database(place, read_only=read_only, wait_s=wait_s)
    if not is_url(place) and not Path(place).is_file():
        raise InputError(
            Problem(
                where=database.where,
                what="There is no register there.",
                fix="Name the place of the register, or make a new one there.",
            )
        )
    return database


def _database(place: Place, *, read_only: bool, wait_s: float, new: bool = False) -> Database:
    if is_url(place):
        return PostgresDatabase(str(place), read_only=read_only, wait_s=wait_s)
    mode = "ro" if read_only else "rwc" if new else "rw"
    return SqliteFile(Path(place), mode=mode, wait_s=wait_s)
