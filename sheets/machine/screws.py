"""Every adjuster of a machine by its id."""

from __future__ import annotations

from dataclasses import dataclass

from sheets.machine.model import Machine
from sheets.machine.parts import Adjuster

ONLY_ONE = "adjuster"
"""Name within its part of an adjuster that has no other beside it."""


@dataclass(frozen=True, kw_only=True)
class Screw:
    """An adjuster and the part that it is on."""

    part: str
    name: str
    """Within the part: ``compensator``; ``adjuster`` where there is no other."""
    adjuster: Adjuster


def screws_of(machine: Machine) -> dict[str, Screw]:
    """Adjusters by id, in the order of the file: ``RV1`` alone on its part, else ``PU1.compensator``."""
    return {
        (id_ if name == ONLY_ONE else f"{id_}.{name}"): Screw(part=id_, name=name, adjuster=adjuster)
        for id_, part in machine.parts.items()
        for name, adjuster in part.adjusters().items()
    }
