"""People: told to the register, and asked for as of any day."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date, datetime

from sheets.errors import ExitStatus, InputError, Problem, nearest, quoted
from sheets.names import folded, same_person
from sheets.pipeline.whole import whole_register
from sheets.register.listing_people import authorise as told_authorised
from sheets.register.listing_people import end_authorisation as told_ended
from sheets.register.listing_people import train as told_trained
from sheets.register.opening import Place, open_register
from sheets.register.people import AuthorisationEnded, Authorised, PersonOn, Trained, names, person_on
from sheets.wording.plain import FORMAT, Json, columns


@dataclass(frozen=True, kw_only=True)
class PeopleOn:
    """People as of one day, and whether they may do what was asked."""

    day: date
    people: tuple[PersonOn, ...]
    asked: str = ""
    """For what; empty where nothing was asked."""

    @property
    def status(self) -> ExitStatus:
        """Asked whether they may: not all of them is 1."""
        if self.asked and not all(_may(one, self.asked) for one in self.people):
            return ExitStatus.REFUSED
        return ExitStatus.GOOD


def people(register_at: Place, *, on: date, name: str | None = None, may: str = "") -> PeopleOn:
    """Everybody that the register knows, or one person, as of a day; ``may`` asks whether they may do that.

    ``on``: the day, whenever the register was told. Raises InputError for a name that it doesn't know.
    """
    with whole_register(register_at) as whole:
        view = whole.view
        known = names(view)
        wanted = known if name is None else tuple(one for one in known if same_person(one, name))
        if name is not None and not wanted:
            close = nearest(name, known)
            raise InputError(
                Problem(
                    where="name of the person",
                    what=f"The register doesn't know {quoted(name)}.",
                    fix=f"Did you mean {quoted(close)}?" if close else "See whom it knows: jamnut people.",
                )
            )
        return PeopleOn(day=on, people=tuple(person_on(view, one, on) for one in wanted), asked=may)


def authorise(
    register_at: Place,
    *,
    name: str,
    what: str,
    since: date,
    until: date | None,
    by: str,
    when: datetime,
) -> int:
    """Tells that the employer authorises a person; gives the number of the event. Raises as the register."""
    said = Authorised(name=name, what=what, since=since, until=until, by=by)
    with open_register(register_at) as register:
        return told_authorised(register, said, when=when)


def end_authorisation(
    register_at: Place, *, name: str, what: str, last: date, why: str, by: str, when: datetime
) -> int:
    """Tells that it doesn't count after a day; gives the number of the event. Raises as the register."""
    said = AuthorisationEnded(name=name, what=what, last=last, why=why, by=by)
    with open_register(register_at) as register:
        return told_ended(register, said, when=when)


def train(
    register_at: Place,
    *,
    name: str,
    what: str,
    on: date,
    until: date | None,
    by: str,
    today: date,
    when: datetime,
) -> int:
    """Tells of a training; gives the number of the event. ``today`` at the works. Raises as the register."""
    said = Trained(name=name, what=what, on=on, until=until, by=by)
    with open_register(register_at) as register:
        return told_trained(register, said, today=today, when=when)


def people_text(found: PeopleOn) -> Iterator[str]:
    """One line for each thing that counts on that day, with its event; first the answer, if one was asked."""
    for one in found.people if found.asked else ():
        word = "was" if _may(one, found.asked) else "was not"
        yield f"{one.name} {word} authorised for {quoted(found.asked)} on {found.day}"
    rows = [("event", "name", "", "for", "from", "to", "by")]
    for one in found.people:
        rows += [
            (
                str(it.sequence),
                one.name,
                "authorised",
                it.said.what,
                it.said.since.isoformat(),
                _last(it.said.until),
                it.said.by,
            )
            for it in one.authorised
        ]
        rows += [
            (
                str(it.sequence),
                one.name,
                "trained",
                it.said.what,
                it.said.on.isoformat(),
                _last(it.said.until),
                it.said.by,
            )
            for it in one.trained
        ]
        if not one.authorised and not one.trained:
            rows.append(("", one.name, "nothing counts on that day", "", "", "", ""))
    yield f"people as of {found.day}: {len(found.people)}"
    if len(rows) > 1:
        yield from columns(rows)


def people_json(found: PeopleOn) -> dict[str, Json]:
    """The same as data."""
    people: list[Json] = []
    for one in found.people:
        authorised: list[Json] = [
            {
                "event": it.sequence,
                "for": it.said.what,
                "since": it.said.since.isoformat(),
                "until": it.said.until.isoformat() if it.said.until else None,
                "by": it.said.by,
            }
            for it in one.authorised
        ]
        trained: list[Json] = [
            {
                "event": it.sequence,
                "in": it.said.what,
                "on": it.said.on.isoformat(),
                "until": it.said.until.isoformat() if it.said.until else None,
                "by": it.said.by,
            }
            for it in one.trained
        ]
        people.append(
            {
                "name": one.name,
                "may": _may(one, found.asked) if found.asked else None,
                "authorised": authorised,
                "trained": trained,
            }
        )
    return {"format": FORMAT, "day": found.day.isoformat(), "asked": found.asked or None, "people": people}


def _may(one: PersonOn, what: str) -> bool:
    return any(folded(it.said.what) == folded(what) for it in one.authorised)


def _last(until: date | None) -> str:
    return until.isoformat() if until else "no end"
