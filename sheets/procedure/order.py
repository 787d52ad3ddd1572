"""The order of the settings: edges from the test states, ties from the highest target down."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum

from sheets.amounts import Finding, Severity
from sheets.procedure.answers import TestState
from sheets.targets.settings import Targets


class EdgeKind(Enum):
    """Why one adjuster comes before another."""

    NEEDS_AWAY = "its state holds the other away from its target"
    SHIFTS = "it shifts the other's reading"


@dataclass(frozen=True, kw_only=True)
class Edge:
    """``before`` is set before ``after``."""

    before: str
    after: str
    kind: EdgeKind


@dataclass(frozen=True, kw_only=True)
class Order:
    """Adjusters in the order of setting. A cycle leaves the sequence empty and is a finding."""

    sequence: tuple[str, ...]
    edges: tuple[Edge, ...]
    ties: tuple[frozenset[str], ...]
    """Sets that no edge orders: the highest target comes first."""
    findings: tuple[Finding, ...] = ()


def derive_edges(found: Mapping[str, TestState]) -> tuple[Edge, ...]:
    """A before B when A's state holds B away from its target, and where A shifts B's reading a little."""
    edges = [
        Edge(before=id_, after=raised, kind=EdgeKind.NEEDS_AWAY)
        for id_, state in found.items()
        for raised in state.raised
        if raised in found
    ]
    edges += [
        Edge(before=earlier, after=id_, kind=EdgeKind.SHIFTS)
        for id_, state in found.items()
        for earlier in state.earlier
        if earlier in found and earlier not in state.raised
    ]
    return tuple(edges)


def derive_order(found: Mapping[str, TestState], targets: Targets) -> Order:
    """Sorts adjusters by their edges; among those that are free, the highest target first."""
    edges = derive_edges(found)
    waiting = list(found)
    sequence: list[str] = []
    ties: list[frozenset[str]] = []
    while waiting:
        free = [
            id_ for id_ in waiting if not any(edge.after == id_ and edge.before in waiting for edge in edges)
        ]
        if not free:
            # What only comes after the cycle isn't in it.
            while followers := [
                id_ for id_ in waiting if not any(e.before == id_ and e.after in waiting for e in edges)
            ]:
                waiting = [id_ for id_ in waiting if id_ not in followers]
            cycle = Finding(
                code="order_cycle",
                severity=Severity.REFUSED,
                subject=waiting[0],
                data={"members": ", ".join(waiting)},
            )
            return Order(sequence=(), edges=edges, ties=tuple(ties), findings=(cycle,))
        if len(free) > 1:
            ties.append(frozenset(free))
        chosen = max(free, key=lambda id_: (targets.settings[id_].target_bar, -list(found).index(id_)))
        sequence.append(chosen)
        waiting.remove(chosen)
    return Order(sequence=tuple(sequence), edges=edges, ties=tuple(ties))
