"""The cover: settings and order at a glance, what the job needs, what all of it rests on."""

from __future__ import annotations

from collections.abc import Sequence

from sheets.amounts import Finding
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
from sheets.wording.findings import say_finding, say_not_in_use


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
        Paragraph(text=matter.text("basis_walk")),
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
        bookmark=matter.text("cover_title"),
        title=matter.text("cover_title"),
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


def _settings(matter: Matter) -> Table:
    found, speaker = matter.procedure.search.found(), matter.speaker
    rows = []
    for number, id_ in enumerate(matter.procedure.order.sequence, start=1):
        choice = found[id_].gauge
        rows.append(
            (
                str(number),
                speaker.adjuster(id_),
                f"{speaker.target_digits(id_)} {matter.figures.pressure_unit}",
                window_text(matter, choice),
                matter.figures.second(choice.target_bar),
                f"{choice.gauge} at {test_point(matter, choice)}",
            )
        )
    return Table(
        title=matter.text("settings_title"),
        head=("", "adjuster", matter.text("target"), matter.text("accept"), "", "gauge"),
        rows=tuple(rows),
        shares=(0.05, 0.32, 0.14, 0.18, 0.13, 0.18),
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
        ("Crew", matter.text("crew", stop=speaker.stop)),
        ("Tools", "; ".join(tools)),
        ("Gauges", shown),
        ("Oil", f"{machine.fluid.kind} {machine.fluid.grade}, {low} to {high}"),
    )


def _warnings(matter: Matter) -> tuple[Finding, ...]:
    return (*matter.targets.findings, *matter.procedure.findings)
