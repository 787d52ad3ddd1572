"""The settings of a current revision as a screen shows them: as printed, with faces and the last readings."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from sheets.errors import InputError
from sheets.pages.document import GaugeFace
from sheets.pages.face import face_alternative
from sheets.pages.svg import dial_svg
from sheets.register.deviations import Deviation, standing_about
from sheets.register.kept import Kept
from sheets.register.readings import KeptReading, Phase, in_order
from sheets.register.rows import Outcome, Row, judged


@dataclass(frozen=True, kw_only=True)
class ReadingShown:
    """The last reading of a setting."""

    value: str
    unit: str
    on: str
    people: str
    instrument: str
    reached: bool
    outside: str
    """What it is outside of, by the row that is shown; empty within its window."""
    event: int
    deviation: str = ""
    """What stands about it, such as 'deviation 11, accepted by Cleo Harnett'; empty for nothing."""


@dataclass(frozen=True, kw_only=True)
class SettingShown:
    """One row of the record sheet."""

    row: Row
    second: str
    """Target in the second unit; empty where there is none."""
    face: str
    """The dial as SVG; empty for a digital gauge, and where it can't be drawn."""
    found: ReadingShown | None
    left: ReadingShown | None


def settings_shown(
    kept: Kept, readings: Sequence[KeptReading], deviations: Sequence[Deviation]
) -> tuple[SettingShown, ...]:
    """Every setting of a pack with its newest readings, struck ones left out, and what stands about them."""
    tags = _tags(kept.content)
    return tuple(
        SettingShown(
            row=row,
            second=str(tags.get(row.adjuster, {}).get("second_unit", "")),
            face=_face(tags.get(row.adjuster, {})),
            found=_last(row, readings, deviations, Phase.FOUND),
            left=_last(row, readings, deviations, Phase.LEFT),
        )
        for row in kept.rows
    )


def _last(
    row: Row, readings: Sequence[KeptReading], deviations: Sequence[Deviation], phase: Phase
) -> ReadingShown | None:
    alike = in_order(readings, adjuster=row.adjuster, phase=phase)
    if not alike:
        return None
    last = alike[-1]
    said = last.said
    outcome = judged(row, said.value) if said.unit == row.unit else None
    return ReadingShown(
        value=said.value,
        unit=said.unit,
        on=said.on.isoformat(),
        people=", ".join(said.people),
        instrument=said.instrument,
        reached=said.reached,
        outside="" if outcome in (None, Outcome.WITHIN) else outcome.value,
        event=last.told.sequence,
        deviation=_deviation(standing_about(deviations, last.told.sequence)),
    )


def _deviation(one: Deviation | None) -> str:
    if one is None:
        return ""
    by = f" by {one.accepted.said.by}" if one.accepted is not None else ""
    return f"deviation {one.number}, {one.standing}{by}"


def _tags(content: str) -> dict[str, Mapping[str, Any]]:
    """The setting tags of a content by their adjuster: what else is drawn of a row."""
    return {str(tag["id"]): tag for tag in _found(json.loads(content))}


def _found(content: Mapping[str, Any]) -> Iterator[Mapping[str, Any]]:
    for section in content.get("sections", ()):
        for block in section["blocks"]:
            if block["is"] == "TagSheet":
                yield from block["tags"]


def _face(tag: Mapping[str, Any]) -> str:
    if "face" not in tag:
        return ""
    said = tag["face"]
    if said["digital"]:
        return ""  # nothing is drawn that doesn't stand beside it in figures
    low, high = said["window"]
    face = GaugeFace(
        gauge=said["gauge"],
        caption=said["caption"],
        unit=said["unit"],
        digital=said["digital"],
        scale_end=float(said["scale_end"]),
        graduation=float(said["graduation"]),
        target=float(said["target"]),
        window=(float(low), float(high)),
        never_exceed=float(said["never_exceed"]),
        target_text=said["target_text"],
        window_text=said["window_text"],
        never_exceed_text=said["never_exceed_text"],
    )
    words = face_alternative(face, target="target", window="accept", never_exceed="never exceed")
    try:
        return dial_svg(face, alternative=words)
    except InputError:  # a scale that doesn't reach: the figures stand beside it all the same
        return ""
