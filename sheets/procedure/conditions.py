"""The conditions that a test state must meet for an adjuster, as data with their numbers.

A state is judged with the adjuster at the bottom of its window, at its target, at the top, and at the end of
its range. No kind of adjuster is named: sites differ by their laws alone.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import Enum

from sheets.amounts import Amount, bar, ratio
from sheets.circuit.model import AdjusterSite
from sheets.circuit.solution import Solution

PRESSURE_DUST_BAR = 1e-6
"""Below this a pressure isn't over a rating: the solver's own resolution."""
SAME_PRESSURE_BAR = 1.0
"""A gauge within this of the controlled pressure sees it."""
OWN_SHARE = 0.5
"""The reading follows: at least half of what the part alone would give."""
EDGE_SHARE = 0.02
"""Another adjuster with this share of the own effect, or more, is set first."""


class Condition(Enum):
    """In the order in which they are judged; a state that fails later came nearer."""

    ESTABLISHED = "established"
    STILL = "still"
    FILLED = "filled"
    FOLLOWS = "follows"
    ALONE = "alone"
    AT_FLOW = "at_flow"
    THROUGH = "through"
    REACHES = "reaches"
    WITHIN = "within"
    BARRED = "barred"
    POWERED = "powered"
    SEEN = "seen"


@dataclass(frozen=True, kw_only=True)
class Failure:
    """One condition that fails, with its numbers."""

    condition: Condition
    data: Mapping[str, Amount | str] = field(default_factory=dict)


@dataclass(frozen=True, kw_only=True)
class Sight:
    """What a solved state shows of one adjuster."""

    reading_bar: float
    effect: float
    """Change of the reading for a change of the setting."""
    alone_effect: float
    """The same, of the part alone at that flow."""
    others: Mapping[str, float]
    """Effect of every other adjuster on the same reading."""
    flow_lpm: float
    """Flow through the part, where its law depends on flow."""


def sight(solution: Solution, site: AdjusterSite) -> Sight:
    """What a solved state shows of an adjuster. The state must have been solved with effects."""
    flow_lpm = solution.flows_lpm[site.part] if site.reference_flow_lpm > 0.0 else 0.0
    alone = site.flow_slope
    if site.reference_flow_lpm > 0.0:
        alone += (1.0 - site.flow_slope) * min(1.0, flow_lpm / site.reference_flow_lpm)
    return Sight(
        reading_bar=solution.pressures_bar[site.controlled_node],
        effect=solution.effects[site.id][site.controlled_node],
        alone_effect=alone,
        others={
            id_: effects[site.controlled_node] for id_, effects in solution.effects.items() if id_ != site.id
        },
        flow_lpm=flow_lpm,
    )


def unestablished(solution: Solution, trusted_ports: frozenset[str] = frozenset()) -> Failure | None:
    """A state whose pressures nobody knows, or that hang on where leakage leaves a cut-off LS port.

    ``trusted_ports`` are sealed ports of which the maker's drawing shows no bleed.
    """
    loose = solution.loose_ports - trusted_ports
    if solution.established and not loose:
        return None
    return Failure(condition=Condition.ESTABLISHED, data={"port": ", ".join(sorted(loose))})


def moving(solution: Solution) -> Failure | None:
    """The first actuator that moves, by name."""
    if not solution.moving:
        return None
    actuator = min(solution.moving)
    turns = not solution.circuit.actuators.has_stops[solution.circuit.actuators.ids.index(actuator)]
    return Failure(
        condition=Condition.STILL,
        data={
            "part": actuator,
            "speed": Amount(
                value=abs(solution.speeds[actuator]), quantity="speed_rpm" if turns else "speed_m_s"
            ),
        },
    )


def starved(solution: Solution) -> Failure | None:
    """A node where a void forms: a pump or an actuator draws what can't come."""
    if not solution.voids:
        return None
    return Failure(
        condition=Condition.FILLED, data={"line": solution.circuit.nodes[min(solution.voids)].name}
    )


def over_rating(solution: Solution) -> Failure | None:
    """The node that passes its rating by most, if one does."""
    nodes = solution.circuit.nodes
    worst = max(range(len(nodes)), key=lambda node: solution.pressures_bar[node] - nodes[node].rating_bar)
    if solution.pressures_bar[worst] - nodes[worst].rating_bar <= PRESSURE_DUST_BAR:
        return None
    return Failure(
        condition=Condition.WITHIN,
        data={
            "line": nodes[worst].name,
            "pressure": bar(solution.pressures_bar[worst]),
            "rating": bar(nodes[worst].rating_bar),
            "part": nodes[worst].rated_by,
        },
    )


def not_following(seen: Sight, target_bar: float) -> Failure | None:
    """The reading doesn't answer to this adjuster, or another has as strong a hand in it."""
    strongest = max(seen.others, key=lambda id_: abs(seen.others[id_]), default="")
    data: dict[str, Amount | str] = {
        "reading": bar(seen.reading_bar),
        "target": bar(target_bar),
        "effect": ratio(seen.effect),
        "governs": strongest if strongest and abs(seen.others[strongest]) >= OWN_SHARE else "",
    }
    if seen.effect < OWN_SHARE * seen.alone_effect:
        return Failure(condition=Condition.FOLLOWS, data=data)
    if strongest and abs(seen.others[strongest]) >= OWN_SHARE * seen.effect:
        data["governs"] = strongest
        return Failure(condition=Condition.ALONE, data=data)
    return None


def first_failure(
    solution: Solution, site: AdjusterSite, target_bar: float, trusted_ports: frozenset[str]
) -> Failure | None:
    """The conditions that one solved state decides, in their order."""
    return (
        unestablished(solution, trusted_ports)
        or moving(solution)
        or starved(solution)
        or not_following(sight(solution, site), target_bar)
        or over_rating(solution)
    )


def earlier_ones(seen: Sight) -> tuple[str, ...]:
    """Adjusters that shift this reading a little: they are set before it."""
    return tuple(
        id_ for id_, effect in seen.others.items() if abs(effect) >= EDGE_SHARE * max(seen.effect, EDGE_SHARE)
    )
