"""The work instruction: what is done at the machine, one setting a page."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from sheets.pages.compose.common import emergency, first_aid
from sheets.pages.compose.faces import face
from sheets.pages.compose.matter import Matter, page_step
from sheets.pages.document import (
    Banner,
    Block,
    Box,
    Hold,
    Paragraph,
    PowerState,
    Section,
    SettingPanel,
    SheetKind,
    Step,
    Steps,
    Table,
)
from sheets.procedure.steps import Stage, StageKind, StepKind
from sheets.wording.steps import SpokenStep, capital

_LEAVING = frozenset({StepKind.LET_GO, StepKind.OPEN_AGAIN})
_READING = frozenset({StepKind.READ, StepKind.READ_AGAIN})
_OPENING = frozenset(
    {
        StepKind.CLEAR_TOOLS,
        StepKind.CLEAR_PEOPLE,
        StepKind.REMOVE_LOCKS,
        StepKind.TELL_AFTER,
        StepKind.RESTORE_SUPPLY,
    }
)


_BEFORE_STATE = frozenset(
    {
        StepKind.LEAVE_ALONE,
        StepKind.RUN_IN,
        StepKind.RUN_AHEAD,
        StepKind.BACK_OUT,
        StepKind.START,
        StepKind.WARM_OIL,
    }
)
"""Steps of a setting that come before its gauge is watched: they take the whole width."""


class Numbering:
    """Step numbers, running through the whole work instruction."""

    def __init__(self) -> None:
        self._last = 0

    def next(self) -> str:
        self._last += 1
        return str(self._last)


def instruction(matter: Matter, stage: Stage, numbers: Numbering) -> Section:
    """The page or pages of one stage."""
    match stage.kind:
        case StageKind.DEADHEAD:
            return _before(matter, stage, numbers)
        case StageKind.AS_FOUND:
            return _found(matter, stage, numbers)
        case StageKind.SET:
            return _setting(matter, stage, numbers)
        case StageKind.CHECK:
            return _check(matter, stage, numbers)
        case _:
            return _return(matter, stage, numbers)


def _locked(matter: Matter) -> Banner:
    return Banner(state=PowerState.LOCKED, word=matter.text("locked_word"))


def _powered(matter: Matter) -> Banner:
    return Banner(
        state=PowerState.POWERED,
        word=matter.text("powered_word"),
        left=matter.text("window_banner"),
        right=matter.text("window_right"),
    )


def _section(
    matter: Matter, name: str, banner: Banner, blocks: Sequence[Block], lines: tuple[str, ...] = ()
) -> Section:
    return Section(
        kind=SheetKind.WORK_INSTRUCTION,
        bookmark=matter.text(f"{name}_title"),
        title=matter.text(f"{name}_title"),
        subject=matter.machine.tag,
        lines=(matter.text(f"{name}_line"), *lines),
        banner=banner,
        blocks=tuple(blocks),
    )


def _before(matter: Matter, stage: Stage, numbers: Numbering) -> Section:
    """Valves before power. Where nothing is fitted or opened there is no lockout to begin with."""
    if stage.powered:
        rows = _rows(matter, matter.spoken(stage), numbers)
        blocks = (Paragraph(text=matter.text("no_lockout"), weight="strong"), Steps(steps=rows))
        return _section(matter, "before_open", _powered(matter), blocks)
    first = Step(
        number=numbers.next(), order=matter.text("do_lockout"), lines=(matter.text("do_lockout_line"),)
    )
    rows = (first, *_rows(matter, matter.spoken(stage), numbers))
    hold = Hold(
        word=matter.text("hold_word"),
        order=matter.text("before_hold"),
        reason=matter.text("before_hold_reason"),
    )
    return _section(matter, "before", _locked(matter), (Steps(steps=rows), hold))


def _rows(matter: Matter, spoken: Sequence[SpokenStep], numbers: Numbering) -> tuple[Step, ...]:
    return tuple(page_step(one, number=numbers.next(), boxes=_boxes(matter, one)) for one in spoken)


def _opening(matter: Matter, spoken: Sequence[SpokenStep], numbers: Numbering) -> list[Block]:
    """The ticks that open a powered window, who stays in it, first aid and stops."""
    return [
        Paragraph(text=matter.text("window_text"), weight="strong"),
        Steps(steps=_rows(matter, spoken, numbers)),
        _people(matter),
        first_aid(matter),
        emergency(matter),
    ]


def _found(matter: Matter, stage: Stage, numbers: Numbering) -> Section:
    spoken = matter.spoken(stage)
    opening = [step for step in spoken if step.step.kind in _OPENING]
    work = [step for step in spoken if step.step.kind not in _OPENING]
    blocks = _opening(matter, opening, numbers)
    blocks += _groups(matter, work, numbers, "box_found")
    if not any(one.kind is StageKind.CHECK for one in matter.procedure.stages):
        blocks += _closing(matter, numbers)
    return _section(matter, "found", _powered(matter), blocks)


def _closing(matter: Matter, numbers: Numbering) -> list[Block]:
    """The step that ends a window, where a lockout follows it."""
    if not any(stage.kind is StageKind.LOCK_AGAIN for stage in matter.procedure.stages):
        return []
    last = Step(
        number=numbers.next(),
        order=matter.text("do_lockout_again"),
        lines=(matter.text("do_lockout_again_line"),),
    )
    return [Steps(steps=(last,))]


def _people(matter: Matter) -> Table:
    return Table(
        title=matter.text("window_people_title"),
        head=("place", "name", "from", "to"),
        rows=tuple((place, "", "", "") for place in _places(matter)),
        shares=(0.30, 0.40, 0.15, 0.15),
        row_height_mm=8.0,
        signed=True,
    )


def _places(matter: Matter) -> tuple[str, ...]:
    """Where the persons of a window stand: a lever that is held has somebody of its own."""
    held, stop = matter.speaker.held_valve, matter.speaker.stop
    screw = matter.text("role_screw")
    if matter.speaker.stop_at_lever:
        return screw, matter.text("role_lever_stop", held=held, stop=stop)
    watching = matter.text("role_stop", stop=stop)
    return (screw, matter.text("role_lever", held=held), watching) if held else (screw, watching)


def _groups(matter: Matter, spoken: Sequence[SpokenStep], numbers: Numbering, box: str) -> Iterator[Steps]:
    """Runs of steps, each with the face of the gauge that it reads."""
    run: list[SpokenStep] = []
    for place, step in enumerate(spoken):
        run.append(step)
        following = spoken[place + 1].step.kind if place + 1 < len(spoken) else None
        ends = step.step.kind in _LEAVING or (step.step.kind in _READING and following not in _LEAVING)
        if ends or following is None:
            yield _run(matter, run, numbers, box)
            run = []


def _run(matter: Matter, run: Sequence[SpokenStep], numbers: Numbering, box: str) -> Steps:
    read = next((step.step.subject for step in run if step.step.kind in _READING), "")
    panel = None
    if read:
        gauge = matter.procedure.search.found()[read].gauge.gauge
        boxes = (
            Box(
                label=matter.text(box, gauge=gauge),
                unit=matter.figures.pressure_unit,
                strong=True,
                size="medium",
            ),
        )
        panel = _panel(matter, read, boxes)
    return Steps(
        steps=tuple(page_step(step, number=numbers.next(), boxes=_boxes(matter, step)) for step in run),
        panel=panel,
    )


def _boxes(matter: Matter, spoken: SpokenStep) -> tuple[Box, ...] | None:
    """Boxes beside a step; None for a tick."""
    match spoken.step.kind:
        case StepKind.WARM_OIL:
            return (Box(label=matter.text("box_oil"), unit="°C", size="short"),)
        case StepKind.SET_VALVE if spoken.step.data.get("lock"):
            return (Box(label=matter.text("box_lock"), size="short"),)
        case StepKind.BACK_OUT | StepKind.RUN_IN | StepKind.RUN_AHEAD:
            return (Box(label=matter.text("box_turns"), size="short"),)
        case _:
            return None


def _panel(matter: Matter, adjuster: str, boxes: tuple[Box, ...]) -> SettingPanel:
    return SettingPanel(
        face=face(matter, matter.procedure.search.found()[adjuster]),
        boxes=boxes,
        target_label=matter.text("target"),
        window_label=matter.text("accept"),
        never_exceed_label=matter.text("never_exceed"),
    )


def _setting(matter: Matter, stage: Stage, numbers: Numbering) -> Section:
    speaker = matter.speaker
    screw = speaker.screws[stage.adjuster]
    part = matter.machine.parts[screw.part]
    state = matter.procedure.search.found()[stage.adjuster]
    gauge = state.gauge.gauge
    boxes = (
        Box(
            label=matter.text("box_left", gauge=gauge),
            unit=matter.figures.pressure_unit,
            strong=True,
            size="medium",
        ),
        Box(label=matter.text("box_oil"), unit="°C", size="medium"),
    )
    everything = matter.spoken(stage)
    opening = [one for one in everything if one.step.kind in _OPENING]
    spoken = [one for one in everything if one.step.kind not in _OPENING]
    begins = max((place + 1 for place, one in enumerate(spoken) if one.step.kind in _BEFORE_STATE), default=0)
    blocks = _opening(matter, opening, numbers) if opening else []
    rows = tuple(_setting_step(matter, stage, one, numbers) for one in spoken)
    if begins:
        blocks.append(Steps(steps=rows[:begins]))
    blocks.append(Steps(steps=rows[begins:], panel=_panel(matter, stage.adjuster, boxes)))
    return Section(
        kind=SheetKind.WORK_INSTRUCTION,
        bookmark=f"{speaker.set_title(stage.adjuster)} {screw.part}",
        title=speaker.set_title(stage.adjuster),
        subject=screw.part,
        lines=(
            matter.text("adjuster_line", where=capital(screw.adjuster.where), part_where=part.where),
            matter.text(
                "tools_line",
                key=screw.adjuster.key,
                nut=screw.adjuster.lock_nut,
                direction=speaker.turning(stage.adjuster, raising=True).lower(),
            ),
        ),
        banner=_powered(matter),
        blocks=tuple(blocks),
    )


def _setting_step(matter: Matter, stage: Stage, spoken: SpokenStep, numbers: Numbering) -> Step:
    """A step of a setting; what no later page shows is held for a second reader while it still shows."""
    step = page_step(spoken, number=numbers.next(), boxes=_boxes(matter, spoken))
    if spoken.step.kind is not StepKind.READ_AGAIN or not _shows_nowhere(matter, stage.adjuster):
        return step
    reading = spoken.step.reading
    hold = Hold(
        word=matter.text("hold_word"),
        order=matter.text("set_hold", gauge=reading.gauge if reading else ""),
        reason=matter.text("set_hold_hidden"),
    )
    return replace(step, hold=hold)


def _shows_nowhere(matter: Matter, adjuster: str) -> bool:
    """No later reading tells whether this one is right: another hides it once all are set."""
    return bool(matter.procedure.search.found()[adjuster].raised)


def _check(matter: Matter, stage: Stage, numbers: Numbering) -> Section:
    blocks: list[Block] = list(_groups(matter, matter.spoken(stage), numbers, "box_again"))
    blocks += _closing(matter, numbers)
    return _section(matter, "check", _powered(matter), blocks)


def _return(matter: Matter, stage: Stage, numbers: Numbering) -> Section:
    rows = tuple(page_step(step, number=numbers.next()) for step in matter.spoken(stage))
    banner = Banner(
        state=PowerState.POWERED, word=matter.text("powered_word"), right=matter.text("return_right")
    )
    return _section(matter, "return", banner, (Steps(steps=rows), first_aid(matter)))
