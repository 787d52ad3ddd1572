"""Machine texts that tests change, and what they ask of the answers."""

from __future__ import annotations

from sheets.amounts import Amount, Finding, Severity
from sheets.circuit.plant import Adjust, MoveValve
from sheets.circuit.verdict import Verdict
from sheets.errors import ExitStatus
from sheets.pages.compose.matter import Matter
from sheets.pipeline import status_of
from sheets.procedure.answers import NotFound, NotInUse, TestState
from sheets.wording.findings import say_finding

Replacement = tuple[str, str]


def answer(matter: Matter, adjuster: str) -> TestState | NotInUse | NotFound:
    return matter.procedure.search.answers[adjuster]


def state(matter: Matter, adjuster: str) -> TestState:
    """The test state of an adjuster that has one."""
    found = answer(matter, adjuster)
    assert isinstance(found, TestState), found
    return found


def refused_adjuster(matter: Matter, adjuster: str) -> NotFound:
    """What an adjuster is refused for, in a job that isn't written."""
    found = answer(matter, adjuster)
    assert isinstance(found, NotFound), found
    assert found.verdict is Verdict.REFUTED
    assert_refused(matter)
    return found


def moves(found: TestState | NotFound) -> set[tuple[str, str]]:
    """Valves of a state, or of the nearest one, with their positions."""
    changes = found.changes if isinstance(found, TestState) else found.nearest
    return {(change.valve, change.position) for change in changes if isinstance(change, MoveValve)}


def away(found: TestState) -> dict[str, float]:
    """Adjusters that stand out of the way, with their settings in bar."""
    return {change.adjuster: change.setting_bar for change in found.changes if isinstance(change, Adjust)}


def all_findings(matter: Matter) -> tuple[Finding, ...]:
    return (*matter.targets.findings, *matter.procedure.findings)


def finding(matter: Matter, code: str, subject: str) -> Finding:
    """The one finding of a code about a subject."""
    (one,) = (each for each in all_findings(matter) if (each.code, each.subject) == (code, subject))
    return one


def said(matter: Matter, code: str, subject: str) -> str:
    """A finding in words: what is so, and what to do."""
    return " ".join(say_finding(matter.speaker, finding(matter, code, subject)))


def amount(data: Finding | NotFound, name: str) -> float:
    value = data.data[name] if isinstance(data, Finding) else data.failure.data[name]
    assert isinstance(value, Amount)
    return value.value


def refusals(matter: Matter) -> set[tuple[str, str]]:
    """Code and subject of everything that stands against a job."""
    return {
        (each.code, each.subject) for each in all_findings(matter) if each.severity is not Severity.WARNING
    }


def warnings(matter: Matter) -> set[tuple[str, str]]:
    return {(each.code, each.subject) for each in all_findings(matter) if each.severity is Severity.WARNING}


def edges(matter: Matter) -> set[tuple[str, str, str]]:
    return {(edge.before, edge.after, edge.kind.name) for edge in matter.procedure.order.edges}


def assert_refused(matter: Matter) -> None:
    assert matter.procedure.stages == ()
    assert status_of(matter.targets, matter.procedure, matter.replay) is ExitStatus.REFUSED


def assert_good(matter: Matter) -> None:
    """A job that may be issued: every setting has its state, and the replay agrees."""
    assert refusals(matter) == set()
    assert matter.procedure.verdict is Verdict.ESTABLISHED
    assert status_of(matter.targets, matter.procedure, matter.replay) is ExitStatus.GOOD


def orders(matter: Matter, adjuster: str) -> str:
    """Everything that the stage of an adjuster says, orders and light lines."""
    (stage,) = (stage for stage in matter.procedure.stages if stage.adjuster == adjuster)
    spoken = matter.speaker.stage(stage, {})
    return "\n".join(text for step in spoken for text in (step.order, *step.lines))


def without_valve(valve: str, between: str) -> Replacement:
    """A hand valve made an open throttle; ``between`` stands between its kind and its rest position."""
    head = f"  {valve}:\n    kind: hand valve\n{between}"
    rest = "    rest: open\n    lockable: yes\n"
    return head + rest, head.replace("hand valve", "orifice")


HEAD = """\
format: 1
tag: {tag}
name: {name}
plant: Brackwater Tileworks
area: Test bay
document: WI-0300
dated: 2026-10-05
fluid: {{kind: mineral oil, grade: ISO VG 46, limit temperature: 65 °C}}
"""
TAIL = """\
energy:
  Q1:
    kind: electrical supply
    voltage: 400 V
    feeds: [M1]
    isolator:
      plate: Q1 MAIN
      kind: main switch
      where: door of panel H1
      action: turn to OFF
      lock: padlock through the handle
    verify: a qualified person tests for absence of voltage at the motor terminals
controls:
  start: [{name: start button S1, where: panel H1}]
  stop: [{name: stop button S0, where: panel H1}]
  emergency stop: [{name: emergency stop E1, where: panel H1}]
absent: [accumulator, suspended load]
"""


def screw(setting: str, lowest: str, highest: str, *, given: str = "drawing", more: str = "") -> str:
    """Text of an adjuster that turns clockwise to raise."""
    value = f"setting: {setting}, given by: {given}, " if setting else ""
    return (
        f"{{{value}lowest: {lowest}, highest: {highest}, raises: clockwise, where: end of the control, "
        f"key: hex 5 mm{', ' + more if more else ''}}}"
    )


def hand_valve(id_: str, where: str, *, flow: str, rest: str = "open", drop: str = "0.5 bar") -> str:
    return (
        f"  {id_}: {{kind: hand valve, where: {where}, rating: 400 bar, rest: {rest}, lockable: yes, "
        f"rated flow: {flow}, rated drop: {drop}}}\n"
    )


def text_of(*, tag: str, name: str, parts: str, gauges: str, nets: str) -> str:
    """A whole machine file."""
    return HEAD.format(tag=tag, name=name) + f"parts:\n{parts}gauges:\n{gauges}nets:\n{nets}" + TAIL
