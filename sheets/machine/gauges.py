"""Gauges."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, ClassVar, Literal

from pydantic import Field

from sheets.machine.fields import Entry, Identifier, Percent, PositiveBar, Text
from sheets.machine.flaws import Flaw


class Gauge(Entry):
    """What dial and digital gauges share. Fixed on a net by port P, or fitted at test points for the job."""

    PORTS: ClassVar[tuple[str, ...]] = ("P",)
    """A fixed gauge's port; in no net for one that is fitted for the job."""

    name: Text = ""
    """What people call it; the kind, if left out."""
    where: Text = "in the gauge box"
    """Where it is kept or fixed."""
    range_bar: PositiveBar
    """End of its scale or of its measuring range."""
    rating_bar: PositiveBar
    """Highest pressure that doesn't harm it."""
    fitted_at: tuple[Identifier, ...] = ()
    """Test points at which it may be fitted for the job; the first is the usual one."""


class DialGauge(Gauge):
    """Gauge with a dial."""

    kind: Literal["dial gauge"]
    graduation_bar: PositiveBar
    """Pressure from one mark to the next."""
    accuracy_class: Percent
    """Error in percent of the range (EN 837-1 class, or the largest of an ASME grade)."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if self.graduation_bar >= self.range_bar:
            yield Flaw(
                at=("graduation",),
                what="The graduation is as large as the whole range.",
                fix="Write the pressure from one mark of the dial to the next.",
            )


class DigitalGauge(Gauge):
    """Gauge with digits."""

    kind: Literal["digital gauge"]
    resolution_bar: PositiveBar
    """Smallest step that it shows."""
    error_bar: PositiveBar
    """Largest error, from its data sheet."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        for key, value in (("resolution", self.resolution_bar), ("error", self.error_bar)):
            if value >= self.range_bar:
                yield Flaw(
                    at=(key,),
                    what=f"The {key} is as large as the whole range.",
                    fix=f"Write the {key} from the gauge's data sheet.",
                )


AnyGauge = Annotated[DialGauge | DigitalGauge, Field(discriminator="kind")]
