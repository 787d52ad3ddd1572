"""People as the register is told of them, and as of any day."""

from __future__ import annotations

from datetime import date, timedelta

import pytest
from register_bench import at

from sheets.errors import InputError, RefusedError
from sheets.register.listing_people import authorise, end_authorisation, train
from sheets.register.people import AuthorisationEnded, Authorised, Trained, person_on
from sheets.register.store import Register

ADA, EDDA = "Ada Quarrow", "Edda Fenn"
FIRST = date(2031, 3, 1)
DAY = timedelta(days=1)


def authorised(name: str = ADA, what: str = "lockout", **other: object) -> Authorised:
    return Authorised(**{"name": name, "what": what, "since": FIRST, "by": EDDA, **other})  # type: ignore[arg-type]  # one or another field


def trained(**other: object) -> Trained:
    return Trained(**{"name": ADA, "what": "lockout", "on": FIRST, "by": EDDA, **other})  # type: ignore[arg-type]  # one or another field


def may(register: Register, day: date, what: str = "lockout") -> bool:
    with register.reading() as view:
        return person_on(view, ADA, day).may(what)


def test_authorised_from_the_first_day_to_the_last(register: Register) -> None:
    authorise(register, authorised(until=FIRST + 9 * DAY), when=at(1))
    days = {away: may(register, FIRST + away * DAY) for away in (-1, 0, 9, 10)}
    assert days == {-1: False, 0: True, 9: True, 10: False}
    assert not may(register, FIRST, "inspection")


def test_an_ending_leaves_the_days_before_it_as_they_were(register: Register) -> None:
    authorise(register, authorised(), when=at(1))
    ending = AuthorisationEnded(name=ADA, what="lockout", last=FIRST + 4 * DAY, why="left", by=EDDA)
    end_authorisation(register, ending, when=at(2))
    assert [may(register, FIRST + away * DAY) for away in (4, 5)] == [True, False]
    # and it can be given again from a later day
    authorise(register, authorised(since=FIRST + 20 * DAY), when=at(3))
    assert [may(register, FIRST + away * DAY) for away in (19, 20)] == [False, True]


def test_an_ending_needs_something_to_end(register: Register) -> None:
    with pytest.raises(RefusedError, match="None for 'lockout' counts on 2031-03-01"):
        end_authorisation(
            register,
            AuthorisationEnded(name=ADA, what="lockout", last=FIRST, why="left", by=EDDA),
            when=at(1),
        )


def test_nobody_authorises_themselves_and_nothing_stands_twice(register: Register) -> None:
    with pytest.raises(RefusedError, match="Nobody authorises themselves"):
        authorise(register, authorised(by="ada  QUARROW"), when=at(1))
    authorise(register, authorised(), when=at(1))
    with pytest.raises(RefusedError, match="It stands already"):
        authorise(register, authorised(since=FIRST + DAY), when=at(2))


@pytest.mark.parametrize(
    ("said", "told"),
    [
        (authorised(name="ada quarrow", what="inspection"), "'ada quarrow' is known as 'Ada Quarrow'"),
        (authorised(name="Bram Tolliver", what="Lockout"), "'Lockout' is known as 'lockout'"),
        (authorised(what="inspection", until=FIRST - DAY), "2031-02-28 lies before 2031-03-01"),
        (authorised(what="in\nspection"), "can't be printed"),
        (authorised(name=" "), "is empty"),
    ],
)
def test_what_would_split_what_is_known_is_refused(register: Register, said: Authorised, told: str) -> None:
    authorise(register, authorised(), when=at(1))
    with register.reading() as view:
        before = view.last()
    with pytest.raises(InputError, match=told):
        authorise(register, said, when=at(2))
    with register.reading() as view:
        assert view.last() == before


def test_the_last_training_that_counts(register: Register) -> None:
    train(register, trained(until=FIRST + 364 * DAY), today=FIRST, when=at(1))
    later = FIRST + 300 * DAY
    train(register, trained(on=later), today=later, when=at(2))
    with register.reading() as view:
        found = {day: person_on(view, ADA, day).trained for day in (FIRST - DAY, FIRST, later)}
    assert found[FIRST - DAY] == ()
    assert [one.said.on for one in found[FIRST]] == [FIRST]
    assert [one.said.on for one in found[later]] == [later]
    with pytest.raises(InputError, match="is still to come"):
        train(register, trained(on=later + DAY), today=later, when=at(3))
