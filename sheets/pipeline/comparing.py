"""What changes between two machine files."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

from sheets.errors import InputError, Problem
from sheets.machine.model import Units
from sheets.pipeline.computing import spoken_of, status_of, steps
from sheets.pipeline.describing import Described, check
from sheets.wording.difference import Differing, Side, difference_json, difference_lines, differences
from sheets.wording.plain import Json
from sheets.wording.steps import Speaker


def diff(old_file: Path, new_file: Path, site_file: Path | None = None) -> Differing:
    """What changes from one machine file to another, from plate values to readings.

    Raises InputError with the problems of both where either can't be read.
    """
    described: list[Described] = []
    problems: list[Problem] = []
    for name, file in (("OLD", old_file), ("NEW", new_file)):
        try:
            described.append(check(file, site_file))
        except InputError as error:
            problems += [replace(one, where=f"{name} {one.where}") for one in error.problems]
    if problems:
        raise InputError(*problems)
    units = described[1].machine.units
    before, after = (_side(one, units) for one in described)
    return differences(before, after)


def _side(described: Described, units: Units) -> Side:
    matter = steps(described)
    shown = described.machine.model_copy(update={"units": units})
    speaker = Speaker(shown, described.circuit, described.policies, matter.procedure.search.found())
    return Side(
        machine=described.machine,
        targets=matter.targets,
        procedure=matter.procedure,
        speaker=speaker,
        spoken=spoken_of(replace(matter, speaker=speaker)),
        status=int(status_of(matter.targets, matter.procedure, matter.replay)),
    )


def diff_text(differing: Differing) -> Iterator[str]:
    return difference_lines(differing)


def diff_json(differing: Differing) -> dict[str, Json]:
    return difference_json(differing)
