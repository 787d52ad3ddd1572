"""From a setting to what may be read on a gauge: window, never-exceed, accuracy ratio."""

from __future__ import annotations

import math
from dataclasses import dataclass

UNREADABLE = 0.2
"""Of a graduation: nobody reads less, so a reading that is nearer to its setting stands as the setting."""
_DUST = 1e-6
"""Of a graduation: keeps 210/2 from falling just under 105."""


@dataclass(frozen=True, kw_only=True)
class ReadingWindow:
    """Accepted readings, on the graduations of the gauge."""

    low_bar: float
    high_bar: float
    too_coarse: bool
    """Fewer than three graduations lie in it."""

    @property
    def half_width_bar(self) -> float:
        return (self.high_bar - self.low_bar) / 2.0


def graduations_within(*, low_bar: float, high_bar: float, graduation_bar: float) -> tuple[float, float, int]:
    """Lowest and highest graduation inside an interval, in bar, and how many lie in it.

    ``low_bar`` and ``high_bar`` in bar, ``graduation_bar`` in bar, more than 0. Valid for any dial that
    starts at 0. Source: definition.
    """
    first = math.ceil(low_bar / graduation_bar - _DUST)
    last = math.floor(high_bar / graduation_bar + _DUST)
    return first * graduation_bar, last * graduation_bar, max(0, last - first + 1)


def as_set_bar(*, reading_bar: float, setting_bar: float, graduation_bar: float) -> float:
    """The reading of a setting, or the setting itself where nobody could read the difference.

    ``reading_bar`` and ``setting_bar`` in bar, ``graduation_bar`` of the gauge in bar. Returns bar. Source:
    common practice that a fifth of a division is the least that is read off a dial.
    """
    near = abs(reading_bar - setting_bar) < UNREADABLE * graduation_bar
    return setting_bar if near else reading_bar


def reading_window(
    *,
    low_bar: float,
    high_bar: float,
    graduation_bar: float,
    widen: bool,
    floor_bar: float,
    ceiling_bar: float,
) -> ReadingWindow:
    """The window as it can be read.

    ``low_bar`` and ``high_bar``: readings that the setting's window converts to; ``graduation_bar``:
    smallest division or step of the gauge. ``widen``: the window comes from policy, so it may grow by
    whole graduations until three lie in it, to at most twice its half width and never past ``floor_bar``
    and ``ceiling_bar`` (neighbours, inequality, ratings). A given window is only ever cut inward. Returns
    bar. Source: rule of this project.
    """
    first, last, count = graduations_within(low_bar=low_bar, high_bar=high_bar, graduation_bar=graduation_bar)
    if count < 3 and widen:
        middle_bar = (low_bar + high_bar) / 2.0
        half_bar = high_bar - low_bar  # twice the half width
        first, last, _ = graduations_within(
            low_bar=middle_bar - half_bar,
            high_bar=middle_bar + half_bar,
            graduation_bar=graduation_bar,
        )
        # Floor and ceiling are neighbours and ratings: no part of a graduation is given away there.
        first = max(first, math.ceil(floor_bar / graduation_bar - 1e-6) * graduation_bar)
        if ceiling_bar < last:
            last = math.floor(ceiling_bar / graduation_bar + 1e-6) * graduation_bar
        count = max(0, round((last - first) / graduation_bar) + 1)
        nearest = round(middle_bar / graduation_bar) * graduation_bar
        if count > 3 and first <= nearest - graduation_bar and nearest + graduation_bar <= last:
            first, last, count = nearest - graduation_bar, nearest + graduation_bar, 3
    return ReadingWindow(low_bar=first, high_bar=last, too_coarse=count < 3)


def never_exceed_bar(
    *, rating_bar: float, gauge_error_bar: float, graduation_bar: float, range_bar: float
) -> float:
    """The reading that must never be passed, in bar, on a graduation.

    ``rating_bar``: lowest rating in reach; ``gauge_error_bar``: largest error of the gauge;
    ``graduation_bar``: its smallest division or step; ``range_bar``: the end of its scale, beyond which it
    shows nothing more. The true pressure may stand above the reading by that error. Source: rule of this
    project.
    """
    most_bar = min(rating_bar - gauge_error_bar, range_bar)
    return math.floor(most_bar / graduation_bar + 1e-6) * graduation_bar


def accuracy_ratio(*, half_window_bar: float, gauge_error_bar: float) -> float:
    """Half of the printed window over the gauge's error.

    ``half_window_bar``: half of the printed window in bar; ``gauge_error_bar``: error of the gauge in
    bar. An accuracy ratio, not a test uncertainty ratio: it knows the gauge's class only. Source: common
    practice.
    """
    return half_window_bar / gauge_error_bar
