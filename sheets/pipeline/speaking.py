"""Who says things of a described machine in words."""

from __future__ import annotations

from sheets.pipeline.describing import Described
from sheets.wording.steps import Speaker


def speaker_of(described: Described) -> Speaker:
    return Speaker(described.machine, described.circuit, described.policies, {})
