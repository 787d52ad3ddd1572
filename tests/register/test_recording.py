"""Readings and what follows from them: deviations, jobs, gauges, and who may end what. On both databases."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from datetime import UTC, date, timedelta, timezone

import pytest
from recording_bench import DAY, HOW, Bench, gauge, refused
from register_bench import NOON, at

from sheets.errors import InputError, RefusedError
from sheets.register.deviations import DeviationKind, Standing, deviations, out_of_service
from sheets.register.instruments import InstrumentFoundBad, in_doubt
from sheets.register.issuing import withdraw
from sheets.register.jobs import Ending, jobs
from sheets.register.readings import Phase, Seal, last_left, readings, series
from sheets.register.recording import (
    FIND_CAUSE,
    Telling,
    open_job,
    strike,
)
from sheets.register.revisions import Revision
from sheets.register.rows import Outcome
from sheets.register.saying import tell
from sheets.register.settling import accept, back_in_service, correct, end_job, note

# --- what a reading comes to -----------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "outcome"),
    [
        ("202", Outcome.WITHIN),
        ("210.0", Outcome.WITHIN),
        ("201.9", Outcome.OUTSIDE),
        ("210.1", Outcome.OUTSIDE),
        ("198", Outcome.OUTSIDE),
        ("197.9", Outcome.LADDER),
        ("230.1", Outcome.LADDER),
        ("250", Outcome.LADDER),
        ("250.1", Outcome.RATING),
        ("-1", Outcome.LADDER),
    ],
)
def test_as_left_against_its_row(bench: Bench, value: str, outcome: Outcome) -> None:
    done = bench.left(value)
    assert done.outcome is outcome
    assert bool(done.deviation) is (outcome is not Outcome.WITHIN)
    expected = [] if outcome is Outcome.WITHIN else [(DeviationKind(outcome.value), Standing.OPEN)]
    assert bench.deviations() == expected


@pytest.mark.parametrize(
    ("value", "opens"),
    [("185", False), ("227", False), ("201", False), ("184.9", True), ("227.1", True), ("260", True)],
)
def test_as_found_past_its_limit_opens_a_job_and_no_deviation(bench: Bench, value: str, opens: bool) -> None:
    done = bench.take(Phase.FOUND, value)
    assert bool(done.opened) is opens
    assert bench.deviations() == []
    with bench.register.reading() as view:
        found = [one for one in jobs(view) if one.opened.said.task == FIND_CAUSE]
    assert [one.opened.said.cause for one in found] == ([done.reading] if opens else [])
    if opens:
        assert "185 and 227 bar" in found[0].opened.said.why
        assert bench.take(Phase.FOUND, value).opened == 0  # one looks for it already
        with refused(bench, "nothing says what was found"):
            bench.do(end_job, found[0].number, HOW, ending=Ending.DONE)
        bench.do(end_job, found[0].number, HOW, ending=Ending.DONE, remark="spring broken")
        assert bench.take(Phase.FOUND, value).opened != 0


def test_a_setting_that_another_hides_was_not_reached(bench: Bench) -> None:
    """What came first says nothing of the setting behind it, so no job looks for a cause."""
    assert bench.take(Phase.FOUND, "150", reached=False).opened == 0
    with refused(bench, "as left is reached", InputError):
        bench.take(Phase.LEFT, "206", reached=False)


def test_as_left_without_as_found_is_refused_but_where_nothing_could_be_found(bench: Bench) -> None:
    with refused(bench, "without having been read as found"):
        bench.take(Phase.LEFT, "206")
    bench.take(Phase.FOUND, "204", row=2)
    with refused(bench, "without having been read as found"):
        bench.take(Phase.LEFT, "206", row=1)


@pytest.mark.parametrize(
    ("row", "given", "says", "error"),
    [
        (3, {}, "no such row", InputError),
        (1, {"unit": "psi"}, "in 'psi'; the sheet has bar", InputError),
        (1, {"value": "206,5"}, "no figure", InputError),
        (1, {"value": "2e2"}, "no figure", InputError),
        (1, {"value": "٢٠٦"}, "no figure", InputError),
        (1, {"value": "NaN"}, "no figure", InputError),
        (1, {"oil_c": "warm"}, "no figure", InputError),
        (1, {"instrument": "9999"}, "No gauge with this number", RefusedError),
        (1, {"how": replace(HOW, on=DAY + timedelta(days=1))}, "was due on 2031-03-04", RefusedError),
        (1, {"how": replace(HOW, on=date(2031, 3, 9))}, "in the future", InputError),
        (1, {"how": replace(HOW, people=())}, "Nobody is named", InputError),
        (1, {"how": replace(HOW, people=("Ada\nQuarrow",))}, "printed", InputError),
        (1, {"job": 999}, "no such job", InputError),
    ],
)
def test_what_cannot_be_recorded(
    bench: Bench, row: int, given: dict[str, object], says: str, error: type[Exception]
) -> None:
    given = dict(given)
    value = given.pop("value", "206")
    with refused(bench, says, error):
        bench.take(Phase.FOUND, str(value), row, **given)


def test_a_row_keeps_all_that_was_said(bench: Bench) -> None:
    how = replace(HOW, transcribed=True)
    bench.take(Phase.FOUND, "203.5", oil_c="48.5", seal=Seal.BROKEN, clock="14:05", instrument="17", how=how)
    (one,) = bench.readings()
    said = one.said
    assert (said.value, said.unit, said.row, said.adjuster) == ("203.5", "bar", 1, "RV1")
    assert (said.instrument, said.oil_c, said.seal, said.clock) == ("8831", "48.5", Seal.BROKEN, "14:05")
    assert (said.people, said.on, said.transcribed) == (("Ada Quarrow", "Bram Tolliver"), DAY, True)
    assert (one.told.machine, one.told.document, one.told.by) == ("KP-2", "WI-204", "Ines Kurz")
    with bench.register.reading() as view:
        listing = next(event for event in view.events() if event.sequence == said.listing)
    assert listing.facts["certificate"] == "C-204"


# --- how deviations end ----------------------------------------------------------------------------------


def test_outside_the_window_ends_by_a_named_acceptance_of_another(bench: Bench) -> None:
    number = bench.left("212").deviation
    for reader in ("Ada Quarrow", "bram  tolliver"):
        with refused(bench, "doesn't accept it, too"):
            bench.do(accept, number, HOW, authoriser=reader, why="near enough")
    with refused(bench, "empty", InputError):
        bench.do(accept, number, HOW, authoriser="Cleo Harnett", why="")
    with refused(bench, "told the register of it"):  # who types may leave the own name out of the people
        bench.do(accept, number, HOW, authoriser="Ines Kurz", why="reviewed")
    bench.do(accept, number, HOW, authoriser="Cleo Harnett", why="no finer screw; reviewed")
    assert bench.deviations() == [(DeviationKind.WINDOW, Standing.ACCEPTED)]
    with refused(bench, "accepted already"):
        bench.do(accept, number, HOW, authoriser="Cleo Harnett", why="again")


@pytest.mark.parametrize("value", ["197", "231", "251"])
def test_outside_rating_or_ladder_nobody_accepts_and_out_of_service_is_the_end(
    bench: Bench, value: str
) -> None:
    number = bench.left(value).deviation
    with refused(bench, "Nobody can accept"):
        bench.do(accept, number, HOW, authoriser="Cleo Harnett", why="I say so")
    with refused(bench, "Only a reading shows"):
        bench.do(correct, number, HOW, done="fine now")
    with refused(bench, f"deviation {number}: RV1 was left at {value} bar"):
        bench.do(end_job, bench.job, HOW, ending=Ending.DONE)
    bench.do(end_job, bench.job, HOW, ending=Ending.OUT_OF_SERVICE, remark="screw seized")
    with bench.register.reading() as view:
        out = out_of_service(view, machine="KP-2")
    assert out is not None
    assert out.said.why == "screw seized"
    with refused(bench, "RV1 was left at"):
        bench.do(back_in_service, bench.revision.record_id, HOW)

    bench.job = bench.do(open_job, bench.revision.record_id, HOW, why="new screw")
    bench.take(Phase.FOUND, "206")
    bench.take(Phase.LEFT, "206")
    assert [standing for _, standing in bench.deviations()] == [Standing.CORRECTED]
    bench.do(end_job, bench.job, HOW, ending=Ending.DONE)
    bench.do(back_in_service, bench.revision.record_id, HOW)
    with bench.register.reading() as view:
        assert out_of_service(view, machine="KP-2") is None
    with refused(bench, "isn't out of service"):
        bench.do(back_in_service, bench.revision.record_id, HOW)


def test_setting_it_again_corrects_what_was_open_and_leaves_what_is_new(bench: Bench) -> None:
    first = bench.left("212").deviation
    second = bench.take(Phase.LEFT, "232").deviation
    assert bench.deviations() == [
        (DeviationKind.WINDOW, Standing.REPLACED),
        (DeviationKind.LADDER, Standing.OPEN),
    ]
    with bench.register.reading() as view:
        ended = {one.number: one.corrected for one in deviations(view)}
    assert ended[second] is None
    assert ended[first] is not None
    assert ended[first].said.how == f"replaced by deviation {second}"
    bench.take(Phase.LEFT, "209")
    assert [standing for _, standing in bench.deviations()] == [Standing.REPLACED, Standing.CORRECTED]
    bench.do(end_job, bench.job, HOW, ending=Ending.DONE)


def of_day(days: int) -> Telling:
    """Told within the same minute, of work so many days later; nothing more is known of it."""
    return replace(HOW, on=DAY + timedelta(days=days), when=at(10) + timedelta(days=9))


def test_an_older_day_told_later_is_not_what_was_left_last_and_corrects_nothing(bench: Bench) -> None:
    """Out on the 6th; what was within on the 5th, copied later, changes nothing of that."""
    bench.do(tell, gauge(due=DAY + timedelta(days=30)), who="Ines Kurz", when=at(6))
    bench.take(Phase.FOUND, "206", how=of_day(1))
    bench.take(Phase.LEFT, "212", how=of_day(2))
    assert bench.take(Phase.LEFT, "206", how=of_day(1)).deviation == 0
    assert bench.deviations() == [(DeviationKind.WINDOW, Standing.OPEN)]
    with bench.register.reading() as view:
        assert last_left(view, machine="KP-2")["RV1"].said.value == "212"
        values = [one.said.value for one in series(view, machine="KP-2", adjuster="RV1")]
    assert values == ["206", "206", "212"]
    bench.take(Phase.LEFT, "207", how=of_day(2))
    assert bench.deviations() == [(DeviationKind.WINDOW, Standing.CORRECTED)]


@pytest.mark.parametrize(("newer", "stood"), [("206", Standing.CORRECTED), ("211", Standing.REPLACED)])
def test_an_older_reading_outside_told_later_has_ended_already(
    bench: Bench, newer: str, stood: Standing
) -> None:
    bench.do(tell, gauge(due=DAY + timedelta(days=30)), who="Ines Kurz", when=at(6))
    bench.take(Phase.FOUND, "206", how=of_day(1))
    open_now = [(DeviationKind.WINDOW, Standing.OPEN)] if newer == "211" else []
    bench.take(Phase.LEFT, newer, how=of_day(2))
    assert bench.deviations() == open_now
    assert bench.take(Phase.LEFT, "212", how=of_day(1)).deviation == 0
    assert bench.deviations() == [*open_now, (DeviationKind.WINDOW, stood)]


def test_within_a_day_the_time_of_day_says_which_is_newer(bench: Bench) -> None:
    """Told in this order; one without a time is taken as read after what was told before it."""
    bench.take(Phase.FOUND, "206")
    for value, clock in (("203", "09:00"), ("204", ""), ("205", "08:00"), ("207", "")):
        bench.take(Phase.LEFT, value, clock=clock)
    with bench.register.reading() as view:
        values = [one.said.value for one in series(view, machine="KP-2", adjuster="RV1")]
        assert last_left(view, machine="KP-2")["RV1"].said.value == "207"
    assert values == ["206", "205", "203", "204", "207"]


def test_nothing_ends_a_deviation_before_its_day_nor_on_one_to_come(bench: Bench) -> None:
    setting = bench.left("212").deviation
    noted = bench.do(note, bench.job, HOW, what="hose H3 chafed", row=0)
    before, later = of_day(-1), replace(HOW, on=DAY + timedelta(days=3))
    for how, says, error in ((before, "before that", RefusedError), (later, "in the future", InputError)):
        with refused(bench, says, error):
            bench.do(accept, setting, how, authoriser="Cleo Harnett", why="reviewed")
        with refused(bench, says, error):
            bench.do(correct, noted, how, done="H3 replaced")


def test_with_two_settings_out_neither_is_accepted(bench: Bench) -> None:
    """Relief at 199 and compensator at 200: each within its own limits, and the relief under the other."""
    relief, compensator = bench.left("199").deviation, bench.left("200", row=2).deviation
    for number in (relief, compensator):
        with refused(bench, "isn't known that each limit stands over"):
            bench.do(accept, number, HOW, authoriser="Cleo Harnett", why="reviewed")
    bench.take(Phase.LEFT, "190", row=2)
    bench.do(accept, relief, HOW, authoriser="Cleo Harnett", why="reviewed")
    again = bench.left("200", row=2).deviation
    with refused(bench, "isn't known that each limit stands over"):
        bench.do(accept, again, HOW, authoriser="Cleo Harnett", why="reviewed")


def test_a_coarser_gauge_is_a_deviation_that_somebody_answers_for(bench: Bench) -> None:
    bench.do(tell, gauge("4", number="4", range_end="400", largest_error="6.4"), who="Ines Kurz", when=at(6))
    bench.do(
        tell,
        gauge("5", number="5", range_end="6000", largest_error="36", unit="psi"),
        who="Ines Kurz",
        when=at(6),
    )
    for serial in ("4", "5"):
        bench.take(Phase.FOUND, "206", instrument=serial)
    assert bench.deviations() == [(DeviationKind.GAUGE, Standing.OPEN)] * 2


def test_what_a_person_notes_is_corrected_by_a_person(bench: Bench) -> None:
    number = bench.do(note, bench.job, HOW, what="hose H3 chafed", row=0)
    with refused(bench, f"deviation {number}: hose H3 chafed"):
        bench.do(end_job, bench.job, HOW, ending=Ending.DONE)
    bench.do(correct, number, HOW, done="H3 replaced")
    bench.do(end_job, bench.job, HOW, ending=Ending.DONE)
    with refused(bench, "has ended"):
        bench.take(Phase.FOUND, "206")
    with refused(bench, "no such deviation", InputError):
        bench.do(correct, 999, HOW, done="nothing")


def test_a_struck_reading_stays_and_counts_no_more(bench: Bench) -> None:
    number = bench.left("212")
    bench.do(strike, number.reading, HOW, why="read in the wrong row")
    assert bench.deviations() == [(DeviationKind.WINDOW, Standing.CORRECTED)]
    with bench.register.reading() as view:
        assert last_left(view, machine="KP-2") == {}
        assert [one.counts for one in readings(view)] == [True, False]
        assert [one.said.value for one in series(view, machine="KP-2", adjuster="RV1")] == ["206"]
    with refused(bench, "no reading that counts", InputError):
        bench.do(strike, number.reading, HOW, why="again")
    kept = bench.left("212")
    bench.do(accept, kept.deviation, HOW, authoriser="Cleo Harnett", why="reviewed")
    with refused(bench, "Somebody answers for it"):
        bench.do(strike, kept.reading, HOW, why="after all")


# --- gauges ----------------------------------------------------------------------------------------------


def test_a_bad_gauge_lists_all_that_hangs_on_it_and_is_used_no_more(bench: Bench) -> None:
    bench.do(tell, gauge("8832", number="18"), who="Ines Kurz", when=at(6))
    bench.left("206")
    bench.take(Phase.FOUND, "190", row=2, instrument="8832")
    bad = InstrumentFoundBad(
        serial="8831", on=DAY, good_until=DAY - timedelta(days=30), what="reads 8 bar high", by="Ines Kurz"
    )
    bench.do(tell, bad, who="Ines Kurz", when=at(20))
    with bench.register.reading() as view:
        assert [one.said.phase for one in in_doubt(view, bad)] == [Phase.FOUND, Phase.LEFT]
        assert in_doubt(view, replace(bad, good_until=DAY)) == ()
    with refused(bench, "found bad on 2031-03-04: 'reads 8 bar high'"):
        bench.take(Phase.FOUND, "206")
    bench.do(tell, gauge(certificate="C-299"), who="Ines Kurz", when=at(21))
    bench.take(Phase.FOUND, "206")


@pytest.mark.parametrize(
    ("range_end", "unit", "value", "fits"),
    [
        ("250", "bar", "250", True),
        ("250", "bar", "250.1", False),
        ("25", "MPa", "250", True),  # 1 MPa is 10 bar
        ("25", "MPa", "250.1", False),
        ("3000", "psi", "206.8", True),  # 1 psi is 0.0689476 bar (NIST SP 811): 3000 psi are 206.84 bar
        ("3000", "psi", "206.9", False),
        ("300", "°C", "20", False),
    ],
)
def test_a_gauge_shows_nothing_beyond_its_range(
    bench: Bench, range_end: str, unit: str, value: str, fits: bool
) -> None:
    short = gauge("6", number="6", range_end=range_end, unit=unit)
    bench.do(tell, short, who="Ines Kurz", when=at(6))
    if fits:
        bench.take(Phase.FOUND, value, instrument="6")
        return
    with refused(bench, f"isn't in the range of gauge 6, which ends at {range_end} {unit}"):
        bench.take(Phase.FOUND, value, instrument="6")


def test_a_works_number_that_two_gauges_have_names_neither(bench: Bench) -> None:
    bench.do(tell, gauge("8832"), who="Ines Kurz", when=at(6))
    with refused(bench, "No gauge with this number"):
        bench.take(Phase.FOUND, "206", instrument="17")


# --- which sheets ----------------------------------------------------------------------------------------


def test_superseded_sheets_are_not_worked_from_but_what_was_written_before_is_transcribed(
    bench: Bench, issue: Callable[..., Revision]
) -> None:
    issue(content="0000000000000000")
    with refused(bench, "Revision 1 is superseded"):
        bench.take(Phase.FOUND, "206")
    bench.take(Phase.FOUND, "206", how=replace(HOW, transcribed=True))
    after = replace(HOW, transcribed=True, on=DAY + timedelta(days=1), when=NOON + timedelta(days=1))
    with refused(bench, "Revision 1 is superseded"):
        bench.take(Phase.FOUND, "206", how=after)


def test_withdrawn_sheets_begin_no_job(bench: Bench) -> None:
    withdraw(bench.register, bench.revision.record_id, reason="Why", by="Ines Kurz", when=at(30))
    with refused(bench, "Revision 1 is withdrawn"):
        bench.do(open_job, bench.revision.record_id, replace(HOW, when=at(31)), why="yearly check")


@pytest.mark.parametrize(
    ("days", "clock", "hours_ahead", "says"),
    [
        (-1, "", 0, "wasn't issued yet on 2031-03-03"),
        (0, "12:02", 0, "wasn't issued yet on 2031-03-04 at 12:02"),
        (0, "12:03", 0, ""),
        (0, "12:10", 0, ""),
        (0, "12:11", 0, "2031-03-04 at 12:11 lies in the future"),
        (1, "", 0, "in the future"),
        # Issued at 12:03 UTC: with the clock 13 hours ahead that was 01:03 on the 5th.
        (0, "", 13, "wasn't issued yet on 2031-03-04"),
        (1, "01:02", 13, "wasn't issued yet on 2031-03-05 at 01:02"),
        (1, "01:03", 13, ""),
        (1, "01:11", 13, "in the future"),
        # Where the zone isn't known, what can't have been anywhere on earth.
        (-1, "", None, "wasn't issued yet"),
        (0, "00:02", None, "wasn't issued yet"),
        (0, "23:59", None, ""),
        (1, "02:10", None, ""),
        (1, "02:11", None, "in the future"),
    ],
)
def test_only_while_the_sheets_were_current_and_never_ahead_of_the_clock(
    bench: Bench, days: int, clock: str, hours_ahead: int | None, says: str
) -> None:
    bench.do(tell, gauge(due=DAY + timedelta(days=30)), who="Ines Kurz", when=at(6))
    zone = None if hours_ahead is None else timezone(timedelta(hours=hours_ahead))
    how = replace(HOW, on=DAY + timedelta(days=days), zone=zone)
    if not says:
        bench.take(Phase.FOUND, "206", how=how, clock=clock)
        return
    with refused(bench, says, InputError if "future" in says else RefusedError):
        bench.take(Phase.FOUND, "206", how=how, clock=clock)
    if "issued" in says:  # nor is it copied from paper that wasn't there
        with refused(bench, says):
            bench.take(Phase.FOUND, "206", how=replace(how, transcribed=True), clock=clock)


def test_paper_is_transcribed_with_hours_at_which_it_was_current(
    bench: Bench, issue: Callable[..., Revision]
) -> None:
    """Superseded at 12:03, in the minute in which both were issued here."""
    issue(content="0000000000000000")
    how = replace(HOW, transcribed=True, zone=UTC)
    with refused(bench, "Revision 1 is superseded"):
        bench.take(Phase.FOUND, "206", how=how, clock="12:04")
    bench.take(Phase.FOUND, "206", how=how, clock="12:03")
