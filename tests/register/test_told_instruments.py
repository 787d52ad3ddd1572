"""Instruments as the register is told of them: what a certificate says, and what is contradicted."""

from __future__ import annotations

from dataclasses import replace
from datetime import date

import pytest
from register_bench import at

from sheets.errors import InputError, RefusedError
from sheets.register.instruments import InstrumentListed, usable
from sheets.register.listing_instruments import amount_of, found_bad, largest_error, list_instrument, listed
from sheets.register.store import Register

DUE, TODAY = date(2031, 5, 31), date(2031, 3, 4)


def certificate(serial: str = "BT-4471", number: str = "17", due: date = DUE) -> InstrumentListed:
    return InstrumentListed(
        serial=serial,
        number=number,
        what="dial gauge",
        range_end="400",
        unit="bar",
        largest_error="4",
        accuracy_class="1.0",
        certificate="C-2209",
        due=due,
    )


@pytest.mark.parametrize(
    ("range_end", "accuracy_class", "stated", "expected"),
    [
        # EN 837-1:1996: the class is the largest error in per cent of the span
        ("400", "1.0", "", "4"),
        ("250", "1.6", "", "4"),
        ("6", "0.25", "", "0.015"),
        ("2.5", "0.1", "", "0.0025"),
        ("400", "", "0.8", "0.8"),
        ("3000", "2A", "15", "15"),
        ("400", "0.1", "0.5", "0.5"),  # 0.4 by class and a digit that flickers
    ],
)
def test_how_far_out_it_may_be(range_end: str, accuracy_class: str, stated: str, expected: str) -> None:
    assert largest_error(range_end=range_end, accuracy_class=accuracy_class, error=stated) == expected


@pytest.mark.parametrize(("accuracy_class", "error"), [("", ""), ("2A", ""), ("1.0", "3.9")])
def test_an_error_that_nobody_knows_is_asked_for(accuracy_class: str, error: str) -> None:
    with pytest.raises(InputError):
        largest_error(range_end="400", accuracy_class=accuracy_class, error=error)


@pytest.mark.parametrize(
    ("range_end", "error", "says"),
    [
        ("0", "4", "range ends at 0"),
        ("-1", "4", "range ends at -1"),
        ("400", "0", "out by nothing"),
        ("400", "-4", "out by nothing"),
        ("400", "40.1", "more than 10 %"),
        ("400", "40", ""),
    ],
)
def test_a_gauge_with_figures_that_none_has(
    register: Register, range_end: str, error: str, says: str
) -> None:
    said = replace(certificate(), range_end=range_end, largest_error=error)
    if not says:
        list_instrument(register, said, by="Ines Kurz", when=at(1))
        return
    with pytest.raises(InputError, match=says):
        list_instrument(register, said, by="Ines Kurz", when=at(1))


@pytest.mark.parametrize("text", ["400", "400 Bar", "400 kilo", "4oo bar", "4,5 bar", "bar 400", ""])
def test_an_amount_carries_a_unit_that_sheets_know(text: str) -> None:
    with pytest.raises(InputError):
        amount_of("--range", text)
    assert amount_of("--range", "400 bar") == ("400", "bar")


def test_a_number_of_the_works_is_one_gauge_s(register: Register) -> None:
    list_instrument(register, certificate(), by="Ada Quarrow", when=at(1))
    with pytest.raises(InputError, match="Number 17 is that of the gauge with serial number 'BT-4471'"):
        list_instrument(register, certificate(serial="BT-9"), by="Ada Quarrow", when=at(2))
    list_instrument(register, certificate(due=date(2032, 5, 31)), by="Ada Quarrow", when=at(3))
    with register.reading() as view:
        assert listed(view, "17").listed.said.due == date(2032, 5, 31)
        with pytest.raises(InputError, match="Did you mean 'BT-4471'"):
            listed(view, "BT-4477")


def test_found_bad_until_a_new_certificate(register: Register) -> None:
    def bad(good_until: date = TODAY) -> None:
        found_bad(
            register,
            "17",
            what="sticks at 90 bar",
            good_until=good_until,
            on=TODAY,
            by="Ada Quarrow",
            when=at(2),
        )

    list_instrument(register, certificate(), by="Ada Quarrow", when=at(1))
    with pytest.raises(InputError, match="lies after 2031-03-04"):
        bad(date(2031, 3, 5))
    bad()
    with register.reading() as view, pytest.raises(RefusedError, match="found bad on 2031-03-04"):
        usable(view, "17", day=TODAY)
    with pytest.raises(RefusedError, match="already"):
        bad()
    list_instrument(register, certificate(), by="Ada Quarrow", when=at(3))
    with register.reading() as view:
        assert usable(view, "17", day=DUE).bad is None
        with pytest.raises(RefusedError, match="due on 2031-05-31"):
            usable(view, "17", day=date(2031, 6, 1))
