"""The register: read in one view, written by one writer at a time, whatever database keeps it.

`sqlite.py` and `postgres.py` stand behind `database.py`; `opening.py` chooses between them by place.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import replace
from types import TracebackType
from typing import Final, Self

from sqlalchemy import BigInteger, Column, MetaData, Table, Text, select
from sqlalchemy.engine import Connection

from sheets.errors import InputError, Problem
from sheets.register.database import Database
from sheets.register.events import FIRST, NO_EVENT, Entry, Event, contradiction, hash_of
from sheets.register.form import LONGEST_NAME, canonical, name_text, utc_text

LARGEST_DATA: Final = 8_000_000
"""An issue keeps three files of at most 1 MB each, with some characters written as two."""
_PAGE: Final = 1000

_TEXTS: Final = ("time", "who", "kind", "machine", "document", "record_id", "data", "previous", "hash")
EVENTS: Final = Table(
    "events",
    MetaData(),
    Column("sequence", BigInteger, primary_key=True, autoincrement=False),
    *(Column(name, Text, nullable=False) for name in _TEXTS),
)
_LAST: Final = select(EVENTS.c.sequence, EVENTS.c.hash).order_by(EVENTS.c.sequence.desc()).limit(1)


class View:
    """The register as it stands within one transaction."""

    def __init__(self, connection: Connection) -> None:
        self._connection = connection

    def events(
        self,
        *,
        machine: str | None = None,
        document: str | None = None,
        record_id: str | None = None,
        kinds: Collection[str] | None = None,
        saying: str | None = None,
        after: int = 0,
    ) -> Iterator[Event]:
        """Events in their order; ``saying`` keeps those whose data hold that text as a value.

        Raises InputError for one that can't be read.
        """
        found = self.rows(
            machine=machine, document=document, record_id=record_id, kinds=kinds, saying=saying, after=after
        )
        for row in found:
            event = event_of(row)
            if event is None:
                raise contradiction(str(row[0]), "one of its fields isn't text in UTF-8")
            yield event

    def rows(
        self,
        *,
        machine: str | None = None,
        document: str | None = None,
        record_id: str | None = None,
        kinds: Collection[str] | None = None,
        saying: str | None = None,
        after: int = 0,
    ) -> Iterator[tuple[object, ...]]:
        """Events as they stand in the table, whatever that is, some at a time."""
        query = select(EVENTS).order_by(EVENTS.c.sequence).limit(_PAGE)
        if machine is not None:
            query = query.where(EVENTS.c.machine == machine)
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

    def __init__(self, connection: Connection) -> None:
        super().__init__(connection)
        self._end: tuple[int, str] | None = None

    def last(self) -> tuple[int, str]:
        """As of any view; read once, since nobody else writes meanwhile."""
        if self._end is None:
            self._end = super().last()
        return self._end

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
        whole = replace(event, hash=hash_of(event))
        self.copy(whole)
        return whole

    def copy(self, event: Event) -> None:
        """Puts an event in its place as it is, hash and all: what a restored register is made of.

        The guards of the database refuse it anywhere but at the end of the chain.
        """
        self._connection.execute(EVENTS.insert(), vars(event))
        self._end = event.sequence, event.hash


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

    def __init__(self, database: Database) -> None:
        self.database = database

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def close(self) -> None:
        """Gives the database back."""
        self.database.engine.dispose()

    @contextmanager
    def reading(self) -> Iterator[View]:
        """One view of the register; what others write meanwhile isn't in it."""
        with self.database.told(), self.database.engine.connect() as connection:
            self.database.begin_view(connection)
            yield View(connection)

    @contextmanager
    def writing(self) -> Iterator[Writer]:
        """The turn to write: all of it is kept when the block ends, or nothing if it raises.

        Raises InputError if another program holds the turn for longer than the wait, and if the register
        can't be written to.
        """
        with self.database.told(), self.database.engine.connect() as connection:
            self.database.begin_turn(connection)
            yield Writer(connection)
            connection.commit()
