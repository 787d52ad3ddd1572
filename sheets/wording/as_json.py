"""What the reading commands give as data. Names are stable; figures stand in the base unit that they name."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from sheets.amounts import Amount, Derivation, Finding
from sheets.circuit.plant import Adjust, AtStop
from sheets.circuit.verdict import Verdict
from sheets.errors import Problem
from sheets.procedure.answers import NotFound, NotInUse, TestState
from sheets.procedure.changes import WAYS, Change
from sheets.procedure.steps import Procedure, Reading
from sheets.targets.settings import Targets
from sheets.wording.findings import say_finding
from sheets.wording.plain import FORMAT, Json, rounded
from sheets.wording.steps import Speaker, SpokenStep


def targets_json(speaker: Speaker, targets: Targets, proposals: Mapping[str, str]) -> dict[str, Json]:
    """Settings with windows, derivations and findings.

    ``proposals``: for each computed setting, whether somebody accepted it.
    """
    return {
        "format": FORMAT,
        "tag": speaker.machine.tag,
        "settings": [
            {
                "adjuster": id_,
                "target_bar": rounded(setting.target_bar),
                "low_bar": rounded(setting.low_bar),
                "high_bar": rounded(setting.high_bar),
                "origin": setting.origin.value,
                "given_by": setting.given_by,
                "acceptance": proposals.get(id_),
                "window_origin": setting.window_origin.value,
                "derivations": [_derivation(one) for one in setting.derivations],
            }
            for id_, setting in targets.settings.items()
        ],
        "findings": findings_json(speaker, targets.findings),
    }


def _derivation(derivation: Derivation) -> dict[str, Json]:
    return {
        "result_name": derivation.result_name,
        "formula": derivation.formula,
        "inputs": [
            {"name": name, **_amount(amount), "source": source} for name, amount, source in derivation.inputs
        ],
        "result": _amount(derivation.result),
    }


def _amount(amount: Amount) -> dict[str, Json]:
    return {"value": rounded(amount.value), "quantity": amount.quantity}


def skew_json(speaker: Speaker, findings: Iterable[Finding]) -> dict[str, Json]:
    """Plate values on which order or states hang."""
    return {
        "format": FORMAT,
        "tag": speaker.machine.tag,
        "findings": findings_json(speaker, findings),
    }


def findings_json(speaker: Speaker, findings: Iterable[Finding]) -> list[Json]:
    """Findings by code, with their words and figures."""
    found: list[Json] = []
    for finding in findings:
        what, fix = say_finding(speaker, finding)
        data: dict[str, Json] = {
            key: value if isinstance(value, str) else _amount(value) for key, value in finding.data.items()
        }
        found.append(
            {
                "code": finding.code,
                "severity": finding.severity.value,
                "subject": finding.subject,
                "what": what,
                "fix": fix,
                "data": data,
            }
        )
    return found


def steps_json(
    speaker: Speaker,
    procedure: Procedure,
    spoken: Mapping[int, tuple[SpokenStep, ...]],
    verdict: Verdict,
    findings: Iterable[Finding],
    obstacles: Iterable[Problem],
) -> dict[str, Json]:
    """The procedure: answers of the search, order, steps with readings, and what stands against issuing."""
    return {
        "format": FORMAT,
        "tag": speaker.machine.tag,
        "verdict": verdict.value,
        "states_tried": procedure.search.states,
        "adjusters": [_answer(answer) for answer in procedure.search.answers.values()],
        "order": list(procedure.order.sequence),
        "edges": [
            {"before": edge.before, "after": edge.after, "why": edge.kind.value}
            for edge in procedure.order.edges
        ],
        "ties": [list[Json](sorted(tie)) for tie in procedure.order.ties],
        "stages": [
            {
                "kind": stage.kind.value,
                "powered": stage.powered,
                "adjuster": stage.adjuster,
                "steps": [_step(one) for one in spoken[place]],
            }
            for place, stage in enumerate(procedure.stages)
        ],
        "findings": findings_json(speaker, findings),
        "before_issue": [{"what": one.what, "fix": one.fix} for one in obstacles],
    }


def _answer(answer: TestState | NotInUse | NotFound) -> dict[str, Json]:
    match answer:
        case TestState():
            return {
                "adjuster": answer.adjuster,
                "answer": "found",
                "changes": [_change(change) for change in answer.changes],
                "cost": rounded(answer.cost),
                "reading_bar": rounded(answer.reading_bar),
                "flow_lpm": rounded(answer.flow_lpm),
                "gauge": answer.gauge.gauge,
                "test_point": answer.gauge.test_point,
                "low_bar": rounded(answer.gauge.window.low_bar),
                "high_bar": rounded(answer.gauge.window.high_bar),
                "never_exceed_bar": rounded(answer.gauge.never_exceed_bar),
                "accuracy_ratio": rounded(answer.gauge.accuracy_ratio),
            }
        case NotInUse():
            guards = answer.guard.pumps if answer.guard else ()
            return {
                "adjuster": answer.adjuster,
                "answer": "protects only" if guards else "not in use",
                "by_law": answer.by_law,
                "guards": list(guards),
            }
        case NotFound():
            return {
                "adjuster": answer.adjuster,
                "answer": answer.verdict.value,
                "condition": answer.failure.condition.value,
                "nearest": [_change(change) for change in answer.nearest],
            }


def _change(change: Change) -> dict[str, Json]:
    if isinstance(change, Adjust):
        return {"adjuster": change.adjuster, "setting_bar": rounded(change.setting_bar)}
    if isinstance(change, AtStop):
        return {"actuator": change.actuator, "stop": WAYS[change.stop]}
    return {"valve": change.valve, "position": change.position}


def _step(spoken: SpokenStep) -> dict[str, Json]:
    step = spoken.step
    return {
        "kind": step.kind.value,
        "subject": step.subject,
        "order": spoken.order,
        "lines": list(spoken.lines),
        "warnings": [
            {"signal": warning.signal, "hazard": warning.hazard, "lines": list(warning.lines)}
            for warning in spoken.warnings
        ],
        "reading": _reading(step.reading),
    }


def _reading(reading: Reading | None) -> Json:
    if reading is None:
        return None
    return {
        "adjuster": reading.adjuster,
        "gauge": reading.gauge,
        "test_point": reading.test_point,
        "expected_bar": rounded(reading.expected_bar),
        "low_bar": rounded(reading.low_bar),
        "high_bar": rounded(reading.high_bar),
        "stop_above_bar": rounded(reading.stop_above_bar),
        "never_exceed_bar": rounded(reading.never_exceed_bar),
    }
