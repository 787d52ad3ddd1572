"""What a job is for."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum


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
