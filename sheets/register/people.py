"""People: what they are authorised for and trained in, as of any day."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import ClassVar

from sheets.register.events import EventKind
from sheets.register.saying import Said, Told, told
from sheets.register.store import View


@dataclass(frozen=True, kw_only=True)
class Authorised(Said):
    """The employer authorises a person for something, from a day on."""

    KIND: ClassVar[EventKind] = EventKind.AUTHORISED

    name: str
    what: str
    """Such as lockout, setting under power, inspection."""
    since: date
    until: date | None = None
    """Last day; None where it has no end."""
    by: str


@dataclass(frozen=True, kw_only=True)
class AuthorisationEnded(Said):
    """It doesn't count any more after a day."""

    KIND: ClassVar[EventKind] = EventKind.AUTHORISATION_ENDED

    name: str
    what: str
    last: date
    """Last day on which it counted."""
    why: str
    by: str


@dataclass(frozen=True, kw_only=True)
class Trained(Said):
    """A training certificate: name and date (29 CFR 1910.147(c)(7)(iv))."""

    KIND: ClassVar[EventKind] = EventKind.TRAINED

    name: str
    what: str
    on: date
    until: date | None = None
    """Last day on which the works counts it; None where it has no end."""
    by: str


@dataclass(frozen=True, kw_only=True)
class PersonOn:
    """A person as of one day, with the events that it follows from."""

    name: str
    day: date
    authorised: tuple[Told[Authorised], ...]
    """What counts on that day."""
    trained: tuple[Told[Trained], ...]
    """The last certificate in each subject up to that day that still counts."""

    def may(self, what: str) -> bool:
        """Whether the person was authorised for that on that day; ``what`` as it was told."""
        return any(one.said.what == what for one in self.authorised)


def names(view: View) -> tuple[str, ...]:
    """Everybody who was ever authorised or trained, by name."""
    known = {one.said.name for one in told(view, Authorised)} | {one.said.name for one in told(view, Trained)}
    return tuple(sorted(known))


def subjects(view: View) -> tuple[str, ...]:
    """Everything that anybody was ever authorised for or trained in."""
    known = {one.said.what for one in told(view, Authorised)} | {one.said.what for one in told(view, Trained)}
    return tuple(sorted(known))


def person_on(view: View, name: str, day: date) -> PersonOn:
    """A person as of one day, whenever the register was told."""
    ended = [one.said for one in told(view, AuthorisationEnded, saying=name) if one.said.name == name]
    trained: dict[str, Told[Trained]] = {}
    for one in told(view, Trained, saying=name):
        known = trained.get(one.said.what)
        if one.said.name == name and one.said.on <= day and (known is None or known.said.on <= one.said.on):
            trained[one.said.what] = one
    return PersonOn(
        name=name,
        day=day,
        authorised=tuple(
            one
            for one in told(view, Authorised, saying=name)
            if one.said.name == name and _counts(one.said, ended, day)
        ),
        trained=tuple(one for one in trained.values() if one.said.until is None or day <= one.said.until),
    )


def _counts(said: Authorised, ended: list[AuthorisationEnded], day: date) -> bool:
    if day < said.since or (said.until is not None and day > said.until):
        return False
    return not any(one.what == said.what and said.since <= one.last < day for one in ended)
