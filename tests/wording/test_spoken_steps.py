"""Orders and light lines as they are printed for the samples."""

import re
from collections.abc import Callable, Iterator

import pytest

from sheets.amounts import Amount
from sheets.pages.compose.matter import Matter
from sheets.procedure.steps import StageKind, StepKind
from sheets.procedure.task import TaskKind
from sheets.wording.findings import say_finding
from sheets.wording.steps import SpokenStep

IMPERATIVE = frozenset(
    word
    for line in (
        "tell stop attempt verify fit read write open lock leave move check take send switch start",
        "run close put watch wait hold let turn tighten inspect go",
    )
    for word in line.split()
)
STATEMENTS = ("Nothing starts.", "It shows 0.", "Guards are on, caps are on, nothing leaks.")
"""What is seen after an order, and the rule that each takes their own lock off."""
OWN_LOCK = "Each person takes their own lock off the isolators."


@pytest.fixture(params=["clay_mixer", "glaze_press", "kiln_pusher", TaskKind.SET, TaskKind.COMMISSION])
def any_job(request: pytest.FixtureRequest, pusher_at_its_stop: Callable[[TaskKind], Matter]) -> Matter:
    """The samples, and the pusher with its carriage held at its stop."""
    wanted: str | TaskKind = request.param
    if isinstance(wanted, TaskKind):
        return pusher_at_its_stop(wanted)
    sample: Matter = request.getfixturevalue(wanted)
    return sample


def spoken(matter: Matter) -> Iterator[SpokenStep]:
    for stage in matter.procedure.stages:
        yield from matter.spoken(stage)


def sentences(text: str) -> list[str]:
    return re.split(r"(?<=[.!?])\s+", text)


def words(sentence: str) -> int:
    return len(sentence.split())


def test_orders_are_short(any_job: Matter) -> None:
    for step in spoken(any_job):
        for sentence in sentences(step.order):
            assert words(sentence) <= 20, sentence


def test_orders_are_imperative(any_job: Matter) -> None:
    for step in spoken(any_job):
        for sentence in sentences(step.order):
            if sentence in (*STATEMENTS, OWN_LOCK) or sentence.startswith("It is "):
                continue
            order = sentence.split(": ", 1)[-1]  # 'Q7 MAIN: turn to OFF', 'As found 26 to 28 bar: leave …'
            first = re.split(r"\W", order.strip())[0].lower()
            assert first in IMPERATIVE or sentence.startswith("Don't "), sentence
            assert not re.search(r"\b(should|shall|must|may|might|please|can|could)\b", order), sentence


def test_light_lines_are_short(any_job: Matter) -> None:
    for step in spoken(any_job):
        texts = [
            *step.lines,
            *(line for warning in step.warnings for line in (warning.hazard, *warning.lines)),
        ]
        for line in texts:
            for sentence in sentences(line):
                assert words(sentence) <= 25, sentence


def test_nothing_is_left_empty_or_unfilled(any_job: Matter) -> None:
    for step in spoken(any_job):
        for text in (step.order, *step.lines):
            assert text.strip() == text
            assert text
            assert "  " not in text, text
            assert not re.search(r"\s[.,;:]|\(\)|\{|\}|: *\.|^\W*\.$|None|nan|\bPU1\.", text), text


def test_no_thousands_separator_anywhere(glaze_press: Matter) -> None:
    texts = [text for step in spoken(glaze_press) for text in (step.order, *step.lines)]
    assert any(re.search(r"\b\d{4}\b", text) for text in texts)  # psi: there are four digits
    for text in texts:
        assert not re.search(r"\d[,\u2009\u202f\u00a0' ]\d{3}\b", text), text


def test_readings_of_a_psi_gauge_stand_on_its_divisions(glaze_press: Matter) -> None:
    (stage,) = [stage for stage in glaze_press.procedure.stages if stage.adjuster == "RV1"]
    text = " ".join(line for step in glaze_press.spoken(stage) for line in step.lines)
    for low, high in re.findall(r"G1 shows (\d+) to (\d+) psi", text):
        assert int(low) % 20 == 0
        assert int(high) % 20 == 0
    assert "Accept 3240 to 3360 psi" in text


def test_order_to_come_up_names_the_reading_in_that_state(clay_mixer: Matter, kiln_pusher: Matter) -> None:
    # RV1 of the mixer reads 206.1 bar there, of the pusher 180.3 bar: to half a division of 1 bar.
    for matter, target in ((clay_mixer, "206 bar"), (kiln_pusher, "180 bar")):
        (stage,) = [stage for stage in matter.procedure.stages if stage.adjuster == "RV1"]
        (order,) = [step.order for step in matter.spoken(stage) if step.step.kind is StepKind.COME_UP]
        assert target in order
        assert "RV1" in order


def test_direction_and_tool_of_every_screw(clay_mixer: Matter) -> None:
    screw = {StepKind.BACK_OUT, StepKind.TURN_BELOW, StepKind.RUN_IN, StepKind.COME_UP}
    up = {StepKind.RUN_IN, StepKind.COME_UP}
    seen = set()
    for step in spoken(clay_mixer):
        if step.step.kind in screw:
            seen.add(step.step.kind)
            text = " ".join(step.lines)
            assert ("Clockwise," in text) == (step.step.kind in up), text
            assert ("Counterclockwise," in text) == (step.step.kind not in up), text
            assert "hex " in text
    assert seen == screw


def test_reasons_are_said(clay_mixer: Matter, kiln_pusher: Matter) -> None:
    def said(matter: Matter, valve: str) -> str:
        return " ".join(
            line
            for step in spoken(matter)
            if step.step.subject == valve and step.step.reason
            for line in step.lines
        )

    assert "mixer shaft (HM1) moves" in said(clay_mixer, "HV1")
    assert "void" in said(clay_mixer, "HV3")
    assert "RV1 does nothing" in said(kiln_pusher, "HV2")


def test_closing_valve_says_what_to_do_if_the_relief_is_stuck(kiln_pusher: Matter) -> None:
    closing = [step for step in spoken(kiln_pusher) if step.step.kind is StepKind.CLOSE_GRADUALLY]
    assert closing
    for step in closing:
        assert "small steps" in step.order
        assert any("passes 200 bar, open" in line for line in step.lines)


def test_raised_neighbour_is_explained(clay_mixer: Matter) -> None:
    (found,) = [stage for stage in clay_mixer.procedure.stages if stage.kind is StageKind.AS_FOUND]
    (step,) = [one for one in clay_mixer.spoken(found) if one.step.kind is StepKind.NOT_REACHED]
    assert "RV1" in step.order
    assert any("ompensator of PU1 holds the pressure below it" in line for line in step.lines)


def test_every_warning_of_a_sample_says_what_and_what_to_do(any_sample: Matter) -> None:
    for finding in (*any_sample.targets.findings, *any_sample.procedure.findings):
        assert all(say_finding(any_sample.speaker, finding))


@pytest.mark.parametrize(
    ("amount", "expected"),
    [
        (Amount(value=12345.6, quantity="speed_rpm"), "12346 rev/min"),
        (Amount(value=20000.0, quantity="count"), "20000"),
        (Amount(value=2068.4, quantity="pressure_bar"), "2068 bar"),
    ],
)
def test_large_figures_have_no_separator(clay_mixer: Matter, amount: Amount, expected: str) -> None:
    assert clay_mixer.figures.amount(amount) == expected
