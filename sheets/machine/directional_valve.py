"""Directional valve: its positions are sets of open paths."""

from __future__ import annotations

from collections.abc import Iterator
from typing import ClassVar, Literal

from pydantic import Field

from sheets.errors import nearest, quoted
from sheets.machine.fields import Entry, Lpm, PositionName, PositiveBar, Text
from sheets.machine.flaws import Flaw
from sheets.machine.part_base import RatedPart, unknown_port


class Signal(Entry):
    """The small ways inside a directional valve that carry the load signal."""

    rated_flow_lpm: Lpm
    """A flow through such a way whose pressure drop is known."""
    rated_drop_bar: PositiveBar
    """Pressure drop at that flow."""


class DirectionalValve(RatedPart):
    """Positions as sets of open paths, ``P to A``. A port in no path of a position is blocked there."""

    kind: Literal["directional valve"]
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset({"T"})
    positions: dict[PositionName, tuple[Text, ...]]
    """Open paths in each position, such as P to A; an empty list where all ports are blocked."""
    rest_position: PositionName
    """Position to which springs bring it, or in which it is left."""
    operated_by: Literal["lever", "solenoids"]
    """What shifts it."""
    solenoids: dict[PositionName, Text] = Field(default_factory=dict)
    """Solenoid that shifts the valve into each position."""
    rated_flow_lpm: Lpm
    """A flow over one path whose pressure drop the maker gives."""
    rated_drop_bar: PositiveBar
    """At the rated flow, over one path."""
    signal: Signal | None = None
    """Required where the valve has a port LS."""

    @property
    def ports(self) -> tuple[str, ...]:
        """All ports of this valve; LS is there if it has a signal."""
        return ("P", "T", "A", "B", "LS") if self.signal else ("P", "T", "A", "B")

    def paths(self, position: str) -> tuple[tuple[str, str], ...]:
        """Pairs of ports that are joined in a position, as written. Raises KeyError for no such position."""
        return tuple(ends for ends in map(_ends, self.positions[position]) if ends)

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if len(self.positions) < 2:
            yield Flaw(
                at=("positions",),
                what="A directional valve needs at least two positions.",
                fix="Write each position with its open paths, such as push: [P to A, B to T].",
            )
        if self.rest_position not in self.positions:
            yield Flaw(at=("rest position",), **self._no_position(self.rest_position))
        for position in self.positions:
            yield from self._wrong_paths(position)
        used = {port for position in self.positions for pair in self.paths(position) for port in pair}
        if self.signal and "LS" not in used:
            yield Flaw(
                at=("signal",),
                what="The valve has a load signal, but port LS is in no path of any position.",
                fix="Write where LS leads in each position, such as LS to T and A to LS.",
            )
        yield from self._wrong_solenoids()

    def _no_position(self, name: str) -> dict[str, str]:
        right = nearest(name, self.positions)
        return {
            "what": f"{quoted(name)} isn't a position of this valve.",
            "fix": (f"Did you mean {right}? " if right else "")
            + f"Its positions are {', '.join(self.positions)}.",
        }

    def _wrong_paths(self, position: str) -> Iterator[Flaw]:
        seen: set[frozenset[str]] = set()
        for place, path in enumerate(self.positions[position]):
            at = ("positions", position, place)
            ends = _ends(path)
            if ends is None:
                yield Flaw(
                    at=at, what=f"{quoted(path)} isn't a path.", fix="Write two ports, such as P to A."
                )
                continue
            for port in ends:
                if port == "LS" and not self.signal:
                    yield Flaw(
                        at=at,
                        what="A path names port LS, but the valve has no load signal.",
                        fix="Write signal with its rated flow and rated drop, or leave LS out.",
                    )
                elif port not in self.ports:
                    yield Flaw(
                        at=at,
                        what=f"{quoted(port)} isn't a port of this valve.",
                        fix=unknown_port(port, self.ports),
                    )
            if ends[0] == ends[1]:
                yield Flaw(
                    at=at, what="The path leads back to its own port.", fix="Write two different ports."
                )
            elif frozenset(ends) in seen:
                yield Flaw(at=at, what=f"The path {path} stands here twice.", fix="Write it once.")
            seen.add(frozenset(ends))

    def _wrong_solenoids(self) -> Iterator[Flaw]:
        if self.operated_by == "lever":
            if self.solenoids:
                yield Flaw(
                    at=("solenoids",),
                    what="The valve is operated by a lever and names solenoids.",
                    fix="Write operated by: solenoids, or leave the solenoids out.",
                )
            return
        for position in self.positions if self.rest_position in self.positions else ():
            if position != self.rest_position and position not in self.solenoids:
                yield Flaw(
                    at=("solenoids",),
                    what=f"No solenoid is named that shifts the valve to {position}.",
                    fix=f"Write solenoids: {{{position}: Y1}}, with its designation on the drawing.",
                )
        for place, (position, solenoid) in enumerate(self.solenoids.items()):
            if position not in self.positions:
                yield Flaw(at=("solenoids", position), **self._no_position(position))
            if solenoid in list(self.solenoids.values())[:place]:
                yield Flaw(
                    at=("solenoids", position),
                    what=f"Solenoid {solenoid} is named for two positions.",
                    fix="Name the solenoid that shifts the valve into each position.",
                )


def _ends(path: str) -> tuple[str, str] | None:
    ends = path.split(" to ")
    return (ends[0].strip(), ends[1].strip()) if len(ends) == 2 and all(end.strip() for end in ends) else None
