"""What a database must give so that a register can stand in it: views, turns to write, guards, its format."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from typing import Final

from sqlalchemy.engine import Connection, Engine

from sheets.errors import InputError, Problem
from sheets.register.events import FORMAT

WAIT_S: Final = 10.0
"""How long a writer waits for another one, unless told otherwise."""


class Database(ABC):
    """One database, open."""

    where: str
    """Its place, as messages name it; without a password."""
    engine: Engine
    steps: Mapping[int, tuple[str, ...]]
    """Statements that bring the tables from the format before to this one, by format from 1.

    A new register runs all of them, a migration those that it lacks: so both end the same. A step that was
    once released is never edited.
    """

    @contextmanager
    def told(self) -> Iterator[None]:
        """Turns what the database says into an InputError for a user; what can only be a bug passes."""
        try:
            yield
        except Exception as error:
            problem = self.problem_of(error)
            if problem is None:
                raise
            raise InputError(problem) from error

    @abstractmethod
    def problem_of(self, error: Exception) -> Problem | None:
        """What an error of the database means to a user; None for one that can only be a bug."""

    @abstractmethod
    def begin_view(self, connection: Connection) -> None:
        """Begins a transaction that sees the register as it is now, and nothing that comes later."""

    @abstractmethod
    def begin_turn(self, connection: Connection) -> None:
        """Begins a transaction in which nobody else writes; waits for the turn."""

    @abstractmethod
    def check_empty(self, connection: Connection) -> None:
        """Raises InputError if something stands there already."""

    @abstractmethod
    def mark_format(self, connection: Connection, number: int) -> None:
        """Writes the number of the format beside the tables; ``number`` from 1."""

    @abstractmethod
    def format_of(self, connection: Connection) -> int:
        """The number of the format. Raises InputError if it isn't a register."""

    @abstractmethod
    def altered(self, connection: Connection, number: int) -> bool:
        """Whether tables or guards aren't those of that format ``number``."""

    def build(self, connection: Connection, *, after: int, to: int = FORMAT) -> None:
        """Brings the tables from the format ``after`` (0 for none) up to the format ``to``."""
        for number in range(after + 1, to + 1):
            for statement in self.steps[number]:
                connection.exec_driver_sql(statement)
        self.mark_format(connection, to)

    def check_head(self, connection: Connection) -> None:
        """Raises InputError unless it is a register of this format with all its guards."""
        written = self.format_of(connection)
        self.check_readable(written)
        if written < FORMAT and not self.altered(connection, written):
            raise InputError(
                Problem(
                    where=self.where,
                    what=f"This register has format {written}; this version works with format {FORMAT}.",
                    fix="Keep a copy of it, then bring it forward: jamnut migrate.",
                )
            )
        if self.altered(connection, written):
            raise InputError(
                Problem(
                    where=self.where,
                    what="The tables and guards of this register were altered by another program.",
                    fix="Go back to a copy that was kept outside, and find out who did it.",
                )
            )

    def check_readable(self, written: int) -> None:
        """Raises InputError for a format ``written`` that is newer than this version."""
        if written <= FORMAT:
            return
        raise InputError(
            Problem(
                where=self.where,
                what=f"This register has format {written}; this version reads up to format {FORMAT}.",
                fix="Use the version that wrote it, or a newer one.",
            )
        )

    def no_register(self) -> InputError:
        """The error for a place where something else stands."""
        return InputError(Problem(where=self.where, what=NO_REGISTER[0], fix=NO_REGISTER[1]))

    def taken(self) -> InputError:
        """The error for a place where something stands already."""
        return InputError(
            Problem(
                where=self.where,
                what="Something stands there already.",
                fix="Open it if it is your register, or name a place where nothing stands yet.",
            )
        )


NO_REGISTER: Final = ("This is no register.", "Name the place of the register, or make a new one.")
DISK: Final = (
    "The disk doesn't take what is written, or doesn't give back what was.",
    "Look for room on it and for its health. Nothing half-written counts.",
)
BUSY: Final = (
    "Another program is using the register.",
    "Nothing was written. Try again when it has finished.",
)
