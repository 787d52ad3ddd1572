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

FORMAT: Final = 1
"""Of the register. A reader refuses a higher one, since it can't know what the events there mean."""
MARK: Final = f"jamnut register {FORMAT}"
"""Begins what is hashed, so that no other list of texts has the same hash."""
NO_EVENT: Final = "0" * 64
"""What the first event names as the hash of the one before."""
FIRST: Final = 1


class EventKind(StrEnum):
    """What happened."""

    OPENED = "opened"
    """The register itself: always the first event, and only that."""
    RESERVED = "reserved"
    SIGNED = "signed"
    ISSUED = "issued"
    VOIDED = "voided"
    REJECTED = "rejected"
    WITHDRAWN = "withdrawn"


REVISION_KINDS: Final = frozenset(EventKind) - {EventKind.OPENED}
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
