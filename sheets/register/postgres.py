"""A register in a PostgreSQL database, by its URL: for several computers that write to one register.

It stands in a schema of its own. Whoever owns that schema can take the guards off, as whoever owns a file can
write into it; the chain and an anchor that is kept outside show both. A role that only may read and insert
there can't.
"""

from __future__ import annotations

from typing import Any, Final

from sqlalchemy import create_engine, event
from sqlalchemy.engine import URL, Connection, make_url
from sqlalchemy.exc import ArgumentError, DBAPIError, OperationalError

from sheets.errors import InputError, Problem, quoted
from sheets.register.database import BUSY, DISK, Database
from sheets.register.events import NO_EVENT

SCHEMES: Final = ("postgresql://", "postgres://")
"""What a URL of this kind begins with."""
SCHEMA: Final = "jamnut"
_TURN: Final = 0x4A414D4E
"""Number of the lock that the one writer holds; the database gives it back when its transaction ends."""

_APPEND_ONLY: Final = f"""
BEGIN
  IF TG_OP <> 'INSERT' THEN
    RAISE EXCEPTION 'events are never changed or removed';
  END IF;
  IF NEW.sequence IS DISTINCT FROM (SELECT coalesce(max(sequence), 0) + 1 FROM jamnut.events)
     OR NEW.previous IS DISTINCT FROM
        coalesce((SELECT hash FROM jamnut.events ORDER BY sequence DESC LIMIT 1), '{NO_EVENT}') THEN
    RAISE EXCEPTION 'events are only added at the end';
  END IF;
  RETURN NEW;
END
"""
_GUARDS: Final = {
    "only_append": ("BEFORE INSERT OR DELETE OR UPDATE ON jamnut.events FOR EACH ROW", 1 + 2 + 4 + 8 + 16),
    "no_truncate": ("BEFORE TRUNCATE ON jamnut.events FOR EACH STATEMENT", 2 + 32),
}
"""Each with its bits in the catalogue: row 1, before 2, insert 4, delete 8, update 16, truncate 32."""
_INDICES: Final = {1: ("document", "record_id", "kind"), 2: ("machine",)}
_STEPS: Final = {
    1: (
        f"CREATE SCHEMA IF NOT EXISTS {SCHEMA}",
        "CREATE TABLE jamnut.head (format integer NOT NULL)",
        "INSERT INTO jamnut.head VALUES (0)",
        """CREATE TABLE jamnut.events (
        sequence bigint PRIMARY KEY, "time" text NOT NULL, who text NOT NULL, kind text NOT NULL,
        machine text NOT NULL, document text NOT NULL, record_id text NOT NULL, data text NOT NULL,
        previous text NOT NULL, hash text NOT NULL)""",
        *(f"CREATE INDEX events_{name} ON jamnut.events ({name}, sequence)" for name in _INDICES[1]),
        f"CREATE FUNCTION jamnut.append_only() RETURNS trigger LANGUAGE plpgsql AS $${_APPEND_ONLY}$$",
        *(
            f"CREATE TRIGGER {name} {when} EXECUTE FUNCTION jamnut.append_only()"
            for name, (when, _) in _GUARDS.items()
        ),
    ),
    2: (f"CREATE INDEX events_{_INDICES[2][0]} ON jamnut.events ({_INDICES[2][0]}, sequence)",),
}


class PostgresDatabase(Database):
    """A database, by its URL."""

    steps = _STEPS

    def __init__(self, text: str, *, read_only: bool, wait_s: float) -> None:
        """``wait_s``: seconds that a writer waits for another one, and anyone for the server."""
        url = _url(text)
        self.where = url.render_as_string(hide_password=True)
        try:
            self.engine = create_engine(
                url.set(drivername="postgresql+psycopg"),
                connect_args={"connect_timeout": max(2, round(wait_s)), "client_encoding": "UTF8"},
            )
        except ImportError:
            raise InputError(
                Problem(
                    where="this installation",
                    what="A register in PostgreSQL needs the library psycopg.",
                    fix="Install it with the extra named postgres: python -m pip install '.[site,postgres]'",
                )
            ) from None

        @event.listens_for(self.engine, "connect")
        def begin_session(connection: Any, _: object) -> None:  # psycopg's, which isn't known here
            with connection.cursor() as cursor:
                cursor.execute(f"SET search_path TO {SCHEMA}")
                cursor.execute(f"SET lock_timeout TO {round(wait_s * 1000)}")
                cursor.execute("SET synchronous_commit TO on")
                if read_only:
                    cursor.execute("SET default_transaction_read_only TO on")
            connection.commit()

    def begin_view(self, connection: Connection) -> None:
        connection.exec_driver_sql("SET TRANSACTION ISOLATION LEVEL REPEATABLE READ, READ ONLY")

    def begin_turn(self, connection: Connection) -> None:
        connection.exec_driver_sql(f"SELECT pg_advisory_xact_lock({_TURN})")

    def check_empty(self, connection: Connection) -> None:
        self._check_server(connection)
        found = connection.exec_driver_sql(
            f"SELECT count(*) FROM pg_class WHERE relnamespace = to_regnamespace('{SCHEMA}')"
        )
        if found.scalar_one():
            raise self.taken()

    def mark_format(self, connection: Connection, number: int) -> None:
        connection.exec_driver_sql(f"UPDATE jamnut.head SET format = {number}")

    def format_of(self, connection: Connection) -> int:
        there = connection.exec_driver_sql("SELECT to_regclass('jamnut.head'), to_regclass('jamnut.events')")
        if None in there.one():
            raise self.no_register()
        self._check_server(connection)
        numbers = connection.exec_driver_sql("SELECT format FROM jamnut.head").scalars().all()
        if len(numbers) != 1:
            raise self.no_register()
        return int(numbers[0])

    def altered(self, connection: Connection, number: int) -> bool:
        """Tables, indices, the guards as they are switched on, and what the guards do."""
        relations = connection.exec_driver_sql(
            f"SELECT relname FROM pg_class WHERE relnamespace = '{SCHEMA}'::regnamespace AND relkind <> 't'"
        )
        names = {f"events_{name}" for step, several in _INDICES.items() if step <= number for name in several}
        guards = connection.exec_driver_sql(
            "SELECT tgname, tgtype, tgenabled::text, tgfoid = 'jamnut.append_only'::regproc, tgqual IS NULL"
            " FROM pg_trigger WHERE tgrelid = 'jamnut.events'::regclass AND NOT tgisinternal"
        )
        bodies = connection.exec_driver_sql(
            f"SELECT proname, prosrc FROM pg_proc WHERE pronamespace = '{SCHEMA}'::regnamespace"
        )
        return (
            set(relations.scalars()) != {"head", "events", "events_pkey", *names}
            or {tuple(row) for row in guards}
            != {(name, bits, "O", True, True) for name, (_, bits) in _GUARDS.items()}
            or [tuple(row) for row in bodies] != [("append_only", _APPEND_ONLY)]
        )

    def _check_server(self, connection: Connection) -> None:
        """What a register needs of its server: text of any language, and a disk that is waited for."""
        for setting, wanted, what in (
            ("server_encoding", "UTF8", "keeps texts in another encoding than UTF-8"),
            ("fsync", "on", "doesn't wait for its disk (fsync is off), so acknowledged events may be lost"),
        ):
            if connection.exec_driver_sql(f"SHOW {setting}").scalar_one() != wanted:
                raise InputError(
                    Problem(
                        where=self.where,
                        what=f"This server {what}.",
                        fix="Use a database with encoding UTF8, on a server with fsync on.",
                    )
                )

    def problem_of(self, error: Exception) -> Problem | None:
        if not isinstance(error, DBAPIError):
            return None
        state = getattr(error.orig, "sqlstate", None)
        if state is None and isinstance(error, OperationalError):
            # psycopg couldn't connect, or lost the server; the end of what it says tells why, no password
            why = str(error.orig).split("\n", 1)[0].rsplit("failed: ", 1)[-1].removeprefix("FATAL:  ")
            what, fix = _SAYINGS["08"]
            return Problem(where=self.where, what=f"{what} {quoted(why)}", fix=fix)
        for begins, (what, fix) in _SAYINGS.items():
            if str(state).startswith(begins):
                return Problem(where=self.where, what=what, fix=fix)
        return None


def _url(text: str) -> URL:
    """Raises InputError."""
    try:
        url = make_url(text.replace("postgres://", "postgresql://", 1))
    except (ArgumentError, ValueError):
        url = None
    if url is None or not url.database:
        raise InputError(
            Problem(
                where="the register",
                what="This URL names no database.",  # and isn't repeated: it may hold a password
                fix="Write postgresql://USER@HOST/DATABASE; the password is read from libpq's password file.",
            )
        )
    return url


_UNREACHED: Final = (
    "The database can't be reached, or broke off.",
    "Look at the URL, at the server, and at who may connect to it. Nothing half-written counts.",
)
_FORBIDDEN: Final = (
    "This user may not do that in the register.",
    "Use a role that may read and insert in the schema jamnut; a new register needs one that may create it.",
)
_SAYINGS: Final = {
    "55P03": BUSY,
    "25006": ("The register was opened for reading only.", "Open it for writing."),
    "42501": _FORBIDDEN,
    "53": DISK,
    "58": DISK,
    "XX": DISK,
    "08": _UNREACHED,
    "28": _UNREACHED,
    "57": _UNREACHED,
}
"""By the beginning of the SQLSTATE. Source: PostgreSQL's documentation, appendix A."""
