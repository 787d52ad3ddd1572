"""What must fit together over the whole machine file: identifiers, ports, drives, supplies, gauges.

Each check takes a ``Survey``, which may have holes: entries that couldn't be read. Nothing is said about
what a hole may hold, so that one wrong unit doesn't bring a second, false complaint.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Final

from sheets.errors import nearest, quoted
from sheets.machine.flaws import Flaw
from sheets.machine.model import Machine, Supply
from sheets.machine.part_base import unknown_port
from sheets.machine.parts import (
    DialGauge,
    DigitalGauge,
    DirectionalValve,
    ElectricMotor,
    Part,
    Pump,
    Reservoir,
    TestPoint,
    VariablePump,
)


@dataclass(frozen=True, kw_only=True)
class Survey:
    """What could be read of a machine file."""

    parts: Mapping[str, Part]
    gauges: Mapping[str, DialGauge | DigitalGauge]
    nets: Mapping[str, tuple[tuple[int, str], ...]]
    """Port references of each net, with their places in its list."""
    torn_nets: frozenset[str] = frozenset()
    """Nets in which some reference couldn't be read."""
    energy: Mapping[str, Supply]
    identifiers: tuple[tuple[str, str], ...]
    """Section and identifier of every entry, read or not, in the order of the file."""

    @cached_property
    def unread(self) -> frozenset[str]:
        """Identifiers of entries that couldn't be read."""
        return frozenset(id for _, id in self.identifiers) - {*self.parts, *self.gauges, *self.energy}

    @cached_property
    def connected(self) -> frozenset[str]:
        """Ports that stand in some net."""
        return frozenset(port for ports in self.nets.values() for _, port in ports)

    def ports_of(self, id: str) -> tuple[str, ...] | None:
        """Ports of a part or gauge; None if there is none of that identifier, or it couldn't be read."""
        part = self.parts.get(id)
        if part is not None:
            return part.ports
        return self.gauges[id].PORTS if id in self.gauges else None

    @classmethod
    def of(cls, machine: Machine) -> Survey:
        """Survey of a machine that was read whole."""
        sections: dict[str, Mapping[str, object]] = {
            "parts": machine.parts,
            "gauges": machine.gauges,
            "energy": machine.energy,
        }
        return cls(
            parts=machine.parts,
            gauges=machine.gauges,
            nets={net: tuple(enumerate(ports)) for net, ports in machine.nets.items()},
            energy=machine.energy,
            identifiers=tuple((section, id) for section, entries in sections.items() for id in entries),
        )


def identifiers(survey: Survey) -> Iterator[Flaw]:
    """One identifier names one thing, whatever its letters' case."""
    seen: dict[str, tuple[str, str]] = {}
    for section, id in survey.identifiers:
        other = seen.setdefault(id.casefold(), (section, id))
        if other != (section, id):
            yield Flaw(
                at=(section, id),
                what=f"The identifier {quoted(id)} is taken: {quoted(other[1])} stands under {other[0]}.",
                fix="Give each part, gauge and energy source an identifier of its own.",
            )


def nets(survey: Survey) -> Iterator[Flaw]:
    """Each net joins two or more ports that exist, and a port is in one net only."""
    home: dict[str, str] = {}
    for net, ports in survey.nets.items():
        if net in survey.torn_nets:
            pass
        elif not ports:
            yield Flaw(
                at=("nets", net), what="The net is empty.", fix="Write the ports that it joins, or remove it."
            )
        elif len({port for _, port in ports}) < 2:
            yield Flaw(
                at=("nets", net),
                what=f"The net has one port only, {ports[0][1]}.",
                fix="Write the ports that it joins; a port that is closed belongs under plugged of its part.",
            )
        for place, port in ports:
            at = ("nets", net, place)
            if port in home:
                again = (
                    "a second time in this net"
                    if home[port] == net
                    else f"in the net {quoted(home[port])} already"
                )
                yield Flaw(
                    at=at,
                    what=f"Port {port} stands {again}.",
                    fix="A port is in one net; remove it here or there.",
                )
            home.setdefault(port, net)
            yield from (Flaw(at=at, what=what, fix=fix) for what, fix in _unknown(survey, port))


def _unknown(survey: Survey, reference: str) -> Iterator[tuple[str, str]]:
    id, port = reference.split(".")
    ports = survey.ports_of(id)
    if ports is not None:
        if port not in ports:
            yield f"{id} has no port {quoted(port)}.", unknown_port(port, ports)
    elif id in survey.energy:
        yield f"{id} is an energy source, which has no ports.", "Name the part whose port is joined here."
    elif id not in survey.unread:
        known = [*survey.parts, *survey.gauges, *survey.unread]
        yield f"No part is called {quoted(id)}.", _name_one(id, known, "Name a part that stands under parts")


def _name_one(given: str, known: list[str], otherwise: str) -> str:
    right = nearest(given, known)
    return f"Did you mean {right}? {otherwise}." if right else f"{otherwise}."


def ports(survey: Survey) -> Iterator[Flaw]:
    """Each port is in a net or plugged, and not both. The reservoir's are open places and may be unused."""
    for id, part in survey.parts.items():
        if isinstance(part, Reservoir) or survey.torn_nets:
            loose: tuple[str, ...] = ()
        elif isinstance(part, VariablePump):
            loose = tuple(port for port in part.ports if port != "X")
        else:
            loose = part.ports
        for port in loose:
            if f"{id}.{port}" not in survey.connected and port not in part.plugged:
                yield Flaw(
                    at=("parts", id),
                    what=f"Port {port} is in no net and not plugged.",
                    fix=f"Write {id}.{port} into its net, or plugged: [{port}] under {id} if it is closed.",
                )
        for place, port in enumerate(part.plugged):
            if f"{id}.{port}" in survey.connected:
                yield Flaw(
                    at=("parts", id, "plugged", place),
                    what=f"Port {port} is plugged and stands in a net.",
                    fix=f"Remove it under plugged, or {id}.{port} from the net.",
                )


def load_sensing_ports(survey: Survey) -> Iterator[Flaw]:
    """An LS port that isn't connected needs to be known: drained, fed or sealed."""
    for id, part in survey.parts.items():
        if not isinstance(part, VariablePump) or part.load_sensing is None:
            continue
        at = ("parts", id, "load sensing", "port not connected")
        stated = part.load_sensing.port_not_connected
        if stated is None and f"{id}.X" not in survey.connected and not survey.torn_nets:
            yield Flaw(
                at=at,
                what="Port X is in no net, and the file doesn't say what holds its pressure then.",
                fix="Write port not connected: drained, fed or sealed, as the maker's drawing shows it.",
            )
        elif stated is not None and f"{id}.X" in survey.connected:
            yield Flaw(
                at=at,
                what=f"Port X is called {stated} as not connected, but stands in a net.",
                fix=f"Remove port not connected, or {id}.X from the net.",
            )


def drives(survey: Survey) -> Iterator[Flaw]:
    """Each pump has an electric motor."""
    motors = [id for id, part in survey.parts.items() if isinstance(part, ElectricMotor)]
    for id, part in survey.parts.items():
        if not isinstance(part, Pump) or part.driven_by in motors or part.driven_by in survey.unread:
            continue
        what = f"No part is called {quoted(part.driven_by)}."
        if part.driven_by in survey.parts:
            what = f"{part.driven_by} is a {survey.parts[part.driven_by].kind}, which drives no pump."
        yield Flaw(
            at=("parts", id, "driven by"),
            what=what,
            fix=_name_one(
                part.driven_by, motors, f"Name an electric motor: {', '.join(motors) or 'none is there yet'}"
            ),
        )


def supplies(survey: Survey) -> Iterator[Flaw]:
    """Supplies feed what takes electricity, and whatever takes it is fed."""
    fed: set[tuple[str, str]] = set()
    for id, supply in survey.energy.items():
        for place, consumer in enumerate(supply.feeds):
            fed.add((supply.kind, consumer))
            yield from _wrongly_fed(survey, supply, consumer, ("energy", id, "feeds", place))
    if any(section == "energy" and id in survey.unread for section, id in survey.identifiers):
        return
    for id, part in survey.parts.items():
        kind = _supply_of(part)
        if kind and (kind, id) not in fed:
            yield Flaw(
                at=("parts", id),
                what=f"No {kind} feeds this {part.kind}.",
                fix=f"Write {id} under feeds of the {kind} whose isolator cuts it off.",
            )


def _supply_of(part: Part) -> str | None:
    """Kind of supply that a part takes."""
    if isinstance(part, ElectricMotor):
        return "electrical supply"
    if isinstance(part, DirectionalValve) and part.operated_by == "solenoids":
        return "control supply"
    return None


def _wrongly_fed(survey: Survey, supply: Supply, consumer: str, at: tuple[str | int, ...]) -> Iterator[Flaw]:
    part = survey.parts.get(consumer)
    if part is None:
        if consumer not in survey.unread:
            known = [id for id, known_part in survey.parts.items() if _supply_of(known_part)]
            fix = _name_one(consumer, known, "Name a motor or a solenoid valve that stands under parts")
            yield Flaw(at=at, what=f"No part is called {quoted(consumer)}.", fix=fix)
    elif _supply_of(part) is None:
        yield Flaw(
            at=at,
            what=f"{consumer} is a {part.kind}, which takes no electricity here.",
            fix="Remove it, or name the motor or solenoid valve that is fed.",
        )
    elif _supply_of(part) != supply.kind:
        yield Flaw(
            at=at,
            what=f"{consumer} is a {part.kind} and is fed by a {_supply_of(part)}, not by a {supply.kind}.",
            fix=f"Write {consumer} under feeds of its {_supply_of(part)}.",
        )


def isolators(survey: Survey) -> Iterator[Flaw]:
    """The words on a plate lead to one device: two with the same can't be told apart."""
    first: dict[str, str] = {}
    for id, supply in survey.energy.items():
        other = first.setdefault(" ".join(supply.isolator.plate.casefold().split()), id)
        if other == id:
            continue
        here, there = supply.isolator, survey.energy[other].isolator
        if here == there and here.shared:
            continue
        yield Flaw(
            at=("energy", id, "isolator", "plate"),
            what=f"The isolator of {other} has the same plate, {quoted(here.plate)}.",
            fix="Write the words of its own plate; where one device cuts both supplies, describe it in both "
            "with the same words and shared: yes.",
        )


def gauges(survey: Survey) -> Iterator[Flaw]:
    """A gauge is fixed on a net or fitted at test points, and not both."""
    points = [id for id, part in survey.parts.items() if isinstance(part, TestPoint)]
    for id, gauge in survey.gauges.items():
        fixed = f"{id}.P" in survey.connected
        if fixed == bool(gauge.fitted_at) and (fixed or not survey.torn_nets):
            is_both = (
                "is fixed on a net, and is to be fitted at test points too" if fixed else "is fitted nowhere"
            )
            yield Flaw(
                at=("gauges", id, "fitted at") if fixed else ("gauges", id),
                what=f"The gauge {is_both}.",
                fix=f"Either write {id}.P into a net, or name test points under fitted at.",
            )
        for place, point in enumerate(gauge.fitted_at):
            if point in points or point in survey.unread:
                continue
            known = survey.parts.get(point)
            yield Flaw(
                at=("gauges", id, "fitted at", place),
                what=f"{point} is a {known.kind}, not a test point."
                if known
                else f"No part is called {quoted(point)}.",
                fix=_name_one(
                    point, points, f"Name a test point: {', '.join(points) or 'none is there yet'}"
                ),
            )


def reservoir(survey: Survey) -> Iterator[Flaw]:
    """There is a reservoir."""
    if not survey.unread and not any(isinstance(part, Reservoir) for part in survey.parts.values()):
        yield Flaw(
            at=("parts",),
            what="There is no reservoir.",
            fix="Write a part of kind: reservoir, with where and volume, and join the tank lines to it.",
        )


CHECKS: Final[tuple[Callable[[Survey], Iterator[Flaw]], ...]] = (
    identifiers,
    nets,
    ports,
    load_sensing_ports,
    drives,
    supplies,
    isolators,
    gauges,
    reservoir,
)


def cross_check(survey: Survey) -> Iterator[Flaw]:
    """Everything that doesn't fit together."""
    for check in CHECKS:
        yield from check(survey)
