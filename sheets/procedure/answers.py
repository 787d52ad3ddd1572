"""What the search answers: a test state, not in use, or not found; data only."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from sheets.amounts import Finding
from sheets.circuit.plant import Adjust
from sheets.circuit.verdict import Verdict
from sheets.procedure.at_stop import Approach
from sheets.procedure.changes import Change
from sheets.procedure.conditions import Failure
from sheets.procedure.gauges import GaugeChoice


@dataclass(frozen=True, kw_only=True)
class NearMiss:
    """A state that doesn't serve, and the condition that fails in it."""

    changes: tuple[Change, ...]
    failure: Failure


@dataclass(frozen=True, kw_only=True)
class TestState:
    """Where an adjuster can be set: changes to the running rest state, and what is then read."""

    adjuster: str
    changes: tuple[Change, ...]
    cost: float
    gauge: GaugeChoice
    reading_bar: float
    """At the target, before it is brought to a graduation."""
    flow_lpm: float
    """Through the adjuster's own part, where its law depends on flow."""
    earlier: tuple[str, ...]
    """Adjusters that shift this reading a little, hence come first."""
    reasons: tuple[tuple[Change, Failure], ...]
    """For each change, what fails without it."""
    near_misses: tuple[NearMiss, ...]
    """Cheaper states that failed, the nearest first."""
    findings: tuple[Finding, ...]
    approach: Approach | None = None
    """How a cylinder gets to the stop at which this state holds it, where it does."""

    @property
    def raised(self) -> tuple[str, ...]:
        """Adjusters that stand out of the way in this state."""
        return tuple(change.adjuster for change in self.changes if isinstance(change, Adjust))


@dataclass(frozen=True, kw_only=True)
class Guard:
    """What a relief still protects that no sound state shows."""

    pumps: tuple[str, ...]
    """Those of which a control stuck at full stroke would let it open."""
    setting_bar: float
    given_by: str
    """Empty where the setting was computed."""


@dataclass(frozen=True, kw_only=True)
class NotInUse:
    """An adjuster that no state answers to: it gets no step, no tag and no refusal."""

    adjuster: str
    by_law: bool
    """Its control sees the same pressure on both its sides; else every state was tried."""
    states: int
    guard: Guard | None = None
    """Where it still protects: then it isn't set here, but it isn't idle either."""


@dataclass(frozen=True, kw_only=True)
class NotFound:
    """An adjuster without a test state."""

    adjuster: str
    verdict: Verdict
    states: int
    near_misses: tuple[NearMiss, ...]
    """States that failed, the nearest first; never empty."""

    @property
    def failure(self) -> Failure:
        """What fails in the nearest state."""
        return self.near_misses[0].failure

    @property
    def nearest(self) -> tuple[Change, ...]:
        """Changes that make the nearest state."""
        return self.near_misses[0].changes


@dataclass(frozen=True, kw_only=True)
class Search:
    """Answer for every adjuster that may be set, by id, in the order of the file."""

    answers: Mapping[str, TestState | NotInUse | NotFound]
    states: int
    """Sets of changes that were solved."""
    limit: int
    """States that might be solved in all; what wasn't found by then is not found within the limit."""

    def found(self) -> dict[str, TestState]:
        return {id_: answer for id_, answer in self.answers.items() if isinstance(answer, TestState)}
