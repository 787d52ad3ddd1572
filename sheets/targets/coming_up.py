"""Whether a setting can be come up to from below its window, within the range of its own screw."""

from __future__ import annotations

from dataclasses import replace

from sheets.amounts import Finding, Severity, bar
from sheets.targets.settings import Origin, Setting

ROOM_BELOW_BAR = 1.0
"""Policy: how far below its window a screw must reach, so that a gauge shows that it came up from below."""


def with_room_below(setting: Setting) -> tuple[Setting, tuple[Finding, ...]]:
    """The setting with a window that its screw reaches from below, and the refusal where it can't.

    A window from policy begins as high as that takes, as long as the target stays within it; a given one
    stays as given. Springs and screws have slack, so a setting that is come down to doesn't hold: trade
    practice.
    """
    least_bar = setting.screw.lowest_bar + ROOM_BELOW_BAR
    if setting.low_bar >= least_bar - 1e-9:
        return replace(setting, floor_bar=max(setting.floor_bar, least_bar)), ()
    if setting.window_origin is Origin.POLICY and least_bar < setting.target_bar:
        return replace(setting, low_bar=least_bar, floor_bar=max(setting.floor_bar, least_bar)), ()
    finding = Finding(
        code="no_room_below",
        severity=Severity.REFUSED,
        subject=setting.adjuster,
        data={
            "bottom": bar(setting.low_bar),
            "lowest": bar(setting.screw.lowest_bar),
            "room": bar(ROOM_BELOW_BAR),
        },
    )
    return setting, (finding,)
