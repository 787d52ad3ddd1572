"""Instruments: told to the register with their certificates, and what hangs on each."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date, datetime

from sheets.errors import InputError, Problem
from sheets.pipeline.whole import whole_register
from sheets.register.acts import ZeroRead
from sheets.register.instruments import Instrument, InstrumentFoundBad, InstrumentListed
from sheets.register.instruments import instruments as known_instruments
from sheets.register.listing_instruments import amount_of, largest_error, list_instrument, listed
from sheets.register.listing_instruments import found_bad as told_bad
from sheets.register.opening import Place, open_register
from sheets.register.readings import KeptReading, readings
from sheets.register.saying import Told, told
from sheets.register.store import View
from sheets.wording.plain import FORMAT, Json, columns


@dataclass(frozen=True, kw_only=True)
class Hanging:
    """Something that was read with a gauge."""

    event: int
    on: date
    machine: str
    document: str
    record_id: str
    what: str
    """As found, as left, or a zero; with its place."""
    value: str
    people: tuple[str, ...]
    counts: bool
    """Not struck through."""
    in_doubt: bool
    """Read since the gauge was last known good."""


@dataclass(frozen=True, kw_only=True)
class GaugeOn:
    """A gauge as of one day, with what hangs on it where that was asked."""

    day: date
    instrument: Instrument
    hanging: tuple[Hanging, ...] = ()

    @property
    def standing(self) -> str:
        """Whether it may be used on that day."""
        if self.instrument.bad is not None:
            return "found bad"
        return "usable" if self.instrument.usable_on(self.day) else "overdue"


@dataclass(frozen=True, kw_only=True)
class GaugesOn:
    """All gauges, or one with what hangs on it."""

    gauges: tuple[GaugeOn, ...]
    one: bool
    """One was asked for."""


def instruments(register_at: Place, *, on: date, given: str | None = None) -> GaugesOn:
    """Every gauge, or one with everything that was read with it, as of a day.

    ``on``: the day that due dates are held against; ``given``: serial number, or number at the works. Raises
    InputError for a gauge that isn't listed.
    """
    with whole_register(register_at) as whole:
        view = whole.view
        if given is None:
            known = known_instruments(view)
            return GaugesOn(
                gauges=tuple(GaugeOn(day=on, instrument=known[serial]) for serial in sorted(known)), one=False
            )
        found = listed(view, given)
        return GaugesOn(
            gauges=(GaugeOn(day=on, instrument=found, hanging=hanging_on(view, found)),), one=True
        )


def hanging_on(view: View, found: Instrument) -> tuple[Hanging, ...]:
    """All readings and zeros that were made with a gauge, of all machines, by day."""
    serial = found.listed.said.serial
    bad = found.bad.said if found.bad is not None else None
    made = [_reading(one, bad) for one in readings(view, instrument=serial)]
    made += [_zero(one, bad) for one in told(view, ZeroRead, saying=serial) if one.said.instrument == serial]
    return tuple(sorted(made, key=lambda one: (one.on, one.event)))


def _reading(one: KeptReading, bad: InstrumentFoundBad | None) -> Hanging:
    said = one.said
    return Hanging(
        event=one.told.sequence,
        on=said.on,
        machine=one.told.machine,
        document=one.told.document,
        record_id=one.told.record_id,
        what=f"{said.adjuster} {said.phase.value}",
        value=f"{said.value} {said.unit}",
        people=said.people,
        counts=one.counts,
        in_doubt=bad is not None and bad.doubts(said.on),
    )


def _zero(one: Told[ZeroRead], bad: InstrumentFoundBad | None) -> Hanging:
    said = one.said
    return Hanging(
        event=one.sequence,
        on=said.on,
        machine=one.machine,
        document=one.document,
        record_id=one.record_id,
        what=f"zero at {said.where}",
        value=f"{said.value} {said.unit}",
        people=(said.by,),
        counts=True,
        in_doubt=bad is not None and bad.doubts(said.on),
    )


def list_gauge(
    register_at: Place,
    *,
    serial: str,
    number: str,
    what: str,
    range_text: str,
    accuracy_class: str,
    error_text: str,
    certificate: str,
    due: date,
    by: str,
    when: datetime,
) -> int:
    """Lists a gauge with a certificate; gives the number of the event.

    ``range_text`` and ``error_text`` are digits with a unit; one of class and error is enough. Raises
    InputError for what can't be read or contradicts itself, and as the register does.
    """
    range_end, unit = amount_of("--range", range_text)
    error = ""
    if error_text:
        error, other = amount_of("--error", error_text)
        if other != unit:
            raise InputError(
                Problem(
                    where="--error",
                    what=f"It is in {other}, the range in {unit}.",
                    fix="Give both in the unit in which the gauge shows.",
                )
            )
    said = InstrumentListed(
        serial=serial,
        number=number,
        what=what,
        range_end=range_end,
        unit=unit,
        largest_error=largest_error(range_end=range_end, accuracy_class=accuracy_class, error=error),
        accuracy_class=accuracy_class,
        certificate=certificate,
        due=due,
    )
    with open_register(register_at) as register:
        return list_instrument(register, said, by=by, when=when)


def gauge_found_bad(
    register_at: Place, *, given: str, what: str, good_until: date, on: date, by: str, when: datetime
) -> None:
    """Tells that a gauge reads wrongly since ``good_until``; ``on``: the day it was found. Raises as it."""
    with open_register(register_at) as register:
        told_bad(register, given, what=what, good_until=good_until, on=on, by=by, when=when)


def instruments_text(found: GaugesOn) -> Iterator[str]:
    """Gauges in columns, each with its event; of one, what hangs on it."""
    if not found.gauges:
        yield "no gauge is listed"
        return
    rows = [("event", "serial", "no.", "what", "range", "largest error", "certificate", "due", "")]
    for one in found.gauges:
        it, said = one.instrument.listed, one.instrument.listed.said
        rows.append(
            (
                str(it.sequence),
                said.serial,
                said.number,
                said.what,
                f"{said.range_end} {said.unit}",
                f"{said.largest_error} {said.unit}",
                said.certificate,
                said.due.isoformat(),
                one.standing,
            )
        )
    yield from columns(rows)
    for one in found.gauges if found.one else ():
        bad = one.instrument.bad
        if bad is not None:
            yield (
                f"found bad on {bad.said.on} by {bad.said.by}: {bad.said.what} (event {bad.sequence}); "
                f"known good until {bad.said.good_until}"
            )
        yield f"read with it: {len(one.hanging)}"
        if one.hanging:
            yield from columns([_HEAD, *map(_row, one.hanging)])


_HEAD = ("event", "day", "machine", "record", "what", "value", "by", "")


def _row(one: Hanging) -> tuple[str, ...]:
    mark = "struck through" if not one.counts else "in doubt" if one.in_doubt else ""
    people = ", ".join(one.people)
    return (str(one.event), str(one.on), one.machine, one.record_id, one.what, one.value, people, mark)


def instruments_json(found: GaugesOn) -> dict[str, Json]:
    """The same as data."""
    gauges: list[Json] = []
    for one in found.gauges:
        said, bad = one.instrument.listed.said, one.instrument.bad
        gauges.append(
            {
                "event": one.instrument.listed.sequence,
                "serial": said.serial,
                "number": said.number or None,
                "what": said.what,
                "range": f"{said.range_end} {said.unit}",
                "largest_error": f"{said.largest_error} {said.unit}",
                "class": said.accuracy_class or None,
                "certificate": said.certificate,
                "due": said.due.isoformat(),
                "standing": one.standing,
                "found_bad": bad.sequence if bad else None,
                "read_with_it": list[Json](_hanging_json(it) for it in one.hanging) if found.one else None,
            }
        )
    return {"format": FORMAT, "gauges": gauges}


def _hanging_json(one: Hanging) -> dict[str, Json]:
    return {
        "event": one.event,
        "on": one.on.isoformat(),
        "machine": one.machine,
        "document": one.document,
        "record_id": one.record_id,
        "what": one.what,
        "value": one.value,
        "people": list[Json](one.people),
        "struck": not one.counts,
        "in_doubt": one.in_doubt,
    }
