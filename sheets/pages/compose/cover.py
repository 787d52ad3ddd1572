"""The cover: settings and order at a glance, what the job needs, what all of it rests on."""

from __future__ import annotations

import re
from collections.abc import Sequence

from sheets.amounts import Finding
from sheets.machine.walking import EntryState
from sheets.pages.compose.faces import test_point, window_text
from sheets.pages.compose.matter import Matter
from sheets.pages.document import (
    Act,
    Block,
    Heading,
    KeyLines,
    Paragraph,
    Section,
    SheetKind,
    Steps,
    Table,
)
from sheets.targets.settings import Origin
from sheets.wording.findings import say_finding, say_not_in_use

_MOST_PEOPLE = 4
"""So many names have room; the walk-down file holds all."""

_UNBROKEN = re.compile(r"(?<=\d) (?=[A-Za-z])|(?<= N) (?=m\b)")
"""Spaces inside a figure with its unit."""


def cover(matter: Matter, job: Sequence[Section]) -> Section:
    """First page of the pack; ``job`` are the sheets of the job itself, in order."""
    machine = matter.machine
    blocks: list[Block] = [_settings(matter), _job(matter, job)]
    blocks += [Paragraph(text=text) for text in say_not_in_use(matter.speaker, matter.procedure)]
    blocks += [
        Heading(text=matter.text("needs_title"), level=2),
        KeyLines(rows=_needs(matter)),
        Heading(text=matter.text("basis_heading"), level=2),
        Paragraph(text=matter.text("basis_model", dated=machine.dated.isoformat(), engine=matter.engine)),
        Paragraph(text=_walked(matter)),
        Paragraph(text=matter.text("basis_scope", tag=machine.tag)),
        Paragraph(text=matter.text("basis_persons")),
    ]
    if matter.site and matter.site.local_rules:
        blocks += [Paragraph(text=rule) for rule in matter.site.local_rules]
    warnings = _warnings(matter)
    if warnings:
        blocks.append(Heading(text=matter.text("open_points"), level=2))
        blocks += [Paragraph(text=" ".join(say_finding(matter.speaker, finding))) for finding in warnings]
    return Section(
        kind=SheetKind.COVER,
        bookmark=matter.text("cover_title", sets=_sets(matter)),
        title=matter.text("cover_title", sets=_sets(matter)),
        subject=machine.tag,
        lines=(
            matter.text("cover_line", name=machine.name, area=machine.area),
            matter.text(
                "task_line",
                task=matter.procedure.task.kind.value,
                part=matter.procedure.task.part,
                dated=machine.dated.isoformat(),
            ),
        ),
        banner=None,
        blocks=tuple(blocks),
    )


def _sets(matter: Matter) -> str:
    return "yes" if matter.sets else ""


def _settings(matter: Matter) -> Table:
    found, speaker = matter.procedure.search.found(), matter.speaker
    rows = []
    for number, id_ in enumerate(matter.procedure.order.sequence, start=1):
        choice = found[id_].gauge
        rows.append(
            (
                str(number),
                _named(matter, id_),
                f"{speaker.target_digits(id_)} {matter.figures.pressure_unit}",
                window_text(matter, choice),
                matter.figures.second(choice.target_bar),
                f"{choice.gauge} at {test_point(matter, choice)}",
            )
        )
    return Table(
        title=matter.text("settings_title", sets=_sets(matter)),
        head=("", "adjuster", matter.text("target"), matter.text("accept"), "", "gauge"),
        rows=tuple(rows),
        shares=(0.05, 0.32, 0.14, 0.18, 0.13, 0.18),
    )


def _named(matter: Matter, id_: str) -> str:
    """The adjuster, marked where its setting was computed and nobody has accepted it."""
    name = matter.speaker.adjuster(id_)
    computed = matter.targets.settings[id_].origin is Origin.COMPUTED
    accepted = matter.walkdown is not None and id_ not in matter.walkdown.proposals
    return matter.text("proposal_mark", adjuster=name) if computed and not accepted else name


def _walked(matter: Matter) -> str:
    """Who compared the file with the machine, and what of it doesn't hold."""
    state = matter.walkdown
    if state is None or not state.begun:
        return matter.text("basis_walk")
    people = sorted({(one.on, one.by) for one in state.entries if one.on and one.state is EntryState.AGREES})
    counts = {
        name: str(len(found) or "")
        for name, found in (
            ("changed", state.in_state(EntryState.CHANGED, EntryState.GONE)),
            ("differ", state.in_state(EntryState.DIFFERS)),
            ("missing", state.in_state(EntryState.NOT_COMPARED)),
        )
    }
    people_text = "; ".join(f"{by} on {on.isoformat()}" for on, by in people[:_MOST_PEOPLE])
    more = len(people) - _MOST_PEOPLE
    return matter.text(
        "basis_walk", people=people_text or "nobody", more=str(more) if more > 0 else "", **counts
    )


def _job(matter: Matter, job: Sequence[Section]) -> Table:
    """Every sheet of the job with its state of power and its steps."""
    rows = []
    for section in job:
        numbers = [
            step.number for block in section.blocks if isinstance(block, Steps) for step in block.steps
        ]
        acts = [block.number for block in section.blocks if isinstance(block, Act)]
        if numbers:
            span = matter.text("steps_span", first=numbers[0], last=numbers[-1])
        else:
            span = matter.text("acts_span", first=acts[0], last=acts[-1])
        subject = "" if section.subject == matter.machine.tag else f" {section.subject}"
        rows.append((f"{section.title}{subject}", section.banner.word if section.banner else "", span))
    return Table(
        title=matter.text("job_title"),
        head=("sheet", "power", "what to do"),
        rows=tuple(rows),
        shares=(0.52, 0.22, 0.26),
    )


def _needs(matter: Matter) -> tuple[tuple[str, str], ...]:
    speaker, machine = matter.speaker, matter.machine
    low, high = speaker.oil_window()
    tools: dict[str, None] = {}
    for id_ in matter.procedure.order.sequence:
        adjuster = speaker.screws[id_].adjuster
        tools[adjuster.key] = None
        if adjuster.lock_nut:
            tools[f"spanner {adjuster.lock_nut}"] = None
    gauges = {state.gauge.gauge: None for state in matter.procedure.search.found().values()}
    shown = "; ".join(
        f"{id_}: {machine.gauges[id_].kind}, 0 to {matter.figures.pressure(machine.gauges[id_].range_bar)}"
        for id_ in gauges
    )
    return (
        (
            "Crew",
            matter.text(
                "crew",
                stop=speaker.stop,
                held=speaker.held_valve,
                near="yes" if speaker.stop_at_lever else "",
            ),
        ),
        ("Tools", _UNBROKEN.sub("\N{NO-BREAK SPACE}", "; ".join(tools))),
        ("Gauges", shown),
        ("Oil", f"{machine.fluid.kind} {machine.fluid.grade}, {low} to {high}"),
    )


def _warnings(matter: Matter) -> tuple[Finding, ...]:
    return (*matter.targets.findings, *matter.procedure.findings)
