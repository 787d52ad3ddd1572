"""Relief valves, check valves and hand valves."""

from __future__ import annotations

from collections.abc import Iterator
from typing import ClassVar, Literal

from sheets.machine.adjusters import Adjuster
from sheets.machine.fields import Bar, Lpm, Ratio, Text, YesNo
from sheets.machine.flaws import Flaw
from sheets.machine.part_base import FlowPath, RatedPart


class ReliefValve(RatedPart):
    """Relief valve. Its setting is the reading at the reference flow."""

    kind: Literal["relief valve"]
    PORTS: ClassVar[tuple[str, ...]] = ("P", "T")
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset({"T"})
    acting: Literal["direct", "pilot operated"]
    """Whether the spring holds the main poppet itself, or a pilot does."""
    adjuster: Adjuster
    """Its screw."""
    opening_ratio: Ratio | None = None
    """Opening pressure over setting; policy where the plate gives none."""
    closing_ratio: Ratio | None = None
    """Closing pressure over setting; policy where the plate gives none."""
    reference_flow_lpm: Lpm | None = None
    """Flow at which the setting is read; the full flow that can reach it, if left out."""
    rated_flow_lpm: Lpm
    """Largest flow that it passes within its rating."""

    def adjusters(self) -> dict[str, Adjuster]:
        """Its one adjuster."""
        return {"adjuster": self.adjuster}

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        opening, closing = self.opening_ratio, self.closing_ratio
        if opening is not None and closing is not None and closing > opening:
            yield Flaw(
                at=("closing ratio",),
                what="The valve would close at a higher pressure than it opens at.",
                fix="Look both ratios up in the data sheet; the closing ratio is the smaller one.",
            )
        if self.reference_flow_lpm is not None and self.reference_flow_lpm > self.rated_flow_lpm:
            yield Flaw(
                at=("reference flow",),
                what="The reference flow is above the largest flow that the valve passes.",
                fix="Correct reference flow or rated flow from the data sheet.",
            )


class CheckValve(FlowPath):
    """Passes from A to B only."""

    kind: Literal["check valve"]
    opening_bar: Bar
    """Pressure difference at which it opens."""


class HandValve(FlowPath):
    """Valve that a person opens and closes."""

    kind: Literal["hand valve"]
    rest: Literal["open", "closed"]
    """As it stands in normal service."""
    lockable: YesNo
    """Whether it takes a padlock."""
    operated: Text = "turn the handle"
    """How to move it, as an instruction."""
