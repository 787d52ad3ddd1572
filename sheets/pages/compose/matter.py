"""Everything that the sheets are composed from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from sheets.circuit.model import Circuit
from sheets.hazards.assess import Hazard
from sheets.machine.loading import Sources
from sheets.machine.model import Machine
from sheets.machine.site import Site
from sheets.machine.walking import WalkdownState
from sheets.pages.document import Box, Step, Warning
from sheets.procedure.steps import Procedure, Stage
from sheets.procedure.task import TaskKind
from sheets.targets.settings import Targets
from sheets.trial.replay import Replay
from sheets.wording.figures import Figures
from sheets.wording.sentences import Sentences
from sheets.wording.steps import Speaker, SpokenStep, SpokenWarning


@dataclass(frozen=True, kw_only=True)
class Matter:
    """One machine's values from every stage before the pages."""

    machine: Machine
    site: Site | None
    sources: Sources
    circuit: Circuit
    targets: Targets
    procedure: Procedure
    replay: Replay
    hazards: Mapping[tuple[int, int], tuple[Hazard, ...]]
    shut_in_bar: tuple[float, ...] | None
    """Highest pressure that may stand in each line when the drive stops, by node; None: not known."""
    speaker: Speaker
    engine: str
    walkdown: WalkdownState | None = None
    """How far the machine file was compared with the machine, and which computed settings were accepted."""

    @property
    def figures(self) -> Figures:
        return self.speaker.figures

    @property
    def sets(self) -> bool:
        """Whether the job sets anything; one that only reads has nothing to hang a tag for."""
        return self.procedure.task.kind is not TaskKind.READ

    def text(self, sentence: str, /, **values: str) -> str:
        """A fixed text."""
        return Sentences(self.machine.language, "texts.j2").say(sentence, **values)

    def spoken(self, stage: Stage) -> tuple[SpokenStep, ...]:
        """Steps of a stage in words."""
        at = self.procedure.stages.index(stage)
        here = {place: found for (number, place), found in self.hazards.items() if number == at}
        return self.speaker.stage(stage, here)


def page_warning(warning: SpokenWarning) -> Warning:
    """A spoken warning as a block."""
    return Warning(signal=warning.signal, hazard=warning.hazard, lines=warning.lines)


def page_step(spoken: SpokenStep, *, number: str, boxes: tuple[Box, ...] | None = None) -> Step:
    """A spoken step as a row; with a tick box unless others are named."""
    warnings = tuple(page_warning(warning) for warning in spoken.warnings)
    if boxes is None:
        return Step(number=number, order=spoken.order, lines=spoken.lines, warnings=warnings)
    return Step(number=number, order=spoken.order, lines=spoken.lines, warnings=warnings, boxes=boxes)
