"""The register as text, for whoever reads it without this program; a backup is made of it, too."""

from __future__ import annotations

import csv
import io
import json
from collections.abc import Iterable, Iterator, Mapping
from typing import Final

from sheets.errors import InputError, Problem
from sheets.register.chain import Anchor
from sheets.register.events import NO_EVENT, Event, hash_of
from sheets.register.form import canonical
from sheets.register.opening import Place, make_register
from sheets.register.store import Register, View, Writer

COLUMNS: Final = (
    "sequence",
    "time",
    "who",
    "kind",
    "machine",
    "document",
    "record_id",
    "data",
    "previous",
    "hash",
)


def json_lines(register: Register, *, after: int = 0) -> Iterator[str]:
    """Events as JSON Lines in canonical form, each with its line end, beginning ``after`` a sequence number.

    All of one view: what others write meanwhile isn't in it. Raises InputError for an event that can't be
    read.
    """
    with register.reading() as view:
        yield from lines_of(view, after=after)


def lines_of(view: View, *, after: int = 0) -> Iterator[str]:
    """The same of a view that is open already, beginning ``after`` a sequence number."""
    for event in view.events(after=after):
        yield canonical({**vars(event), "data": event.facts}) + "\n"


def csv_lines(register: Register, *, after: int = 0) -> Iterator[str]:
    """Events as CSV (RFC 4180) with a head, beginning ``after`` a sequence number; data as JSON in one field.

    A field that a spreadsheet would take for a formula gets an apostrophe before it.
    """
    with register.reading() as view:
        yield _row(COLUMNS)
        for event in view.events(after=after):
            yield _row([_plain(str(getattr(event, name))) for name in COLUMNS])


def _row(fields: Iterable[str]) -> str:
    text = io.StringIO()
    csv.writer(text).writerow(fields)
    return text.getvalue()


def _plain(text: str) -> str:
    return f"'{text}" if text[:1] in ("=", "+", "-", "@") else text


def restore_lines(lines: Iterable[str], place: Place, *, anchors: Iterable[Anchor] = ()) -> Anchor:
    """Makes a new register of a backup's lines, hashes and all; gives its last event as an anchor.

    Every line is checked before it is written: its form, its hash, its place in the chain. Raises InputError
    for the first that doesn't hold or disagrees with one of the ``anchors``; then nothing is made.
    """
    events = _checked(lines, {anchor.sequence: anchor.hash for anchor in anchors})

    def fill(writer: Writer) -> None:
        for event in events:
            writer.copy(event)

    make_register(place, fill).close()
    return Anchor(sequence=events[-1].sequence, hash=events[-1].hash)


def _checked(lines: Iterable[str], wanted: Mapping[int, str]) -> tuple[Event, ...]:
    """The events of a backup, all of them, before anything is made; ``wanted``: hashes of anchors."""
    events: list[Event] = []
    previous = NO_EVENT
    for number, line in enumerate(lines, start=1):
        event = _event(line, number)
        if (event.sequence, event.previous) != (number, previous):
            raise _broken(number, "it doesn't follow on the event before it")
        if event.hash != hash_of(event):
            raise _broken(number, "its hash isn't the hash of what it says")
        if wanted.get(number, event.hash) != event.hash:
            raise _broken(number, "its hash isn't the one of the anchor")
        events.append(event)
        previous = event.hash
    if not events or max(wanted, default=0) > len(events):
        raise _broken(len(events), "the backup ends there, before the anchor or before it began")
    return tuple(events)


def _event(line: str, number: int) -> Event:
    try:
        known = json.loads(line)
        if set(known) != set(COLUMNS) or canonical(known) + "\n" != line:
            raise _broken(number, "it isn't as a backup writes it")
        return Event(**{**known, "data": canonical(known["data"])})
    except (ValueError, TypeError, RecursionError):
        raise _broken(number, "it can't be read") from None


def _broken(number: int, what: str) -> InputError:
    return InputError(
        Problem(
            where=f"backup, line {number}",
            what=f"The backup is damaged or was changed: {what}.",
            fix="Take another backup. Nothing was made.",
        )
    )
