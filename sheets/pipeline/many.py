"""The verbs over many machine files: what comes of each, whatever comes of the others."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from datetime import date
from pathlib import Path
from typing import Literal

from sheets.errors import ExitStatus, InputError, JamnutError, Problem
from sheets.machine.screws import screws_of
from sheets.pages.compose.matter import Matter
from sheets.pipeline.computing import (
    findings_of_job,
    status_of,
    steps,
    steps_json,
    targets,
    targets_json,
    task_of,
)
from sheets.pipeline.describing import check, check_json
from sheets.pipeline.printing import draft_name, write_pack
from sheets.pipeline.speaking import speaker_of
from sheets.wording.summary import Outcome, failed, known, worst_finding


def outcome_of_check(site_file: Path | None, today: date, file: Path) -> Outcome:
    """What comes of one file among many; a known error is an outcome, so that the others get theirs."""
    try:
        described = check(file, site_file, today)
    except JamnutError as error:
        return failed(str(file), error)
    return known(str(file), described.machine, ExitStatus.GOOD, "", "", check_json(described))


def outcome_of_targets(site_file: Path | None, today: date, file: Path) -> Outcome:
    """The same for its settings."""
    try:
        described = check(file, site_file, today)
        found = targets(described)
    except JamnutError as error:
        return failed(str(file), error)
    words = worst_finding(speaker_of(described), found.findings)
    count = f"{len(found.settings)} of {len(screws_of(described.machine))}"
    data = targets_json(described, found)
    return known(str(file), described.machine, status_of(found), count, words, data)


def outcome_of_steps(site_file: Path | None, today: date, kind: str, part: str | None, file: Path) -> Outcome:
    """The same for its procedure; ``kind`` and ``part`` name the task as for `task_of`."""
    found, _ = _stepped(site_file, today, kind, part, file)
    return found


def _stepped(
    site_file: Path | None, today: date, kind: str, part: str | None, file: Path
) -> tuple[Outcome, Matter | None]:
    try:
        described = check(file, site_file, today)
        matter = steps(described, task_of(described, kind, part))
    except JamnutError as error:
        return failed(str(file), error), None
    words = worst_finding(matter.speaker, findings_of_job(matter))
    status = status_of(matter.targets, matter.procedure, matter.replay)
    count = f"{len(matter.procedure.search.found())} of {len(screws_of(described.machine))}"
    return known(str(file), described.machine, status, count, words, steps_json(matter)), matter


@dataclass(frozen=True, kw_only=True)
class Writing:
    """Where packs of many machines go, and how. ``only`` as in `write_pack`."""

    folder: Path
    paper: Literal["A4", "Letter"]
    only: tuple[str, ...]
    taken: set[Path] = field(default_factory=set)
    """Files that were written for machines before this one; it grows."""


def outcome_of_pack(
    site_file: Path | None, today: date, kind: str, part: str | None, writing: Writing, file: Path
) -> Outcome:
    """The same, with its draft written where the job holds."""
    found, matter = _stepped(site_file, today, kind, part, file)
    if matter is None or found.status is not ExitStatus.GOOD:
        return found
    target = writing.folder / draft_name(matter.machine)
    try:
        if target in writing.taken:
            raise InputError(
                Problem(
                    where=str(file),
                    what=f"Another of these machine files has the tag {matter.machine.tag} too.",
                    fix="Give each machine a tag of its own, or write this pack by itself with -o.",
                )
            )
        writing.taken.add(target)
        written = write_pack(matter, target, paper=writing.paper, only=writing.only)
    except JamnutError as error:
        return replace(failed(str(file), error), tag=found.tag, settings=found.settings)
    return replace(found, data={"file": str(target), "pages": written.pages, "digest": written.digest})
