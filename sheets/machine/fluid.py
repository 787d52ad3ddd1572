"""The fluid and its temperatures."""

from __future__ import annotations

from collections.abc import Iterator

from sheets.machine.fields import Entry, OilCelsius, SettingCelsius, Text
from sheets.machine.flaws import Flaw

MINERAL_OIL = "mineral oil"


class Fluid(Entry):
    """The fluid in the reservoir."""

    kind: Text
    """For example mineral oil. The policy temperatures hold for mineral oil only."""
    grade: Text
    """ISO VG grade, for example ISO VG 46."""
    lowest_setting_temperature_c: SettingCelsius | None = None
    """Settings are made in this oil temperature window; policy for mineral oil, if left out."""
    highest_setting_temperature_c: SettingCelsius | None = None
    """Upper end of that window."""
    limit_temperature_c: OilCelsius
    """Above this the work stops."""

    def setting_window_c(self, *, lowest_c: float, highest_c: float) -> tuple[float, float]:
        """Oil temperatures between which settings are made, in °C; the two given are the policy's."""
        lowest, highest = self.lowest_setting_temperature_c, self.highest_setting_temperature_c
        return lowest_c if lowest is None else lowest, highest_c if highest is None else highest

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        lowest, highest = self.lowest_setting_temperature_c, self.highest_setting_temperature_c
        for key, this, other in (
            ("lowest setting temperature", lowest, highest),
            ("highest setting temperature", highest, lowest),
        ):
            if this is None and (other is not None or self.kind.casefold() != MINERAL_OIL):
                why = (
                    "the other end is given" if other is not None else "the policy window is for mineral oil"
                )
                yield Flaw(
                    at=(key,),
                    what=f"The {key} is missing; {why}.",
                    fix=f"Write it from the fluid's or the pump's data sheet, such as {key}: 45 °C.",
                )
        if lowest is not None and highest is not None and lowest >= highest:
            yield Flaw(
                at=("lowest setting temperature",),
                what="The lowest setting temperature isn't below the highest.",
                fix="Write the window in which settings are made, such as 45 °C to 55 °C.",
            )
        elif highest is not None and highest > self.limit_temperature_c:
            yield Flaw(
                at=("limit temperature",),
                what="The limit temperature is below the highest setting temperature.",
                fix="Write the temperature above which the work stops; it is the highest of the three.",
            )
