"""The lockout sheet: by act, in order; then people, lines that keep pressure, declared sources."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

from sheets.amounts import Amount
from sheets.pages.compose.common import first_aid
from sheets.pages.compose.matter import Matter, page_step
from sheets.pages.document import (
    Act,
    Banner,
    Block,
    Box,
    Hold,
    Paragraph,
    PowerState,
    Section,
    SheetKind,
    Step,
    Table,
)
from sheets.procedure.steps import Stage, StageKind, StepKind
from sheets.wording.steps import SpokenStep, capital

_ACTS: dict[StepKind, str] = {
    StepKind.TELL_BEFORE: "stop",
    StepKind.PRESS_STOP: "stop",
    StepKind.ISOLATE: "isolate",
    StepKind.BLOCK: "block",
    StepKind.OPEN_VENT: "relieve",
    StepKind.WORK_LEVER: "relieve",
    StepKind.ATTEMPT_START: "verify",
    StepKind.VERIFY_DEAD: "verify",
    StepKind.FIT_GAUGE: "verify",
    StepKind.VERIFY_ZERO: "verify",
    StepKind.SET_VALVE: "restore",
    StepKind.REMOVE_GAUGE: "restore",
}
"""The act that a step belongs to. The stage's own order stands, so a line that is relieved once more after
valves went back is an act of its own there."""
_BEFORE_VERIFYING = ("stop", "isolate", "block", "relieve")
"""The regulation's order (29 CFR 1910.147(d)(2) to (d)(6)): stop, isolate with locks, relieve, then verify. A
load is blocked before its line is relieved."""


def lockout(matter: Matter, stage: Stage) -> Section:
    """The sheet for one locked stage."""
    again = stage.kind is StageKind.LOCK_AGAIN
    name = "lockout_again" if again else "lockout"
    spoken = matter.spoken(stage)
    acts: list[Block] = []
    for number, (act, rows) in enumerate(_acts(matter, spoken), start=1):
        if act == "restore" and not any(isinstance(block, Hold) for block in acts):
            acts.append(_hold(matter, again=again))
        acts.append(Act(number=str(number), name=matter.text(f"act_{act}"), rows=rows))
    if not any(isinstance(block, Hold) for block in acts):
        acts.append(_hold(matter, again=again))
    blocks: list[Block] = [
        Paragraph(text=matter.text("lockout_first"), weight="strong"),
        Paragraph(text=matter.text("lockout_absent", items=", ".join(matter.machine.absent) or "–")),
        *acts,
        first_aid(matter),
        _people(matter),
    ]
    return Section(
        kind=SheetKind.LOCKOUT,
        bookmark=matter.text(f"{name}_title"),
        title=matter.text(f"{name}_title"),
        subject=matter.machine.tag,
        lines=(matter.text(f"{name}_line"), matter.text("lockout_basis")),
        banner=Banner(state=PowerState.LOCKED, word=matter.text("locked_word")),
        blocks=tuple(blocks),
    )


def energies(matter: Matter) -> Section:
    """Declared sources, and lines that can keep pressure: the inventory that the acts answer to."""
    return Section(
        kind=SheetKind.LOCKOUT,
        bookmark=matter.text("energies_title"),
        title=matter.text("energies_title"),
        subject=matter.machine.tag,
        lines=(matter.text("energies_line"),),
        banner=None,
        blocks=(
            Paragraph(text=matter.text("lockout_first"), weight="strong"),
            _sources(matter),
            _trapped(matter),
        ),
    )


def _acts(matter: Matter, spoken: Sequence[SpokenStep]) -> list[tuple[str, tuple[Step, ...]]]:
    """Acts in the order in which the simulation did them; a new one wherever that order changes."""
    runs = [(act, tuple(_row(step) for step in run)) for act, run in groupby(spoken, _act)]
    verified = next((at for at, (act, _) in enumerate(runs) if act == "verify"), len(runs))
    before: dict[str, tuple[Step, ...]] = {}
    for act, rows in runs[:verified]:
        before[act] = (*before.get(act, ()), *rows)
    before.setdefault("block", _nothing_held(matter))
    before["relieve"] = (*before.get("relieve", _nothing(matter)), *_not_relieved(matter))
    return [*((act, before.pop(act)) for act in _BEFORE_VERIFYING if act in before), *runs[verified:]]


def _act(spoken: SpokenStep) -> str:
    return _ACTS[spoken.step.kind]


def _nothing(matter: Matter) -> tuple[Step, ...]:
    if matter.procedure.trapped.without_relief:
        return ()
    return (Step(number="", order=matter.text("relieve_none"), boxes=(_tick(),)),)


def _not_relieved(matter: Matter) -> tuple[Step, ...]:
    """Lines that nothing on the machine relieves: the act says so where it is read."""
    names = [matter.circuit.nodes[volume.node].name for volume in matter.procedure.trapped.without_relief]
    if not names:
        return ()
    order = matter.text("not_relieved")
    return (Step(number="", order=order, lines=(f"{capital('; '.join(names))}.",), boxes=(_tick(),)),)


def _tick() -> Box:
    return Box(label="", size="tick")


def _row(spoken: SpokenStep) -> Step:
    """A row with the boxes that its act asks for."""
    boxes: tuple[Box, ...]
    match spoken.step.kind:
        case StepKind.ISOLATE:
            boxes = (Box(label="lock no.", size="short"), Box(label="owner", size="medium", signed=True))
        case StepKind.BLOCK:
            boxes = (Box(label="seen by", size="medium", signed=True),)
        case StepKind.OPEN_VENT if spoken.step.data.get("lock"):
            boxes = (Box(label="lock no.", size="short"), Box(label="owner", size="medium", signed=True))
        case StepKind.TELL_BEFORE:
            boxes = (Box(label="time", size="short"), Box(label="by", size="medium", signed=True))
        case StepKind.PRESS_STOP:
            boxes = (Box(label="time", size="short"),)
        case StepKind.ATTEMPT_START | StepKind.VERIFY_DEAD:
            boxes = (Box(label="time", size="short"), Box(label="by", size="medium", signed=True))
        case StepKind.VERIFY_ZERO:
            boxes = (Box(label=spoken.step.subject, size="short"), Box(label="time", size="short"))
        case _:
            boxes = (_tick(),)
    return page_step(spoken, number="", boxes=boxes)


def _nothing_held(matter: Matter) -> tuple[Step, ...]:
    return (
        Step(
            number="",
            order=matter.text("block_none"),
            lines=(matter.text("block_none_line"),),
            boxes=(_tick(),),
        ),
    )


def _hold(matter: Matter, *, again: bool) -> Hold:
    return Hold(
        word=matter.text("hold_word"),
        order=matter.text("lockout_again_hold" if again else "lockout_hold"),
        reason=matter.text("lockout_hold_reason"),
    )


def _people(matter: Matter) -> Table:
    return Table(
        title=matter.text("people_title"),
        light=matter.text("people_light"),
        head=("name", "lock no.", "on: date, time", "off: date, time", "taken over by", "read gauge again"),
        rows=(),
        shares=(0.24, 0.11, 0.18, 0.18, 0.16, 0.13),
        blank_rows=4,
        row_height_mm=7.5,
        signed=True,
    )


def _trapped(matter: Matter) -> Table:
    """Every line that can hold pressure, how it is relieved, and where this job verifies that."""
    read = {
        str(step.data["test_point"])
        for stage in matter.procedure.stages
        for step in stage.steps
        if step.kind is StepKind.VERIFY_ZERO
    }
    rows = []
    for volume in matter.procedure.trapped.volumes:
        node = matter.circuit.nodes[volume.node]
        if not volume.trapped_at_rest:
            how = matter.text("drains")
        elif volume.relieved_by:
            how = matter.speaker.part(volume.relieved_by)
        else:
            how = matter.text("no_relief")
        known_bar = matter.shut_in_bar
        rows.append(
            (
                node.name,
                matter.figures.pressure(known_bar[volume.node], up=True)
                if known_bar is not None
                else matter.text("not_known"),
                how,
                ", ".join(point for point in volume.test_points if point in read)
                or matter.text("not_verified"),
            )
        )
    return Table(
        title=matter.text("trapped_title"),
        light=matter.text("trapped_light"),
        head=("line", "up to", "relieved by", "verified at"),
        rows=tuple(rows),
        shares=(0.32, 0.14, 0.34, 0.20),
    )


def _sources(matter: Matter) -> Table:
    rows = [
        (
            id_,
            supply.kind,
            matter.figures.amount(Amount(value=supply.voltage_v, quantity="voltage_v")),
            f"{supply.isolator.plate}, {supply.isolator.where}",
            supply.verify,
        )
        for id_, supply in matter.machine.energy.items()
    ]
    return Table(
        title=matter.text("sources_title"),
        head=("source", "type", "magnitude", "isolated by", "verified by"),
        rows=tuple(rows),
        shares=(0.09, 0.17, 0.11, 0.31, 0.32),
    )
