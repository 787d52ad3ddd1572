"""The register as text, for whoever reads it without this program: one event a line."""

from __future__ import annotations

from collections.abc import Iterator

from sheets.register.form import canonical
from sheets.register.store import Register


def json_lines(register: Register, *, after: int = 0) -> Iterator[str]:
    """Events as JSON Lines in canonical form, each with its line end, beginning ``after`` a sequence number.

    All of one view: what others write meanwhile isn't in it. Raises InputError for an event that can't be
    read.
    """
    with register.reading() as view:
        for event in view.events(after=after):
            yield canonical({**vars(event), "data": event.facts}) + "\n"
