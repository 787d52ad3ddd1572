"""Many machine files at once: one row each."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from sheets.amounts import Finding, Severity
from sheets.errors import ExitStatus, JamnutError, Problem
from sheets.machine.model import Machine
from sheets.wording.findings import say_finding
from sheets.wording.plain import Json, columns
from sheets.wording.steps import Speaker

_VERDICTS = {
    ExitStatus.GOOD: "good",
    ExitStatus.REFUSED: "refused",
    ExitStatus.WRONG_INPUT: "wrong input",
    ExitStatus.NOT_ESTABLISHED: "not established",
    ExitStatus.BUG: "bug in jamnut",
}
_GRAVEST = (Severity.REFUSED, Severity.NOT_ESTABLISHED, Severity.WARNING, Severity.NOTE)


@dataclass(frozen=True, kw_only=True)
class Outcome:
    """What came of one file."""

    file: str
    tag: str
    """Empty where the file couldn't be read."""
    status: ExitStatus
    settings: str
    """``2 of 3`` settings found; empty where nothing was computed."""
    worst: str
    """The gravest thing that was found, in words."""
    data: dict[str, Json] | None
    """What the command gives as data for this file alone."""
    problems: tuple[Problem, ...] = ()

    @property
    def verdict(self) -> str:
        return _VERDICTS[self.status]


def known(
    file: str,
    machine: Machine,
    status: ExitStatus,
    settings: str,
    worst: str,
    data: dict[str, Json],
) -> Outcome:
    """The outcome of a file that was read."""
    return Outcome(file=file, tag=machine.tag, status=status, settings=settings, worst=worst, data=data)


def failed(file: str, error: JamnutError) -> Outcome:
    """The outcome of a file that ended in a known error."""
    problems = error.problems
    return Outcome(
        file=file,
        tag="",
        status=error.status,
        settings="",
        worst=_worst_problem(problems),
        data=None,
        problems=problems,
    )


def broken(file: str, told: str) -> Outcome:
    """The outcome of a file at which a bug showed."""
    return Outcome(file=file, tag="", status=ExitStatus.BUG, settings="", worst=told, data=None)


def worst_finding(speaker: Speaker, findings: Iterable[Finding]) -> str:
    """The first of the gravest findings, in words; empty if there is none."""
    ranked = sorted(findings, key=lambda finding: _GRAVEST.index(finding.severity))
    return say_finding(speaker, ranked[0])[0] if ranked else ""


def _worst_problem(problems: tuple[Problem, ...]) -> str:
    """The first problem, and how many more there are."""
    first = f"{problems[0].where}: {problems[0].what}" if problems else ""
    more = len(problems) - 1
    return f"{first} And {more} more." if more > 0 else first


def summary_lines(outcomes: Iterable[Outcome]) -> Iterator[str]:
    """The table."""
    rows = [("file", "tag", "verdict", "settings", "gravest finding")]
    rows += [(one.file, one.tag, one.verdict, one.settings, one.worst) for one in outcomes]
    yield from columns(rows)


def summary_json(outcomes: Iterable[Outcome]) -> list[Json]:
    """One entry a file, with the data of the command where there are any."""
    return [
        {
            "file": one.file,
            "tag": one.tag or None,
            "status": int(one.status),
            "verdict": one.verdict,
            "problems": [
                {"where": problem.where, "what": problem.what, "fix": problem.fix} for problem in one.problems
            ],
            "result": one.data,
        }
        for one in outcomes
    ]
