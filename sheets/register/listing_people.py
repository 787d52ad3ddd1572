"""What is told of people: that they are authorised, no longer so, or trained."""

from __future__ import annotations

from datetime import date, datetime

from sheets.errors import InputError, Problem, RefusedError, quoted
from sheets.names import folded, same_person, spelled
from sheets.register.people import (
    AuthorisationEnded,
    Authorised,
    PersonOn,
    Trained,
    names,
    person_on,
    subjects,
)
from sheets.register.saying import tell
from sheets.register.store import Register, View, Writer


def authorise(register: Register, said: Authorised, *, when: datetime) -> int:
    """The employer authorises a person; gives the number of the event.

    Raises RefusedError for one who authorises themselves or is so already, InputError for dates the wrong way
    round and for another spelling of a known name.
    """
    if same_person(said.name, said.by):
        raise RefusedError(
            Problem(
                where=f"authorisation of {quoted(said.name)}",
                what="Nobody authorises themselves.",
                fix="Name with --by whoever does it for the employer.",
            )
        )
    if said.until is not None and said.until < said.since:
        raise _backwards("--until", f"{said.until} lies before {said.since}")
    with register.writing() as writer:
        _check_spelling(writer, said.name, said.what)
        known = _counting(person_on(writer, said.name, said.since), said.what)
        if known is not None and known.until is None:
            raise RefusedError(
                Problem(
                    where=f"authorisation of {quoted(said.name)}",
                    what=f"It stands already: for {said.what}, since {known.since}, by {known.by}.",
                    fix="End that one first, if this one takes its place.",
                )
            )
        return tell(writer, said, who=said.by, when=when)


def end_authorisation(register: Register, said: AuthorisationEnded, *, when: datetime) -> int:
    """It doesn't count after a day; gives the number of the event. Raises RefusedError where none counted."""
    with register.writing() as writer:
        _check_spelling(writer, said.name, said.what)
        if _counting(person_on(writer, said.name, said.last), said.what) is None:
            raise RefusedError(
                Problem(
                    where=f"authorisation of {quoted(said.name)}",
                    what=f"None for {quoted(said.what)} counts on {said.last}.",
                    fix="See what counts: jamnut people with the name and --on.",
                )
            )
        return tell(writer, said, who=said.by, when=when)


def train(register: Register, said: Trained, *, today: date, when: datetime) -> int:
    """A training certificate; gives the number of the event.

    ``today`` in the time zone of the works. Raises InputError for a day to come, dates the wrong way round,
    and another spelling of a known name.
    """
    if said.on > today:
        raise _backwards("--on", f"{said.on} is still to come")
    if said.until is not None and said.until < said.on:
        raise _backwards("--until", f"{said.until} lies before {said.on}")
    with register.writing() as writer:
        _check_spelling(writer, said.name, said.what)
        return tell(writer, said, who=said.by, when=when)


def _counting(person: PersonOn, what: str) -> Authorised | None:
    return next((one.said for one in person.authorised if one.said.what == what), None)


def _check_spelling(writer: Writer, name: str, what: str) -> None:
    """One spelling a person and a subject, or a later question would find half of what was told."""
    for given, known, where in (
        (name, spelled(name, names(writer)), "name of the person"),
        (what, _known_subject(writer, what), "what it is for"),
    ):
        if known is not None and known != given:
            raise InputError(
                Problem(
                    where=where,
                    what=f"{quoted(given)} is known as {quoted(known)}.",
                    fix="Write it as it is known, so that what was told stays together.",
                )
            )


def _known_subject(view: View, what: str) -> str | None:
    return next((one for one in subjects(view) if folded(one) == folded(what)), None)


def _backwards(where: str, what: str) -> InputError:
    return InputError(Problem(where=where, what=f"The day {what}.", fix="Look at both dates again."))
