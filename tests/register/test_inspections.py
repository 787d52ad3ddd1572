"""Periodic inspections: the four fields, who may inspect, the year's clock, deviations that stay open.

Source: 29 CFR 1910.147(c)(6), at least annually, by an authorised employee other than those who use the
procedure, to correct deviations; certified with machine, date, employees included and inspector.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from datetime import date, timedelta

import pytest
from register_bench import at

from sheets.errors import InputError, RefusedError
from sheets.register.acts import LockPutOn, PeopleTold, WindowOpened
from sheets.register.deviations import Standing, deviations
from sheets.register.inspecting import Telling, inspect
from sheets.register.inspections import Inspected, begin_of, clock_of, inspections, year_after, year_before
from sheets.register.jobs import JobOpened
from sheets.register.listing_people import authorise
from sheets.register.people import Authorised
from sheets.register.revisions import Revision
from sheets.register.saying import Said, tell
from sheets.register.store import Register

ADA, BRAM, EDDA, GITA = "Ada Quarrow", "Bram Tolliver", "Edda Fenn", "Gita Stoll"
ISSUED = date(2031, 3, 4)
DAY = timedelta(days=1)
ON = ISSUED + 90 * DAY

Tell = Callable[..., int]


@pytest.fixture
def revision(issue: Callable[..., Revision], register: Register) -> Revision:
    """An issued revision of WI-204, and somebody who may inspect."""
    for name in (EDDA, GITA):
        said = Authorised(name=name, what="lockout", since=ISSUED, by="Olaf Brenner")
        authorise(register, said, when=at(1))
    return issue()


@pytest.fixture
def told(register: Register, revision: Revision) -> Tell:
    """Any event of that revision."""

    def write(said: Said) -> int:
        with register.writing() as writer:
            return tell(
                writer,
                said,
                who=EDDA,
                when=at(5),
                machine=revision.machine,
                document=revision.document,
                record_id=revision.record_id,
            )

    return write


def inspected(on: date = ON, inspector: str = EDDA, **other: object) -> Inspected:
    given: dict[str, object] = {"on": on, "inspector": inspector, "employees": (ADA, BRAM), **other}
    return Inspected(**given)  # type: ignore[arg-type]  # one or another field


def telling(today: date = ON) -> Telling:
    return Telling(by=EDDA, when=at(10), today=today)


def window(on: date = ISSUED + 5 * DAY, people: tuple[str, ...] = (ADA,), by: str = ADA) -> WindowOpened:
    return WindowOpened(job=1, people=people, where="at the lever", minutes=10, by=by, on=on)


def test_the_four_fields_are_kept_with_the_revision(register: Register, revision: Revision) -> None:
    made, left = inspect(register, revision.record_id, inspected(), telling())
    assert left == []
    with register.reading() as view:
        (kept,) = inspections(view, document="WI-204")
    assert (kept.told.machine, kept.said.on, kept.said.employees, kept.said.inspector) == (
        revision.machine,
        ON,
        (ADA, BRAM),
        EDDA,
    )
    assert kept.revision == 1
    assert kept.independent
    assert kept == made


@pytest.mark.parametrize(
    "said",
    [
        window(people=(ADA, EDDA)),
        window(by="edda  FENN"),
        LockPutOn(job=1, where="Q1", lock="31", by=EDDA, on=ISSUED),
        JobOpened(task="set", why="yearly", people=(ADA, EDDA), on=ON),
    ],
)
def test_who_used_the_procedure_doesn_t_inspect_it(
    register: Register, revision: Revision, told: Tell, said: Said
) -> None:
    used = told(said)
    with register.reading() as view:
        before = view.last()
    with pytest.raises(RefusedError, match=rf"They used the procedure themselves: event {used}\."):
        inspect(register, revision.record_id, inspected(), telling())
    with register.reading() as view:
        assert view.last() == before
    inspect(register, revision.record_id, inspected(inspector=GITA), telling())


def test_who_was_told_of_the_work_is_no_user(register: Register, revision: Revision, told: Tell) -> None:
    told(PeopleTold(job=1, before=True, people=(EDDA,), by=ADA, on=ISSUED))
    assert inspect(register, revision.record_id, inspected(), telling())[0].independent


def test_a_user_of_long_ago_may_inspect(register: Register, revision: Revision, told: Tell) -> None:
    """Since the inspection before, and at least in the year before, the inspector used it nowhere."""
    told(window(people=(ADA, EDDA), on=ISSUED + 5 * DAY))
    inspect(register, revision.record_id, inspected(inspector=GITA), telling())
    for on, free in ((ISSUED + 300 * DAY, False), (date(2032, 3, 9), False), (date(2032, 3, 10), True)):
        if free:
            assert inspect(register, revision.record_id, inspected(on=on), telling(on))[0].independent
        else:
            with pytest.raises(RefusedError, match="used the procedure"):
                inspect(register, revision.record_id, inspected(on=on), telling(on))


def test_what_is_told_afterwards_counts_too(register: Register, revision: Revision, told: Tell) -> None:
    """A sheet that is transcribed later shows that the inspector had used it."""
    inspect(register, revision.record_id, inspected(), telling())
    used = told(window(people=(ADA, EDDA)))
    with register.reading() as view:
        (kept,) = inspections(view, document="WI-204")
    assert not kept.independent
    assert kept.against == (used,)


def test_users_who_weren_t_included_are_named(register: Register, revision: Revision, told: Tell) -> None:
    told(window(people=(ADA, "Cleo Harnett")))
    made, _ = inspect(register, revision.record_id, inspected(), telling())
    assert made.left_out == ("Cleo Harnett",)


def test_an_inspector_is_authorised_and_not_among_the_included(
    register: Register, revision: Revision
) -> None:
    with pytest.raises(RefusedError, match="doesn't know them as authorised for inspection or lockout"):
        inspect(register, revision.record_id, inspected(inspector="Olaf Brenner"), telling())
    with pytest.raises(RefusedError, match="among those who were included"):
        inspect(register, revision.record_id, inspected(employees=(ADA, "EDDA fenn")), telling())


@pytest.mark.parametrize(
    ("said", "told"),
    [
        (inspected(employees=()), "Nobody is named who was included"),
        (inspected(on=ON + DAY), "still to come"),
        (inspected(on=ISSUED - DAY), "Revision 1 wasn't issued on 2031-03-03"),
        (inspected(corrections=("new plate",)), "more corrections than deviations"),
        (inspected(inspector=" "), "is empty"),
    ],
)
def test_fields_that_are_missing_or_can_t_be(
    register: Register, revision: Revision, said: Inspected, told: str
) -> None:
    errors = (InputError, RefusedError) if not said.inspector.strip() else InputError
    with pytest.raises(errors, match=told if said.inspector.strip() else "authorised"):
        inspect(register, revision.record_id, said, telling())


def test_deviations_stay_open_until_somebody_ends_them(register: Register, revision: Revision) -> None:
    found = inspected(deviations=("tag of Q1 unreadable", "HV2 has no lock point"), corrections=("new tag",))
    made, left = inspect(register, revision.record_id, found, telling())
    with register.reading() as view:
        noted = deviations(view, document="WI-204")
    assert [(one.noted.said.what, one.standing) for one in noted] == [
        ("tag of Q1 unreadable", Standing.CORRECTED),
        ("HV2 has no lock point", Standing.OPEN),
    ]
    assert left == [noted[1].number]
    assert {one.noted.said.inspection for one in noted} == {made.told.sequence}
    assert noted[0].corrected is not None
    assert noted[0].corrected.said.how == "new tag"


def test_the_year_s_clock(register: Register, revision: Revision, issue: Callable[..., Revision]) -> None:
    with register.reading() as view:
        clock = clock_of(view, "WI-204")
        assert clock_of(view, "WI-999") is None
    assert clock is not None
    assert (clock.last, clock.due) == (None, date(2032, 3, 4))
    assert [clock.overdue_on(clock.due + away * DAY) for away in (0, 1)] == [False, True]

    inspect(register, revision.record_id, inspected(), telling())
    later = issue(content="ZYXW0123456789AB")  # a new revision doesn't put it off
    with register.reading() as view:
        clock = clock_of(view, "WI-204")
    assert clock is not None
    assert (clock.revision, clock.due) == (later.number, date(2032, 6, 2))
    assert clock.last is not None
    assert clock.last.revision == 1


def test_a_year_is_at_most_twelve_months() -> None:
    assert year_after(date(2031, 6, 2)) == date(2032, 6, 2)
    assert year_after(date(2032, 2, 29)) == date(2033, 2, 28)
    assert year_before(date(2032, 2, 29)) == date(2031, 2, 28)


def test_an_inspection_looks_back_to_the_one_before_and_at_least_a_year() -> None:
    day = date(2033, 6, 1)
    assert begin_of([], day) == date.min
    assert begin_of([date(2033, 3, 1)], day) == date(2032, 6, 1)
    assert begin_of([date(2030, 1, 1), date(2031, 3, 1)], day) == date(2031, 3, 1)
    assert begin_of([day], day) == date.min  # the same day twice is one looking back


@pytest.mark.usefixtures("revision")
def test_a_revision_that_was_never_issued_is_not_inspected(
    register: Register, hold: Callable[..., object]
) -> None:
    held = hold()
    with pytest.raises(InputError, match="wasn't issued"):
        inspect(register, held.record_id, inspected(), replace(telling(), by=GITA))  # type: ignore[attr-defined]  # a Reservation
