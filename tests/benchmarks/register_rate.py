"""How the register compares with the database that it cannot do without.

Run: python tests/benchmarks/register_rate.py [folder]. One event a transaction with full sync, against plain
sqlite3 that writes the same row with the same journal, and with a write-ahead log. It prints rates and their
ratios; nothing is asserted, since times hang on the computer and its disk.
"""

from __future__ import annotations

import secrets
import sqlite3
import statistics
import sys
import time
from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from tempfile import TemporaryDirectory

from sheets.register.chain import check_chain
from sheets.register.currency import currency_of
from sheets.register.events import Entry, EventKind
from sheets.register.issuing import reserve
from sheets.register.opening import create_register
from sheets.register.store import Register

NOON = datetime(2031, 3, 4, 12, tzinfo=UTC)
EVENTS = 300
ROUNDS = 5
CHAIN = 20_000
DATA = {"adjuster": "PU1.compensator", "found": "182", "left": "210", "unit": "bar", "gauge": "17"}
ROW = (
    "2031-03-04T12:00:00.000000Z",
    "Ines Kurz",
    "voided",
    "KP-2",
    "WI-204",
    "",
    str(DATA),
    "0" * 64,
    "0" * 64,
)


def plain(path: Path, journal: str) -> Callable[[int], None]:
    database = sqlite3.connect(path, isolation_level=None)
    database.execute(f"PRAGMA journal_mode = {journal}")
    database.execute("PRAGMA synchronous = FULL")
    database.execute(
        "CREATE TABLE events (sequence INTEGER PRIMARY KEY, time TEXT, who TEXT, kind TEXT, machine TEXT,"
        " document TEXT, record_id TEXT, data TEXT, previous TEXT, hash TEXT)"
    )

    def write(_: int) -> None:
        database.execute("BEGIN IMMEDIATE")
        database.execute("INSERT INTO events VALUES (NULL, ?, ?, ?, ?, ?, ?, ?, ?, ?)", ROW)
        database.execute("COMMIT")

    return write


def entry() -> Entry:
    return Entry(
        when=NOON, who="Ines Kurz", kind=EventKind.VOIDED, machine="KP-2", document="WI-204", data=DATA
    )


def ours(register: Register) -> Callable[[int], None]:
    def write(_: int) -> None:
        with register.writing() as writer:
            writer.append(entry())

    return write


def reserving(register: Register) -> Callable[[int], None]:
    def write(number: int) -> None:
        reserve(
            register,
            document=f"WI-{number}-{secrets.token_hex(4)}",
            machine="KP-2",
            by="Ines Kurz",
            when=NOON,
            random_bytes=secrets.token_bytes,
        )

    return write


def rate(act: Callable[[int], None]) -> float:
    begin = time.perf_counter()
    for number in range(EVENTS):
        act(number)
    return EVENTS / (time.perf_counter() - begin)


def main() -> None:
    """Write in turns, so that a disk that is busy for a while slows all of them; then check a long chain."""
    with TemporaryDirectory(dir=sys.argv[1] if len(sys.argv) > 1 else None) as name:
        folder = Path(name)
        register = create_register(folder / "register", by="Ines Kurz", when=NOON)
        acts = {
            "sqlite3, same journal": plain(folder / "plain", "TRUNCATE"),
            "sqlite3, write-ahead log": plain(folder / "wal", "WAL"),
            "register, one event": ours(register),
            "register, a reservation": reserving(register),
        }
        rates: dict[str, list[float]] = {what: [] for what in acts}
        for _ in range(ROUNDS):
            for what, act in acts.items():
                rates[what].append(rate(act))
        base = rates["sqlite3, same journal"]
        for what, found in rates.items():
            ratio = statistics.median(one / other for one, other in zip(found, base, strict=True))
            print(f"{what:26} {statistics.median(found):8.0f} /s   {ratio:5.2f} of plain")
        with register.writing() as writer:
            for _ in range(CHAIN):
                writer.append(entry())
        for what, check in (
            ("chain check", lambda: check_chain(register).last),
            ("currency of a record id", lambda: currency_of(register, "0123456789").chain.last),
        ):
            begin = time.perf_counter()
            last = check()
            spent_s = time.perf_counter() - begin
            checked = last.sequence
            print(f"{what:26} {checked / spent_s:8.0f} /s   {checked} events in {spent_s * 1000:.0f} ms")
        register.close()


if __name__ == "__main__":
    main()
