"""What the register keeps of a pack: its rows as printed, its files and its content."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Final

from sheets.machine.loading import Sources
from sheets.pages.compose.faces import digits, test_point
from sheets.pages.compose.matter import Matter
from sheets.pages.document import Layout
from sheets.procedure.answers import TestState
from sheets.procedure.rig import as_found_band
from sheets.quantities import number
from sheets.register.kept import Kept
from sheets.register.rows import Row

_DECIMALS: Final = 2
"""Of a limit that stands on no graduation."""


def kept_of(
    matter: Matter,
    layout: Layout,
    content: bytes,
    *,
    changes: tuple[str, ...] = (),
    reason: str = "",
    reviewer: str = "",
) -> Kept:
    """All that the register keeps of an issue; ``content`` is its canonical form."""
    sources, task = matter.sources, matter.procedure.task
    return Kept(
        rows=rows_of(matter),
        task=task.kind.value,
        part=task.part,
        paper=layout.paper,
        reason=reason,
        reviewer=reviewer,
        changes=changes,
        unit=matter.figures.pressure_unit,
        zero_limit=_limit(matter.figures.in_unit(matter.speaker.policies.zero_limit_bar), up=False),
        machine=sources.machine.decode(),
        site=(sources.site or b"").decode(),
        walkdown=(sources.walkdown or b"").decode(),
        content=content.decode(),
    )


def sources_of(kept: Kept) -> Sources:
    """The files of a pack as the register kept them."""
    return Sources(
        machine=kept.machine.encode(),
        site=kept.site.encode() or None,
        walkdown=kept.walkdown.encode() or None,
    )


def rows_of(matter: Matter) -> tuple[Row, ...]:
    """The rows of the record sheet, as they are printed, with what else a reading is judged by."""
    found = matter.procedure.search.found()
    return tuple(
        _row(matter, place, id_, found) for place, id_ in enumerate(matter.procedure.order.sequence, start=1)
    )


def _row(matter: Matter, place: int, adjuster: str, found: Mapping[str, TestState]) -> Row:
    choice, figures = found[adjuster].gauge, matter.figures
    drift_low, drift_high = as_found_band(
        expected_bar=choice.target_bar, graduation_bar=choice.graduation_bar
    )
    return Row(
        row=place,
        adjuster=adjuster,
        called=matter.speaker.adjuster(adjuster),
        gauge=choice.gauge,
        test_point=test_point(matter, choice),
        unit=figures.pressure_unit,
        target=matter.speaker.target_digits(adjuster),
        low=digits(matter, choice, choice.window.low_bar),
        high=digits(matter, choice, choice.window.high_bar),
        never_exceed=digits(matter, choice, choice.never_exceed_bar),
        ladder_low=_limit(figures.in_unit(min(max(choice.floor_bar, 0.0), choice.window.low_bar)), up=True),
        ladder_high=_limit(figures.in_unit(max(choice.ceiling_bar, choice.window.high_bar)), up=False),
        drift_low=digits(matter, choice, drift_low),
        drift_high=digits(matter, choice, min(drift_high, choice.never_exceed_bar)),
        gauge_error=number(figures.in_unit(choice.error_bar), decimals=_DECIMALS),
    )


def _limit(value: float, *, up: bool) -> str:
    """A limit that stands on no graduation, rounded to where it allows less."""
    scale = 10.0**_DECIMALS
    dust = 1e-6
    rounded = math.ceil(value * scale - dust) if up else math.floor(value * scale + dust)
    return number(rounded / scale, decimals=_DECIMALS)
