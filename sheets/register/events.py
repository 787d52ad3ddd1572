"""Events of the register: what one holds, and the hash that ties it to the one before."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import datetime
from enum import StrEnum
from typing import Final

from sheets.errors import InputError, Problem
from sheets.register.form import canonical

FORMAT: Final = 2
"""Of the register's tables and kinds of event. A reader refuses a higher one, and never reads a lower one
as if it were this: it is migrated first, by name."""
MARK: Final = "jamnut register 1"
"""Begins what is hashed, so that no other list of texts has the same hash. It stays over all formats: an
event keeps its hash."""
NO_EVENT: Final = "0" * 64
"""What the first event names as the hash of the one before."""
FIRST: Final = 1


class EventKind(StrEnum):
    """What happened. What the data of each say stands in the module named beside its group."""

    # The register itself (opening.py, migrating.py)
    OPENED = "opened"
    """Always the first event, and only that."""
    MIGRATED = "migrated"

    # Revisions (revisions.py)
    RESERVED = "reserved"
    SIGNED = "signed"
    ISSUED = "issued"
    VOIDED = "voided"
    REJECTED = "rejected"
    WITHDRAWN = "withdrawn"

    # Paper that hangs somewhere (copies.py)
    COPY_HUNG = "copy hung"
    COPY_TAKEN_DOWN = "copy taken down"
    TAG_POSTED = "tag posted"

    # Work at a machine (jobs.py, acts.py)
    JOB_OPENED = "job opened"
    JOB_ENDED = "job ended"
    TOLD = "people told"
    LOCK_PUT_ON = "lock put on"
    LOCK_TAKEN_OFF = "lock taken off"
    ZERO_READ = "zero read"
    WINDOW_OPENED = "powered window opened"
    WINDOW_CLOSED = "powered window closed"

    # What was read (readings.py, deviations.py)
    READ = "read"
    READING_STRUCK = "reading struck"
    DEVIATION_NOTED = "deviation noted"
    DEVIATION_ACCEPTED = "deviation accepted"
    DEVIATION_CORRECTED = "deviation corrected"
    OUT_OF_SERVICE = "out of service"
    IN_SERVICE = "in service"

    # With what (instruments.py)
    INSTRUMENT_LISTED = "instrument listed"
    INSTRUMENT_FOUND_BAD = "instrument found bad"

    # By whom (people.py)
    AUTHORISED = "authorised"
    AUTHORISATION_ENDED = "authorisation ended"
    TRAINED = "trained"

    # Looked at once a year (inspections.py)
    INSPECTED = "inspected"


REVISION_KINDS: Final = frozenset(
    {
        EventKind.RESERVED,
        EventKind.SIGNED,
        EventKind.ISSUED,
        EventKind.VOIDED,
        EventKind.REJECTED,
        EventKind.WITHDRAWN,
    }
)
"""Those from which the revisions of a document follow."""


@dataclass(frozen=True, kw_only=True)
class Entry:
    """An event that is to be written: the register gives it its number and its hashes."""

    when: datetime
    who: str
    kind: EventKind
    machine: str = ""
    document: str = ""
    record_id: str = ""
    data: Mapping[str, object] = field(default_factory=dict)


@dataclass(frozen=True, kw_only=True)
class Event:
    """An event as it stands in the register; times and data as the texts that were hashed."""

    sequence: int
    time: str
    who: str
    kind: str
    """One of EventKind; another kind stays as it is, for the chain and the export."""
    machine: str
    document: str
    record_id: str
    data: str
    previous: str
    hash: str

    @property
    def when(self) -> datetime:
        """Its time in UTC. Raises InputError if the text isn't one."""
        try:
            when = datetime.fromisoformat(self.time)
        except ValueError:
            raise contradiction(self.sequence, "its time can't be read") from None
        if when.utcoffset() is None:
            raise contradiction(self.sequence, "its time has no zone")
        return when

    @property
    def facts(self) -> dict[str, object]:
        """Its data. Raises InputError if the text isn't a JSON object in canonical form."""
        try:
            facts = json.loads(self.data)
            known = isinstance(facts, dict) and canonical(facts) == self.data
        except (ValueError, RecursionError):
            known = False
        if not known:
            raise contradiction(self.sequence, "its data can't be read")
        return dict(facts)


def hash_of(event: Event) -> str:
    """SHA-256 over all fields and the hash of the event before, as a canonical JSON list of them.

    Source: FIPS 180-4 for the hash, RFC 8785 for the form.
    """
    parts = [
        MARK,
        event.sequence,
        event.time,
        event.who,
        event.kind,
        event.machine,
        event.document,
        event.record_id,
        event.data,
        event.previous,
    ]
    # The form's own function would check each part; here they are texts and one number already.
    text = json.dumps(parts, ensure_ascii=False, separators=(",", ":"))
    return hashlib.sha256(text.encode()).hexdigest()


def contradiction(sequence: int | str, what: str) -> InputError:
    """The error for an event that this program would never have written there."""
    return InputError(
        Problem(
            where=f"event {sequence} of the register",
            what=f"The register contradicts itself: {what}.",
            fix="Nothing can be told from it. Check its chain, and go back to a copy that was kept outside.",
        )
    )
