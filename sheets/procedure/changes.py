"""What may be changed to make a test state, and what each change costs the person who makes it.

Adjusters differ by their laws alone here: no kind of part or adjuster is named.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from heapq import heappop, heappush

from sheets.circuit.model import Circuit
from sheets.circuit.plant import Adjust, AtStop, MoveValve, PlantState, Stop, act
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, HandValve
from sheets.machine.screws import screws_of

Change = MoveValve | Adjust | AtStop


@dataclass(frozen=True, kw_only=True)
class Option:
    """One change with its cost and the thing it touches; a state takes one option of a thing."""

    change: Change
    touches: str
    cost: float


HAND_VALVE_COST = 2.0
LEVER_COST = 3.0
ADJUSTER_COST = 4.0
SOLENOID_COST = 6.0
OPENED_COST = 8.0
RUN_COST = 9.0
"""Policy, by reach and exposure: a hand valve stays where it is put, a lever must be held, a screw must be
brought back, a forced signal puts a person at a live panel, a way that is shut in service lets oil where none
is meant to go, a cylinder that runs to its stop moves beside people, on top of the lever that is held."""

STOPS: Mapping[str, Stop] = {"extended": "far stop", "retracted": "near stop"}
"""Stops of a cylinder as the file calls them."""
WAYS: Mapping[Stop, str] = {stop: way for way, stop in STOPS.items()}


def possible_options(machine: Machine, circuit: Circuit) -> tuple[Option, ...]:
    """Every single change, cheapest first, ties in the order of the file.

    An adjuster only moves out of the way, to the end of its range, never to a value that flatters another.
    One that may not be touched, or whose direction nobody knows, stays. A cylinder stands at a stop only
    where the file gives leave, one at a time.
    """
    options: list[Option] = []
    for id_, part in machine.parts.items():
        positions = circuit.positions.get(id_, ())
        if isinstance(part, HandValve):
            cost = HAND_VALVE_COST if part.rest == "open" else OPENED_COST
        elif getattr(part, "operated_by", None) == "lever":
            cost = LEVER_COST
        else:
            cost = SOLENOID_COST
        options.extend(
            Option(change=MoveValve(valve=id_, position=position), touches=id_, cost=cost)
            for position in positions[1:]
        )
        if isinstance(part, Cylinder) and part.may_run_to_stop is not None:
            at_stop = AtStop(actuator=id_, stop=STOPS[part.may_run_to_stop.stop])
            options.append(Option(change=at_stop, touches="a cylinder at its stop", cost=RUN_COST))
    screws = screws_of(machine)
    options.extend(
        Option(
            change=Adjust(adjuster=site.id, setting_bar=site.highest_bar),
            touches=site.id,
            cost=ADJUSTER_COST,
        )
        for site in circuit.adjusters
        if screws[site.id].adjuster.may_be_set and screws[site.id].adjuster.raises != "not known"
    )
    return tuple(sorted(options, key=lambda option: option.cost))


@dataclass(frozen=True, kw_only=True)
class Candidate:
    """A set of changes to the rest state, with its cost."""

    changes: tuple[Change, ...]
    cost: float

    def adjusts(self, adjuster: str) -> bool:
        return any(isinstance(change, Adjust) and change.adjuster == adjuster for change in self.changes)


def candidates(options: tuple[Option, ...]) -> Iterator[Candidate]:
    """Every set of changes, each once, cheapest first, then fewest, then in the order of options."""
    heap: list[tuple[float, int, tuple[int, ...]]] = [(0.0, 0, ())]
    while heap:
        cost, size, chosen = heappop(heap)
        yield Candidate(changes=tuple(options[index].change for index in chosen), cost=cost)
        touched = {options[index].touches for index in chosen}
        for index in range(chosen[-1] + 1 if chosen else 0, len(options)):
            if options[index].touches not in touched:
                heappush(heap, (cost + options[index].cost, size + 1, (*chosen, index)))


def count_candidates(options: tuple[Option, ...]) -> int:
    """How many sets of changes there are in all."""
    by_thing: dict[str, int] = {}
    for option in options:
        by_thing[option.touches] = by_thing.get(option.touches, 0) + 1
    count = 1
    for alternatives in by_thing.values():
        count *= alternatives + 1
    return count


def apply(state: PlantState, changes: tuple[Change, ...]) -> PlantState:
    """The state with all changes made. That a cylinder gets to its stop is another question."""
    for change in changes:
        if isinstance(change, AtStop):
            state = state.standing(change.actuator, change.stop)
        else:
            state = act(state, change)
    return state
