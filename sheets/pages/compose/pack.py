"""All sheets of a pack, in the order of the job."""

from __future__ import annotations

from collections.abc import Iterator

from sheets.pages.compose.cover import cover
from sheets.pages.compose.engineer import engineer
from sheets.pages.compose.faces import tags
from sheets.pages.compose.instruction import Numbering, instruction
from sheets.pages.compose.lockout import energies, lockout
from sheets.pages.compose.matter import Matter
from sheets.pages.compose.record import record
from sheets.pages.document import Document, Section
from sheets.procedure.steps import StageKind

_LOCKED = (StageKind.ISOLATE, StageKind.LOCK_AGAIN)


def compose(matter: Matter) -> Document:
    """The content of a pack. The same matter gives the same document."""
    machine = matter.machine
    return Document(
        number=machine.document,
        title=matter.text("footer_title", name=machine.name, tag=machine.tag, plant=machine.plant),
        language=machine.language,
        data_dated=machine.dated.isoformat(),
        engine=matter.engine,
        sections=tuple(_sections(matter)),
        footer=matter.text("footer", telephone=matter.site.planner_telephone if matter.site else ""),
    )


def _sections(matter: Matter) -> Iterator[Section]:
    numbers = Numbering()
    job = tuple(
        lockout(matter, stage) if stage.kind in _LOCKED else instruction(matter, stage, numbers)
        for stage in matter.procedure.stages
    )
    yield cover(matter, job)
    yield energies(matter)
    yield from job
    yield record(matter)
    if matter.sets:
        yield tags(matter)
    yield engineer(matter)
