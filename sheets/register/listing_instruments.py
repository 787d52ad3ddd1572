"""What is told of instruments: listed with a certificate, or found bad."""

from __future__ import annotations

from datetime import date, datetime
from decimal import ROUND_CEILING, Decimal
from typing import Final

from sheets.errors import InputError, Problem, RefusedError, nearest, quoted
from sheets.register.instruments import (
    Instrument,
    InstrumentFoundBad,
    InstrumentListed,
    instruments,
    named,
)
from sheets.register.rows import digits_of
from sheets.register.saying import tell
from sheets.register.store import Register, View

UNITS: Final = ("bar", "psi", "MPa", "kPa", "°C")
"""In which an instrument shows: a sheet compares by them, so another spelling would be another unit."""
_LAST_DIGIT: Final = Decimal("0.0001")
"""Of a figure in the register."""
_COARSEST: Final = Decimal(10)
"""Largest error in per cent of the range; EN 837-1:1996 ends at class 4, so beyond this it's a slip."""


def list_instrument(register: Register, said: InstrumentListed, *, by: str, when: datetime) -> int:
    """Lists a gauge with a certificate, which clears what was found before; gives the number of the event.

    Raises InputError where the works' number is another gauge's, and for a range or an error that no gauge
    has.
    """
    _hold_figures(said)
    with register.writing() as writer:
        same = [
            one.listed.said.serial
            for one in instruments(writer).values()
            if said.number and one.listed.said.number == said.number and one.listed.said.serial != said.serial
        ]
        if same:
            raise InputError(
                Problem(
                    where=f"gauge {quoted(said.serial)}",
                    what=f"Number {said.number} is that of the gauge with serial number {quoted(same[0])}.",
                    fix="Give each gauge a number of its own; none is used again.",
                )
            )
        return tell(writer, said, who=by, when=when)


def _hold_figures(said: InstrumentListed) -> None:
    """An instrument shows a range, and is out by something, if little. Raises InputError."""
    end = digits_of("range", said.range_end)
    most = end * _COARSEST / 100
    if end <= 0:
        what, fix = f"Its range ends at {said.range_end} {said.unit}.", "Give where its scale ends."
    elif digits_of("largest error", said.largest_error) <= 0:
        what = "It would never be out at all; by its class or error it is out by nothing."
        fix = "Copy the class or the largest error from the certificate."
    elif Decimal(said.largest_error) > most:
        what = f"It may be out by {said.largest_error} {said.unit}, more than {_COARSEST} % of its range."
        fix = "Look at the certificate; no setting could be held against a gauge that coarse."
    else:
        return
    raise InputError(Problem(where=f"gauge {quoted(said.serial)}", what=what, fix=fix))


def found_bad(
    register: Register, given: str, *, what: str, good_until: date, on: date, by: str, when: datetime
) -> InstrumentFoundBad:
    """Tells that a gauge reads wrongly; ``given`` is its serial number or its number at the works.

    ``good_until``: last day on which it was known to read rightly. Raises InputError for a gauge that isn't
    listed and for dates the wrong way round, RefusedError for one that was found bad before.
    """
    if good_until > on:
        raise InputError(
            Problem(
                where="--good",
                what=f"The day {good_until} lies after {on}, when it was found bad.",
                fix="Name the last day on which it was known to read rightly.",
            )
        )
    with register.writing() as writer:
        known = listed(writer, given)
        if known.bad is not None:
            raise RefusedError(
                Problem(
                    where=f"gauge {quoted(given)}",
                    what=f"It was found bad on {known.bad.said.on} already.",
                    fix="List it with a new certificate once it reads rightly.",
                )
            )
        said = InstrumentFoundBad(
            serial=known.listed.said.serial, on=on, good_until=good_until, what=what, by=by
        )
        tell(writer, said, who=by, when=when)
        return said


def listed(view: View, given: str) -> Instrument:
    """A gauge by its serial number or its number at the works. Raises InputError for one that isn't there."""
    found = named(view, given)
    if found is None:
        known = instruments(view)
        close = nearest(given, [*known, *(one.listed.said.number for one in known.values())])
        raise InputError(
            Problem(
                where=f"gauge {quoted(given)}",
                what="No gauge with this number is listed.",
                fix=f"Did you mean {quoted(close)}?" if close else "See which are: jamnut instruments.",
            )
        )
    return found


def amount_of(where: str, text: str) -> tuple[str, str]:
    """Digits and unit of what was written, such as '400 bar'. Raises InputError; ``where`` names it."""
    digits, _, unit = text.partition(" ")
    if unit not in UNITS:
        close = nearest(unit, UNITS)
        raise InputError(
            Problem(
                where=where,
                what=f"{quoted(text)} has no unit that sheets know.",
                fix=f"Write digits, a blank, and {close or 'one of ' + ', '.join(UNITS)}.",
            )
        )
    digits_of(where, digits)
    return digits, unit


def largest_error(*, range_end: str, accuracy_class: str, error: str) -> str:
    """Largest error in the unit of the range, as digits: as stated, else class times range.

    ``range_end`` and ``error`` in one unit; ``accuracy_class`` in per cent of the range, or a maker's letter;
    each as digits, ``error`` may be empty. Source: EN 837-1:1996, classes as a share of the span. Raises
    InputError where neither says it, and where they contradict each other.
    """
    share = _share(accuracy_class)
    if share is None:
        if not error:
            raise InputError(
                Problem(
                    where="--error",
                    what="How far out the gauge may be isn't given.",
                    fix="Give its class as a figure with --class, or its largest error with --error.",
                )
            )
        return error
    by_class = (share * Decimal(range_end) / 100).quantize(_LAST_DIGIT, ROUND_CEILING)
    text = f"{by_class.normalize():f}"
    if not error:
        return text
    if Decimal(error) < by_class:
        raise InputError(
            Problem(
                where="--error",
                what=f"Class {accuracy_class} of {range_end} allows {text}, more than {error}.",
                fix="Look at the certificate; leave out the class where it isn't the gauge's.",
            )
        )
    return error


def _share(accuracy_class: str) -> Decimal | None:
    try:
        return digits_of("class", accuracy_class) if accuracy_class else None
    except InputError:
        return None
