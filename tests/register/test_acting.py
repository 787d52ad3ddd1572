"""Locks, zeros, powered windows, people told; copies, tags, people and inspections. On both databases."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from datetime import date, timedelta

import pytest
from recording_bench import DAY, HOW, Bench, refused
from register_bench import NOON

from sheets.errors import InputError
from sheets.register.acting import close_window, open_window, put_on, read_zero, take_off, tell_people
from sheets.register.acts import PeopleTold, acts, locks_on, windows_open
from sheets.register.copies import CopyHung, CopyTakenDown, copies
from sheets.register.jobs import Ending
from sheets.register.people import AuthorisationEnded, Authorised, Trained, person_on
from sheets.register.readings import Phase
from sheets.register.recording import tell_of
from sheets.register.revisions import Revision
from sheets.register.saying import tell
from sheets.register.settling import end_job

ADA, BRAM = HOW.of("Ada Quarrow"), HOW.of("Bram Tolliver")


def test_a_lock_comes_off_by_its_owner_or_with_three_things_said(bench: Bench) -> None:
    first = bench.do(put_on, bench.job, ADA, where="Q1", lock="A-3", clock="09:10")
    second = bench.do(put_on, bench.job, BRAM, where="Q1", lock="B-1")
    with refused(bench, "lock A-3: Ada Quarrow's lock on Q1 is on"):
        bench.do(end_job, bench.job, HOW, ending=Ending.DONE)
    bench.do(take_off, first, ADA, clock="11:00")
    with refused(bench, "Bram Tolliver's, and Ada Quarrow takes it off"):
        bench.do(take_off, second, ADA, not_here="gate log", tried="telephone")
    bench.do(
        take_off, second, ADA, not_here="gate log", tried="telephone, twice", will_know="told at the gate"
    )
    with refused(bench, "isn't on", InputError):
        bench.do(take_off, first, ADA)
    with bench.register.reading() as view:
        assert locks_on(view, machine="KP-2") == ()
    bench.do(end_job, bench.job, HOW, ending=Ending.DONE)


def test_nothing_ends_before_it_began(bench: Bench) -> None:
    """As far as the times were written: one without a time isn't held against another."""
    lock = bench.do(put_on, bench.job, ADA, where="Q1", lock="A-3", clock="11:00")
    window = bench.do(open_window, bench.job, ADA, where="at the panel", minutes=5, clock="11:05")
    with refused(bench, "at 10:59, before it began on 2031-03-04 at 11:00"):
        bench.do(take_off, lock, ADA, clock="10:59")
    with refused(bench, "2031-03-03, before it began"):
        bench.do(take_off, lock, replace(ADA, on=DAY - timedelta(days=1)))
    with refused(bench, "at 11:04, before it began"):
        bench.do(close_window, window, ADA, clock="11:04")
    bench.do(close_window, window, ADA)
    bench.do(take_off, lock, ADA, clock="11:00")


def test_a_lock_comes_off_although_the_sheets_were_superseded_meanwhile(
    bench: Bench, issue: Callable[..., Revision]
) -> None:
    put = bench.do(put_on, bench.job, ADA, where="Q1", lock="A-3")
    issue(content="0000000000000000")
    bench.do(take_off, put, ADA)


@pytest.mark.parametrize(
    ("given", "says"),
    [
        ({"moved": False}, "wasn't seen to move"),
        ({"value": "2.1"}, "is no zero: the limit is 2.00 bar"),
        ({"unit": "psi"}, "the sheets of this machine are in bar"),
        ({"instrument": "9"}, "No gauge with this number"),
    ],
)
def test_what_is_no_zero(bench: Bench, given: dict[str, object], says: str) -> None:
    good: dict[str, object] = {
        "where": "TP1",
        "value": "0.5",
        "unit": "bar",
        "instrument": "8831",
        "moved": True,
    }
    with refused(bench, says):
        bench.do(read_zero, bench.job, ADA, **{**good, **given})
    bench.do(read_zero, bench.job, ADA, **good)


def test_a_powered_window_is_for_people_of_the_job_and_one_at_a_time(bench: Bench) -> None:
    with refused(bench, "Dora Vell doesn't take part"):
        bench.do(open_window, bench.job, HOW.of("Dora Vell"), where="at the lever", minutes=30)
    with refused(bench, "no length", InputError):
        bench.do(open_window, bench.job, ADA, where="at the lever", minutes=0)
    opened = bench.do(open_window, bench.job, HOW, where="Ada at the lever, Bram at the stop", minutes=30)
    with refused(bench, "Another is open"):
        bench.do(open_window, bench.job, ADA, where="at the lever", minutes=30)
    for ending in (Ending.DONE, Ending.OUT_OF_SERVICE):
        with refused(bench, "It is open"):
            bench.do(end_job, bench.job, HOW, ending=ending)
    bench.do(close_window, opened, ADA)
    with bench.register.reading() as view:
        assert windows_open(view, machine="KP-2") == ()
    bench.do(end_job, bench.job, HOW, ending=Ending.DONE)


def test_a_job_that_a_reading_opened_has_no_people_until_somebody_works_on_it(bench: Bench) -> None:
    job = bench.take(Phase.FOUND, "180").opened
    opened = bench.do(open_window, job, ADA, where="at the lever", minutes=10)
    bench.do(close_window, opened, ADA)
    bench.do(end_job, job, ADA, ending=Ending.DONE, remark="seat worn")


def test_who_was_told_stands_with_the_other_acts_of_a_job(bench: Bench) -> None:
    bench.do(tell_people, bench.job, HOW.of("Eva Lund", "Finn Ode"), before=True, clock="08:55")
    bench.do(put_on, bench.job, ADA, where="Q1", lock="A-3")
    with bench.register.reading() as view:
        found = acts(view, machine="KP-2", job=bench.job)
        assert [one.said.KIND for one in found] == ["people told", "lock put on"]
        first = found[0].said
        assert isinstance(first, PeopleTold)
        assert (first.people, first.before, first.clock) == (("Eva Lund", "Finn Ode"), True, "08:55")
        assert acts(view, machine="KP-2", job=bench.job + 1) == ()


def test_old_copies_stay_open_until_somebody_takes_them_down(
    bench: Bench, issue: Callable[..., Revision]
) -> None:
    def hung() -> list[tuple[int, int, bool]]:
        with bench.register.reading() as view:
            found = copies(view, "WI-204")
        return [(one.hung.said.copy, one.revision.number, one.to_take_down) for one in found]

    for number, where in ((1, "by the press"), (2, "in the office")):
        said = CopyHung(copy=number, where=where, by="Ada Quarrow", on=DAY)
        bench.do(tell_of, bench.revision, said, HOW)
    assert hung() == [(1, 1, False), (2, 1, False)]
    issue(content="0000000000000000")
    assert hung() == [(1, 1, True), (2, 1, True)]
    down = CopyTakenDown(copy=1, by="Bram Tolliver", on=DAY)
    bench.do(tell_of, bench.revision, down, HOW)
    assert hung() == [(1, 1, False), (2, 1, True)]
    with bench.register.reading() as view:
        one = copies(view, "WI-204")[0]
        assert one.down is not None
        assert one.down.said.by == "Bram Tolliver"


def test_a_person_as_of_any_day(bench: Bench) -> None:
    since, last = date(2031, 1, 1), date(2031, 6, 30)
    for said in (
        Authorised(name="Ada Quarrow", what="lockout", since=since, by="Cleo Harnett"),
        Authorised(name="Ada", what="lockout", since=since, by="Cleo Harnett"),
        Authorised(
            name="Ada Quarrow", what="inspection", since=since, until=date(2031, 2, 1), by="Cleo Harnett"
        ),
        AuthorisationEnded(
            name="Ada Quarrow", what="lockout", last=last, why="another job", by="Cleo Harnett"
        ),
        Trained(name="Ada Quarrow", what="lockout", on=date(2030, 12, 1), by="Cleo Harnett"),
        Trained(
            name="Ada Quarrow", what="lockout", on=date(2031, 5, 1), until=date(2032, 5, 1), by="Cleo Harnett"
        ),
    ):
        bench.do(tell, said, who="Cleo Harnett", when=NOON)

    def on(day: date) -> tuple[bool, bool, list[date]]:
        with bench.register.reading() as view:
            person = person_on(view, "Ada Quarrow", day)
        trained = [one.said.on for one in person.trained]
        return person.may("lockout"), person.may("inspection"), trained

    assert on(date(2030, 12, 31)) == (False, False, [date(2030, 12, 1)])
    assert on(since) == (True, True, [date(2030, 12, 1)])
    assert on(date(2031, 2, 2)) == (True, False, [date(2030, 12, 1)])
    assert on(last) == (True, False, [date(2031, 5, 1)])
    assert on(last + timedelta(days=1)) == (False, False, [date(2031, 5, 1)])
    assert on(date(2032, 5, 2)) == (False, False, [])
