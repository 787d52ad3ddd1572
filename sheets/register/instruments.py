"""Instruments: listed with certificate and due date, used until then, found bad with what hangs on them."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from decimal import Decimal
from typing import ClassVar, Final

from sheets.errors import Problem, RefusedError, quoted
from sheets.quantities import from_unit, to_unit
from sheets.register.events import EventKind
from sheets.register.readings import KeptReading, readings
from sheets.register.rows import digits_of
from sheets.register.saying import Said, Told, told
from sheets.register.store import View

_PRESSURES: Final = frozenset({"bar", "psi", "MPa", "kPa"})
_DECIMALS: Final = 4
"""Of a figure in the register."""


@dataclass(frozen=True, kw_only=True)
class InstrumentListed(Said):
    """A gauge as its certificate says; listed again with each new certificate."""

    KIND: ClassVar[EventKind] = EventKind.INSTRUMENT_LISTED

    serial: str
    number: str = ""
    """The works' own number, such as 17."""
    what: str
    """Such as dial gauge."""
    range_end: str
    """End of its scale or measuring range, digits in ``unit``."""
    unit: str
    largest_error: str
    """Digits in ``unit``: class times range of a dial, stated error of a digital one."""
    accuracy_class: str = ""
    """As on the dial, such as 1.0; empty for one without a class."""
    certificate: str
    due: date
    """Last day on which it may be used."""


@dataclass(frozen=True, kw_only=True)
class InstrumentFoundBad(Said):
    """A gauge that reads wrongly: everything that was read with it since it was known good is in doubt."""

    KIND: ClassVar[EventKind] = EventKind.INSTRUMENT_FOUND_BAD

    serial: str
    on: date
    good_until: date
    """Last day on which it was known to read rightly: mostly its last certificate's."""
    what: str
    by: str

    def doubts(self, day: date) -> bool:
        """Whether what was read with it on that ``day`` is in doubt."""
        return day > self.good_until


@dataclass(frozen=True, kw_only=True)
class Instrument:
    """A gauge as it follows from all events."""

    listed: Told[InstrumentListed]
    """Its last certificate."""
    bad: Told[InstrumentFoundBad] | None
    """Found bad since then; a new certificate clears it."""

    def usable_on(self, day: date) -> bool:
        """Whether it may be used on that ``day``: not overdue, and not found bad."""
        return day <= self.listed.said.due and self.bad is None


def instruments(view: View) -> dict[str, Instrument]:
    """Every gauge that was ever listed, by serial number."""
    found: dict[str, Instrument] = {
        one.said.serial: Instrument(listed=one, bad=None) for one in told(view, InstrumentListed)
    }
    for bad in told(view, InstrumentFoundBad):
        known = found.get(bad.said.serial)
        if known is not None and known.listed.sequence < bad.sequence:
            found[bad.said.serial] = Instrument(listed=known.listed, bad=bad)
    return found


def named(view: View, given: str) -> Instrument | None:
    """The gauge with that serial number, or with that number of the works if exactly one has it."""
    known = instruments(view)
    if given in known:
        return known[given]
    alike = [one for one in known.values() if given and one.listed.said.number == given]
    return alike[0] if len(alike) == 1 else None


def usable(view: View, given: str, *, day: date) -> Instrument:
    """The gauge that was used, fit for use on that ``day``: a serial number or the works' own number.

    Raises RefusedError for one that isn't listed, was overdue or had been found bad.
    """
    found = named(view, given)
    where = f"gauge {quoted(given)}"
    if found is None:
        raise RefusedError(
            Problem(
                where=where,
                what="No gauge with this number is listed.",
                fix="List it with its certificate and due date: jamnut instruments.",
            )
        )
    if found.bad is not None:
        raise RefusedError(
            Problem(
                where=where,
                what=f"It was found bad on {found.bad.said.on}: {quoted(found.bad.said.what)}.",
                fix="Read again with another gauge; list this one with a new certificate first.",
            )
        )
    if day > found.listed.said.due:
        raise RefusedError(
            Problem(
                where=where,
                what=f"Its check was due on {found.listed.said.due}; the reading is of {day}.",
                fix="Read again with a gauge that isn't overdue.",
            )
        )
    return found


def in_doubt(view: View, bad: InstrumentFoundBad) -> tuple[KeptReading, ...]:
    """Every reading that was made with a gauge since it was last known good, of all machines."""
    return tuple(one for one in readings(view, instrument=bad.serial) if bad.doubts(one.said.on))


def hold_in_range(listed: InstrumentListed, *, where: str, value: str, unit: str) -> None:
    """A gauge shows nothing beyond its range. Raises RefusedError, also where its unit is no pressure.

    ``where``: what the reading is of; ``value``: digits in ``unit``, the sheet's.
    """
    read, end = digits_of("reading", value), Decimal(listed.range_end)
    if listed.unit != unit:
        if {listed.unit, unit} <= _PRESSURES:
            # In floats a gauge's own end may come out a hair below the reading that it shows there.
            read = Decimal(round(to_unit(from_unit(float(read), unit), listed.unit), _DECIMALS))
        else:
            end = Decimal("-Infinity")
    if read > end:
        raise RefusedError(
            Problem(
                where=where,
                what=f"{value} {unit} isn't in the range of gauge {listed.serial}, which ends at "
                f"{listed.range_end} {listed.unit}.",
                fix="Look at the figure, and at which gauge was read.",
            )
        )


def coarser(listed: InstrumentListed, *, unit: str, error: str) -> bool:
    """Whether a gauge may be further out than a sheet counts on; in another unit that isn't known, so yes.

    ``unit`` of the sheet's row, ``error`` its gauge's largest error as digits in it.
    """
    if listed.unit != unit:
        return True
    return digits_of("largest error", listed.largest_error) > Decimal(error)
