"""What an auditor asks, each by one command: asked of a year that told_year.py tells."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from datetime import date

import pytest
from told_year import BRAM, CONTENTS, MIXER, PRESS, TODAY, Numbers, tell_year

from sheets import pipeline
from sheets.errors import ExitStatus, InputError, NotEstablishedError
from sheets.register.opening import Place
from sheets.register.store import Register

USED_ON = date(2026, 3, 9)


@pytest.fixture
def year(register: Register) -> Numbers:
    return tell_year(register)


def said(lines: Iterator[str]) -> str:
    return "\n".join(lines)


def test_is_this_wall_copy_current(place: Place, year: Numbers) -> None:
    old, new = year.mixer
    found = pipeline.current(place, new.record_id)
    assert found.status is ExitStatus.GOOD
    assert said(pipeline.current_text(found)).startswith("current: revision 2 of WI-0142, machine PU-07")

    for key in (
        old.record_id,
        old.record_id.lower(),
        CONTENTS[0],
        f"https://r.example/r/{old.record_id}?d=AAAA1111&v=1",
    ):
        found = pipeline.current(place, key)
        assert found.status is ExitStatus.REFUSED, key
        text = said(pipeline.current_text(found))
        assert text.startswith("SUPERSEDED: revision 1 of WI-0142, machine PU-07\n")
        assert f"the current one is revision 2, record {new.record_id}" in text

    assert pipeline.current(place, "0000000000").status is ExitStatus.NOT_ESTABLISHED
    withdrawn = pipeline.current(place, "GGGG7777HHHH8888")
    assert withdrawn.status is ExitStatus.REFUSED
    assert "WITHDRAWN" in said(pipeline.current_text(withdrawn))
    assert "pump of another make fitted" in said(pipeline.current_text(withdrawn))


@pytest.mark.parametrize(
    ("tail", "told"),
    [
        ("d=AAAA1111&v=2", "its code names content AAAA1111"),
        ("d=EEEE5555&v=1", "its code names revision 1, the register has 2"),
    ],
)
def test_a_code_that_was_pasted_over(place: Place, year: Numbers, tail: str, told: str) -> None:
    found = pipeline.current(place, f"https://records.example/r/{year.mixer[1].record_id}?{tail}")
    assert found.status is ExitStatus.REFUSED
    assert said(pipeline.current_text(found)).startswith(f"NOT THE PAPER OF THIS RECORD: {told}")


def test_what_was_used_on_a_day_by_whom_with_which_digest(place: Place, year: Numbers) -> None:
    found = pipeline.used(place, "PU-07", on=USED_ON)
    assert [one.number for one in found.current] == [1]
    (used,) = found.used
    assert used.revision.number == 1
    assert used.revision.issue is not None
    assert (used.revision.issue.content_digest, used.revision.issue.file_digest) == (CONTENTS[0], "ab" * 32)
    assert [use.event for use in used.uses] == [year.job, year.zero, year.zero + 1, year.found, year.left]
    assert found.people.keys() == {"Ada Quarrow", "Bram Tolliver"}
    text = said(pipeline.used_text(found))
    assert f"2026-03-09, WI-0142: current was revision 1 (record {year.mixer[0].record_id})" in text
    assert f"content AAAA-1111-BBBB-2222, file {'ab' * 32}" in text
    assert "RV1 as found 198 bar" in text


def test_a_day_on_which_one_took_the_place_of_another(place: Place, year: Numbers) -> None:
    assert year
    found = pipeline.used(place, MIXER, on=date(2026, 11, 2))
    assert [one.number for one in found.current] == [1, 2]
    assert "nothing was told to be used that day" in said(pipeline.used_text(found))
    assert pipeline.used(place, MIXER, on=date(2026, 2, 1)).current == ()
    assert "current was none" in said(pipeline.used_text(pipeline.used(place, MIXER, on=date(2026, 2, 1))))


def test_one_that_was_withdrawn_was_current_until_that_day(place: Place, year: Numbers) -> None:
    assert year
    days = (date(2026, 11, 30), date(2026, 12, 1), date(2026, 12, 2))
    found = [pipeline.used(place, "WI-0139", on=day).current for day in days]
    assert [[one.number for one in current] for current in found] == [[], [1], []]


def test_last_inspection_and_was_it_independent(place: Place, year: Numbers) -> None:
    found = pipeline.inspections_on(place, day=TODAY, document=MIXER)
    (clock,) = found.clocks
    assert clock.last is not None
    assert (clock.last.number, clock.last.independent, clock.due) == (
        year.inspection,
        True,
        date(2027, 9, 14),
    )
    assert found.status is ExitStatus.GOOD
    late = pipeline.inspections_on(place, day=date(2027, 2, 3))
    assert late.status is ExitStatus.REFUSED  # the press was never inspected
    assert [one.document for one in late.clocks if one.overdue_on(late.day)] == [PRESS]


def test_was_this_person_authorised_that_day(place: Place, year: Numbers) -> None:
    assert year
    answers = {
        day: pipeline.people(place, on=day, name=BRAM, may="lockout").status
        for day in (date(2026, 1, 11), USED_ON, date(2026, 11, 30), date(2026, 12, 1))
    }
    no, yes = ExitStatus.REFUSED, ExitStatus.GOOD
    assert list(answers.values()) == [no, yes, yes, no]
    assert pipeline.people(place, on=USED_ON, name=BRAM, may="setting under power").status is no


def test_which_readings_hang_on_gauge_17(place: Place, year: Numbers) -> None:
    (gauge,) = pipeline.instruments(place, on=TODAY, given="17").gauges
    assert [one.event for one in gauge.hanging] == [year.zero, year.found, year.left]
    assert [one.value for one in gauge.hanging] == ["0 bar", "198 bar", "212 bar"]
    assert not any(one.in_doubt for one in gauge.hanging)

    text = said(pipeline.instruments_text(pipeline.instruments(place, on=TODAY, given="BT-4471")))
    assert "read with it: 3" in text

    pipeline.gauge_found_bad(
        place,
        given="17",
        what="zero is off",
        good_until=date(2026, 3, 8),
        on=TODAY,
        by="Gita Stoll",
        when=year.mixer[1].reserved_at,
    )
    (gauge,) = pipeline.instruments(place, on=TODAY, given="17").gauges
    assert [one.in_doubt for one in gauge.hanging] == [True, True, True]
    assert gauge.standing == "found bad"


def test_what_was_read_while_a_gauge_was_known_good_isn_t_in_doubt(place: Place, year: Numbers) -> None:
    pipeline.gauge_found_bad(
        place,
        given="17",
        what="zero is off",
        good_until=USED_ON,
        on=TODAY,
        by="Gita Stoll",
        when=year.mixer[1].reserved_at,
    )
    (gauge,) = pipeline.instruments(place, on=TODAY, given="17").gauges
    assert [one.in_doubt for one in gauge.hanging] == [False, False, False]


def test_a_deviation_closed(place: Place, year: Numbers) -> None:
    found = pipeline.deviations(place, number=year.deviation)
    assert found.status is ExitStatus.GOOD
    text = said(pipeline.deviations_text(found))
    assert (
        f"{year.deviation}  CORRECTED  relief valve RV1 was left at 212 bar; accepted are 202 to 210" in text
    )
    assert f"reading of event {year.left}, 2026-03-09 by Ada Quarrow" in text
    assert (
        f"accepted on 2026-03-10 by Cleo Harnett: until the new spring is fitted (event {year.accepted})"
        in text
    )
    assert f"spring fitted, set again to 206 bar (event {year.corrected})" in text


def test_what_is_open(place: Place, year: Numbers) -> None:
    found = pipeline.deviations(place, given=MIXER, only_open=True)
    assert [one.number for one in found.found] == [year.open_deviation]
    assert found.status is ExitStatus.REFUSED
    assert f"inspection of event {year.inspection}" in said(pipeline.deviations_text(found))
    assert pipeline.deviations(place, given=PRESS).status is ExitStatus.GOOD
    with pytest.raises(InputError, match="Did you mean 'PU-07'"):
        pipeline.deviations(place, given="PU-7")


def test_nothing_is_answered_from_a_register_that_was_meddled_with(
    place: Place, year: Numbers, meddle: Callable[..., None]
) -> None:
    meddle("UPDATE events SET who = 'Nobody' WHERE sequence = 3")
    asked: list[Callable[[], object]] = [
        lambda: pipeline.used(place, MIXER, on=USED_ON),
        lambda: pipeline.inspections_on(place, day=TODAY),
        lambda: pipeline.people(place, on=TODAY),
        lambda: pipeline.instruments(place, on=TODAY, given="17"),
        lambda: pipeline.deviations(place),
    ]
    for ask in asked:
        with pytest.raises(NotEstablishedError, match="event 3 of the register"):
            ask()
    assert pipeline.current(place, year.mixer[1].record_id).status is ExitStatus.NOT_ESTABLISHED
