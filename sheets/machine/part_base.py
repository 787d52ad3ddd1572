"""What parts have in common."""

from __future__ import annotations

from collections.abc import Iterator
from typing import ClassVar

from sheets.errors import nearest, quoted
from sheets.machine.adjusters import Adjuster
from sheets.machine.fields import Entry, Lpm, PortName, PositiveBar, Text
from sheets.machine.flaws import Flaw


class PartBase(Entry):
    """What every part has."""

    PORTS: ClassVar[tuple[str, ...]] = ()
    """Ports in the order of the law; flow is positive into the first."""
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset()
    """Ports that the part's rating doesn't speak of (suction, tank, case)."""

    NEVER_PLUGGED: ClassVar[frozenset[str]] = frozenset()
    """Ports that must lead somewhere: a case that leaks inside has no other way out."""

    designation: Text = ""
    """Code on the machine's own drawing (ISO 1219-2)."""
    name: Text = ""
    """What people call it; the kind, if left out."""
    where: Text
    """Where it is to be found."""
    plugged: tuple[PortName, ...] = ()
    """Ports that are closed with a plug, hence in no net."""

    @property
    def ports(self) -> tuple[str, ...]:
        """All ports of this part."""
        return self.PORTS

    def adjusters(self) -> dict[str, Adjuster]:
        """Adjusters on this part, by their name within it."""
        return {}

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        for place, port in enumerate(self.plugged):
            if port not in self.ports:
                yield Flaw(
                    at=("plugged", place),
                    what=f"{quoted(port)} isn't a port of this part.",
                    fix=unknown_port(port, self.ports),
                )
            elif port in self.NEVER_PLUGGED:
                yield Flaw(
                    at=("plugged", place),
                    what=f"{port} takes what leaks inside the part; plugged, the case bursts.",
                    fix=f"Write {port} into the net that leads to the reservoir.",
                )
            elif port in self.plugged[:place]:
                yield Flaw(at=("plugged", place), what=f"{port} is named twice.", fix="Write it once.")


class RatedPart(PartBase):
    """A part that holds pressure."""

    rating_bar: PositiveBar
    """Highest pressure that the part may see, from its plate or data sheet."""
    tank_rating_bar: PositiveBar | None = None
    """Highest pressure at the tank, suction or case port, where the maker gives one."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if self.tank_rating_bar is not None and not self.LOW_PRESSURE_PORTS & set(self.ports):
            yield Flaw(
                at=("tank rating",),
                what="This part has no tank, suction or case port that a tank rating could speak of.",
                fix="Leave tank rating out; rating holds for all its ports.",
            )


class FlowPath(RatedPart):
    """A part with a flow at a pressure drop, from A to B."""

    PORTS: ClassVar[tuple[str, ...]] = ("A", "B")
    rated_flow_lpm: Lpm
    """A flow whose pressure drop the maker gives."""
    rated_drop_bar: PositiveBar
    """Pressure drop at that flow."""


def unknown_port(port: str, ports: tuple[str, ...]) -> str:
    """What to do about a port that a part doesn't have."""
    right = nearest(port, ports)
    hint = f"Did you mean {right}? " if right else ""
    return hint + (f"Its ports are {', '.join(ports)}." if ports else "It has no ports at all.")
