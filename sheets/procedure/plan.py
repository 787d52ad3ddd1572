"""A task for one machine: search, order, stages, and the one verdict on them."""

from __future__ import annotations

from sheets.amounts import Amount, Finding, Severity
from sheets.circuit.verdict import Verdict
from sheets.energy.trapped import find_trapped
from sheets.procedure.answers import NotFound
from sheets.procedure.case import Case
from sheets.procedure.job import prepare
from sheets.procedure.order import derive_order
from sheets.procedure.search import WORK_LIMIT, find_test_states
from sheets.procedure.stages import write_stages
from sheets.procedure.steps import Procedure, Stage
from sheets.procedure.task import Task, TaskKind
from sheets.procedure.work import Watch, Work, unwatched


def make_procedure(case: Case, task: Task, watch: Watch = unwatched) -> Procedure:
    """Search, order, and write the stages; refusals are findings, and leave the stages empty.

    ``watch`` is told how far the search is.
    """
    search = find_test_states(case, Work(WORK_LIMIT, watch))
    found = search.found()
    order = derive_order(found, case.targets)
    lost = [answer for answer in search.answers.values() if isinstance(answer, NotFound)]
    findings = [*order.findings, *(finding for state in found.values() for finding in state.findings)]
    findings += [
        _cannot_set(answer) if answer.verdict is Verdict.REFUTED else _not_found(answer, search.limit)
        for answer in lost
    ]
    findings += _nothing_to_set(case, task, order.sequence)
    stages: tuple[Stage, ...] = ()
    against = [f for f in (*case.targets.findings, *findings) if f.severity is not Severity.WARNING]
    if order.sequence and not lost and not against:
        stages, simulated = write_stages(prepare(case, task, found, order.sequence))
        findings += simulated
    return Procedure(
        task=task,
        verdict=_verdict([*case.targets.refusals, *findings], lost, stages),
        stages=stages,
        search=search,
        order=order,
        trapped=find_trapped(case.machine, case.circuit),
        findings=tuple(findings),
    )


def _nothing_to_set(case: Case, task: Task, order: tuple[str, ...]) -> list[Finding]:
    """A replaced part without an adjuster that can be set."""
    if task.kind is not TaskKind.REPLACE or any(case.site(id_).part == task.part for id_ in order):
        return []
    return [Finding(code="nothing_to_set", severity=Severity.REFUSED, subject=task.part)]


def _verdict(findings: list[Finding], lost: list[NotFound], stages: tuple[Stage, ...]) -> Verdict:
    severities = {finding.severity for finding in findings}
    if Severity.NOT_ESTABLISHED in severities:
        return Verdict.NOT_ESTABLISHED
    if any(answer.verdict is Verdict.NOT_FOUND for answer in lost):
        return Verdict.NOT_FOUND
    if Severity.REFUSED in severities or not stages:
        return Verdict.REFUTED
    return Verdict.ESTABLISHED


def _cannot_set(answer: NotFound) -> Finding:
    return Finding(
        code="cannot_be_set",
        severity=Severity.REFUSED,
        subject=answer.adjuster,
        data=_nearest(answer),
    )


def _not_found(answer: NotFound, limit: int) -> Finding:
    return Finding(
        code="not_found_within_limit",
        severity=Severity.REFUSED,
        subject=answer.adjuster,
        data={**_nearest(answer), "limit": Amount(value=float(limit), quantity="count")},
    )


def _nearest(answer: NotFound) -> dict[str, Amount | str]:
    return {
        **answer.failure.data,
        "condition": answer.failure.condition.value,
        "states": Amount(value=float(answer.states), quantity="count"),
    }
