"""What a job is for."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from enum import Enum

from sheets.errors import InputError, Problem, quoted


class TaskKind(Enum):
    """What the job is for; the value is the word on a command line."""

    READ = "read"
    SET = "set"
    COMMISSION = "commission"
    REPLACE = "replace"


@dataclass(frozen=True, kw_only=True)
class Task:
    """A kind of job; ``part`` is the one that was replaced."""

    kind: TaskKind = TaskKind.SET
    part: str = ""


def named_task(kind: str, part: str | None, parts: Collection[str]) -> Task:
    """The task that a command names. Raises InputError for a part that isn't there or isn't wanted."""
    wanted = TaskKind(kind)
    if (wanted is TaskKind.REPLACE) != (part is not None):
        raise InputError(
            Problem(
                where="--part",
                what="A part belongs to the task replace, and to no other.",
                fix="Write --task replace --part RV1, with the id of the part that was replaced.",
            )
        )
    if part is not None and part not in parts:
        raise InputError(
            Problem(
                where="--part",
                what=f"There is no part {quoted(part)}.",
                fix=f"Name one of: {', '.join(parts)}.",
            )
        )
    return Task(kind=wanted, part=part or "")
