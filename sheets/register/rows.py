"""Rows of a record sheet as they were printed, and what a reading comes to when it is held against its row.

The register gets the rows when a pack is issued, digits as they stand on paper, so a reading is judged by
what the technician had in hand, whatever the machine file or the engine say today.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal
from enum import StrEnum
from typing import Final

from sheets.errors import InputError, Problem, quoted

_DIGITS: Final = re.compile(r"[+-]?[0-9]{1,6}(?:\.[0-9]{1,4})?", re.ASCII)


@dataclass(frozen=True, kw_only=True)
class Row:
    """One row, as printed. Pressures are digits in ``unit``, as the row's gauge shows them."""

    row: int
    """Its printed number, from 1."""
    adjuster: str
    """Id, such as PU1.compensator."""
    called: str
    """Name of the adjuster as printed."""
    gauge: str
    """Id of the gauge that the sheet counts on."""
    test_point: str = ""
    """Where that gauge is fitted; empty for one that is fixed."""
    unit: str
    target: str
    low: str
    """Lowest reading that is accepted."""
    high: str
    """Highest reading that is accepted."""
    never_exceed: str
    """No reading may stand above: a rating would be passed."""
    ladder_low: str
    """Below this it no longer stands over what it must stand over: another limit's window, or the work."""
    ladder_high: str
    """Above this it no longer stands under what it must stand under, or past the end of its range."""
    drift_low: str
    """As found below this, its cause is looked for before anyone adjusts."""
    drift_high: str
    """As found above this, the same."""
    gauge_error: str
    """Largest error of the gauge that the sheet counts on."""


class Outcome(StrEnum):
    """What a reading comes to."""

    WITHIN = "within its window"
    OUTSIDE = "outside its window"
    """Ends by a named acceptance, or by setting it again."""
    LADDER = "outside the order of limits"
    """Nobody can accept it."""
    RATING = "above what must never be exceeded"
    """Nobody can accept it."""


NEVER_ACCEPTED: Final = frozenset({Outcome.LADDER, Outcome.RATING})
"""What ends by setting it again, or with the machine out of service."""


def judged(row: Row, value: str) -> Outcome:
    """What a reading comes to; ``value``: digits in the row's unit. Raises InputError for other text."""
    read = digits_of("reading", value)
    if read > Decimal(row.never_exceed):
        return Outcome.RATING
    if Decimal(row.low) <= read <= Decimal(row.high):
        return Outcome.WITHIN
    if not Decimal(row.ladder_low) <= read <= Decimal(row.ladder_high):
        return Outcome.LADDER
    return Outcome.OUTSIDE


def drifted(row: Row, value: str) -> bool:
    """Whether a reading as found lies past the limit from which its cause is looked for.

    ``value`` as digits in the row's unit. Raises InputError if it isn't digits.
    """
    read = digits_of("reading", value)
    return (
        not min(Decimal(row.drift_low), Decimal(row.low))
        <= read
        <= max(Decimal(row.drift_high), Decimal(row.high))
    )


def row_of(rows: Iterable[Row], number: int, unit: str) -> Row:
    """The row with that printed number, in the unit that is printed there. Raises InputError.

    ``number``: as printed; ``unit``: as whoever copies a reading sees it, so that none is taken for another.
    """
    numbers: list[int] = []
    for row in rows:
        numbers.append(row.row)
        if row.row != number:
            continue
        if unit != row.unit:
            raise InputError(
                Problem(
                    where=f"row {number}, {row.called}",
                    what=f"The reading is in {quoted(unit)}; the sheet has {row.unit} there.",
                    fix=f"Give the reading in {row.unit}, as it stands on the sheet.",
                )
            )
        return row
    raise InputError(
        Problem(
            where=f"row {number}",
            what="The record sheet of this revision has no such row.",
            fix=f"It has {_listed(numbers)}. Look which revision the sheet is of.",
        )
    )


def _listed(numbers: list[int]) -> str:
    return f"rows {numbers[0]} to {numbers[-1]}" if numbers else "no rows"


def digits_of(what: str, text: str) -> Decimal:
    """A figure as it is read and written: digits with at most one point. Raises InputError.

    ``what`` names it in the message. A comma is refused, since one reader takes it for a point, another not.
    """
    if _DIGITS.fullmatch(text) is None:
        raise InputError(
            Problem(
                where=what,
                what=f"{quoted(text)} is no figure.",
                fix="Write digits, with a point before tenths: 206, or 20.5.",
            )
        )
    return Decimal(text)
