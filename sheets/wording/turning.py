"""How far a screw is turned at a time, from what a turn changes and what the window allows."""

from __future__ import annotations

import math
from typing import Final

LARGEST: Final = 0.25
"""Of a turn: nobody turns more at a time, however little it changes."""
SMALLEST: Final = 0.0625
"""Of a turn: less than that isn't counted, only felt."""
WITHOUT_FIGURE: Final = 0.125
"""Of a turn, where nobody knows what a turn changes: policy."""


def step_of_turn(*, per_turn_bar: float | None, half_window_bar: float) -> float:
    """Share of a turn that may be turned between two readings; 0 where even a sixteenth is too much.

    ``per_turn_bar``: change of the setting for one turn, in bar; None where it isn't known;
    ``half_window_bar``: half of the accepted window in bar. The step changes at most half of the window, so
    that the reading can't jump over it. Source: rule of this project.
    """
    if per_turn_bar is None:
        return WITHOUT_FIGURE
    step = LARGEST
    while step >= SMALLEST:
        if step * per_turn_bar <= half_window_bar * (1.0 + 1e-9):
            return step
        step /= 2.0
    return 0.0


def coarse_until_bar(*, low_bar: float, per_turn_bar: float, graduation_bar: float) -> float:
    """Reading up to which quarter turns will do: one more still ends below the window. Bar, on a graduation.

    ``low_bar``: lower end of the window; ``per_turn_bar``: change for one turn; ``graduation_bar`` of the
    gauge; all in bar. Source: rule of this project.
    """
    until_bar = low_bar - LARGEST * per_turn_bar
    return max(0.0, math.floor(until_bar / graduation_bar + 1e-6) * graduation_bar)
