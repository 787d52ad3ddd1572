"""What the reading commands print for people."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from sheets.amounts import Finding, Severity
from sheets.errors import Problem
from sheets.procedure.steps import Procedure
from sheets.targets.settings import Targets
from sheets.wording.findings import say_finding, say_not_in_use
from sheets.wording.plain import columns
from sheets.wording.steps import Speaker, SpokenStep

_WORD = {
    Severity.REFUSED: "refused",
    Severity.NOT_ESTABLISHED: "not established",
    Severity.WARNING: "warning",
    Severity.NOTE: "note",
}


def finding_lines(speaker: Speaker, findings: Iterable[Finding]) -> Iterator[str]:
    """Each finding with what to do about it."""
    for finding in findings:
        what, fix = say_finding(speaker, finding)
        yield f"{_WORD[finding.severity]}: {what}"
        yield f"    {fix}"


def note_lines(problems: Iterable[Problem]) -> Iterator[str]:
    """What stands against issuing, as notes."""
    for problem in problems:
        yield f"before issue: {problem.what}"
        yield f"    {problem.fix}"


def target_lines(speaker: Speaker, targets: Targets, proposals: Mapping[str, str]) -> Iterator[str]:
    """Settings in columns, then how each figure came about, then findings.

    ``proposals``: for each computed setting, whether somebody accepted it.
    """
    figures = speaker.figures
    rows = [("adjuster", "setting", "accepted settings", "origin")]
    for id_, setting in targets.settings.items():
        origin = f"{setting.origin.value}, {setting.given_by}" if setting.given_by else setting.origin.value
        origin = f"{origin}, {proposals[id_]}" if id_ in proposals else origin
        window = f"{figures.pressure(setting.low_bar)} to {figures.pressure(setting.high_bar)}"
        rows.append((speaker.adjuster(id_), figures.pressure(setting.target_bar), window, origin))
    yield from columns(rows)
    for id_, setting in targets.settings.items():
        for one in setting.derivations:
            inputs = "; ".join(
                f"{name} {figures.amount(amount)} ({source})" for name, amount, source in one.inputs
            )
            yield ""
            yield f"{speaker.adjuster(id_)}: {one.result_name} = {figures.amount(one.result)}"
            yield f"    {one.formula}: {inputs}"
    if targets.findings:
        yield ""
        yield from finding_lines(speaker, targets.findings)


def skew_lines(speaker: Speaker, findings: Iterable[Finding]) -> Iterator[str]:
    """Values to measure first, or that none has to be."""
    kept = list(findings)
    if kept:
        yield from finding_lines(speaker, kept)
    else:
        yield "no plate value changes order or states when it is a tenth higher or lower"


def step_lines(
    speaker: Speaker,
    procedure: Procedure,
    spoken: Mapping[int, tuple[SpokenStep, ...]],
    findings: Iterable[Finding],
    obstacles: Iterable[Problem],
) -> Iterator[str]:
    """The whole job with warnings before their steps, then findings, then what stands against issuing."""
    yield from say_not_in_use(speaker, procedure)
    number = 0
    for place, stage in enumerate(procedure.stages):
        yield ""
        state = "POWERED" if stage.powered else "LOCKED"
        title = speaker.set_title(stage.adjuster) if stage.adjuster else stage.kind.value.replace("_", " ")
        subject = f" {speaker.screws[stage.adjuster].part}" if stage.adjuster else ""
        yield f"[{state}] {title[:1].upper()}{title[1:]}{subject}"
        for one in spoken[place]:
            number += 1
            for warning in one.warnings:
                yield f"     {warning.signal}: {warning.hazard}"
                yield from (f"         {line}" for line in warning.lines)
            yield f"{number:4d} {one.order}"
            yield from (f"         {line}" for line in one.lines)
    kept = list(findings)
    if kept:
        yield ""
        yield from finding_lines(speaker, kept)
    notes = list(note_lines(obstacles))
    if notes:
        yield ""
        yield from notes
