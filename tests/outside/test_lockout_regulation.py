"""The order that 29 CFR 1910.147 prescribes, against stages and printed sheets of every sample.

Paragraphs (d), (e) and (f)(1) were seen on pages of the agency; (b) and (c)(9) are reported. The wording
here is ours.
"""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import pypdfium2
import pytest

from sheets import pipeline
from sheets.errors import InputError
from sheets.pages.compose.matter import Matter
from sheets.pages.document import Act, Layout, Section, SheetKind, Table
from sheets.procedure.steps import Stage, StageKind, StepKind

PARAGRAPHS = {
    StepKind.TELL_BEFORE: "(c)(9)",
    StepKind.PRESS_STOP: "(d)(2)",
    StepKind.ISOLATE: "(d)(3)",  # and (d)(4): the lock goes on in the same row
    StepKind.BLOCK: "(d)(5)",  # "restrained" there
    StepKind.OPEN_VENT: "(d)(5)",
    StepKind.WORK_LEVER: "(d)(5)",
    StepKind.ATTEMPT_START: "(d)(6)",
    StepKind.VERIFY_DEAD: "(d)(6)",
    StepKind.VERIFY_ZERO: "(d)(6)",
}
"""Telling people comes before the controls go on; (d)(1), knowing the energies, is a table of the sheet."""
WORK_IN_BETWEEN = {StepKind.FIT_GAUGE, StepKind.REMOVE_GAUGE, StepKind.SET_VALVE}
LOCKED = (StageKind.ISOLATE, StageKind.LOCK_AGAIN)


UNDER_LOCK = {StepKind.REMOVE_GAUGE, StepKind.SET_VALVE}
RELIEVING = {StepKind.OPEN_VENT, StepKind.WORK_LEVER}


def locked_stages(matter: Matter) -> list[Stage]:
    return [stage for stage in matter.procedure.stages if stage.kind in LOCKED]


def test_lockout_follows_the_paragraphs(any_sample: Matter) -> None:
    """(d): the procedure has these elements, done in this order. Seen."""
    for stage in locked_stages(any_sample):
        kinds = [step.kind for step in stage.steps]
        assert set(kinds) <= {*PARAGRAPHS, *WORK_IN_BETWEEN}
        begins = next((at for at, kind in enumerate(kinds) if kind in UNDER_LOCK), len(kinds))
        paragraphs = [PARAGRAPHS[kind] for kind in kinds[:begins] if kind in PARAGRAPHS]
        assert paragraphs == sorted(paragraphs)
        assert set(paragraphs) >= {"(d)(2)", "(d)(3)", "(d)(5)", "(d)(6)"}
    assert any_sample.procedure.stages[0].steps[0].kind is StepKind.TELL_BEFORE


def test_verified_once_more_after_each_relieving_before_a_gauge_comes_off(any_sample: Matter) -> None:
    """(d)(5)(ii): where energy can build up again, verifying goes on until the work is done. From memory."""
    again = next(one for one in locked_stages(any_sample) if one.kind is StageKind.LOCK_AGAIN)
    kinds = [step.kind for step in again.steps]
    relieved = max(at for at, kind in enumerate(kinds) if kind in RELIEVING)
    off = kinds.index(StepKind.REMOVE_GAUGE)
    gauges = {step.subject for step in again.steps if step.kind is StepKind.REMOVE_GAUGE}
    assert {step.subject for step in again.steps[relieved:off] if step.kind is StepKind.VERIFY_ZERO} == gauges


def lockout_sections(matter: Matter) -> list[Section]:
    document, _ = pipeline.content(matter)
    return [section for section in document.sections if section.kind is SheetKind.LOCKOUT]


def acts_of(section: Section) -> list[Act]:
    return [block for block in section.blocks if isinstance(block, Act)]


def test_lockout_sheets_have_the_acts_in_order_with_a_lock_for_each_supply(any_sample: Matter) -> None:
    """(d)(2) to (d)(6), a load blocked before its line is relieved; (d)(4): a lock on each device. Seen."""
    sections = [section for section in lockout_sections(any_sample) if acts_of(section)]
    assert len(sections) == 2
    for section in sections:
        acts = acts_of(section)
        names = [act.name for act in acts]
        assert names[:5] == ["Stop", "Isolate", "Block", "Relieve", "Verify"]
        assert [act.number for act in acts] == [str(place) for place, _ in enumerate(acts, start=1)]
        isolating = acts[1]
        assert len(isolating.rows) == len(any_sample.machine.energy)
        assert all("lock" in row.boxes[0].label for row in isolating.rows)


def test_lockout_sheets_hold_every_step_of_their_stage_once_and_in_order(any_sample: Matter) -> None:
    sections = [section for section in lockout_sections(any_sample) if acts_of(section)]
    answers = {any_sample.text("not_relieved"), any_sample.text("relieve_none")}
    for stage, section in zip(locked_stages(any_sample), sections, strict=True):
        printed = [row.order for act in acts_of(section) if act.name != "Block" for row in act.rows]
        assert [order for order in printed if order not in answers] == [
            step.order for step in any_sample.spoken(stage)
        ]


def test_each_source_has_a_magnitude_and_a_verification(any_sample: Matter) -> None:
    """(d)(1): type and magnitude of each energy are known before the machine is stopped. Seen."""
    energies, first_lockout, *_ = lockout_sections(any_sample)
    assert not acts_of(energies)
    assert acts_of(first_lockout)
    tables = {block.title: block for block in energies.blocks if isinstance(block, Table)}
    sources, trapped = tables["Declared sources"], tables["Lines that can keep pressure"]
    assert len(sources.rows) == len(any_sample.machine.energy)
    for _, kind, magnitude, isolated_by, verified_by in sources.rows:
        assert all((kind, isolated_by, verified_by))
        number, unit = magnitude.split()
        assert float(number) > 0
        assert unit == "V"
    for _, most, relieved_by, verified_at in trapped.rows:
        assert any(sign.isdigit() for sign in most)
        assert any(unit in most for unit in ("bar", "psi"))
        assert relieved_by
        assert verified_at


def test_printed_lockout_sheet_reads_in_that_order(any_sample: Matter) -> None:
    data = pipeline.pack(any_sample, Layout(kinds=(SheetKind.LOCKOUT,)))
    with pypdfium2.PdfDocument(data) as pdf:
        text = " ".join(" ".join(page.get_textpage().get_text_range().split()) for page in pdf)
    first = any_sample.procedure.stages[0]
    relieving = next(step for step in first.steps if PARAGRAPHS.get(step.kind) == "(d)(5)")
    order = [
        "Tell the affected people",
        "Stop M1 at",
        "Put your lock on",
        {StepKind.OPEN_VENT: "slowly.", StepKind.WORK_LEVER: "three times to"}[relieving.kind],
        "Attempt to start",
        "is dead",
        "It shows 0",
    ]
    places = [text.index(words) for words in order]
    assert places == sorted(places)


def windows(matter: Matter) -> list[list[Stage]]:
    """Runs of powered stages between locked ones."""
    runs: list[list[Stage]] = [[]]
    for stage in matter.procedure.stages:
        if stage.powered:
            runs[-1].append(stage)
        elif runs[-1]:
            runs.append([])
    return [run for run in runs if run]


def test_power_comes_on_by_the_five_acts_of_a_test_window(any_sample: Matter) -> None:
    """(f)(1)(i) to (iv), with the notice of (e)(2)(ii) after the locks and before the power. Seen."""
    opening = [
        StepKind.CLEAR_TOOLS,
        StepKind.CLEAR_PEOPLE,
        StepKind.REMOVE_LOCKS,
        StepKind.TELL_AFTER,
        StepKind.RESTORE_SUPPLY,
    ]
    supplies = len(any_sample.machine.energy)
    for run in windows(any_sample)[:-1]:
        kinds = [step.kind for stage in run for step in stage.steps]
        assert kinds[: 4 + supplies] == opening + [StepKind.RESTORE_SUPPLY] * (supplies - 1)
        assert kinds[4 + supplies] is StepKind.START
        assert not set(opening) & set(kinds[5 + supplies :])


def test_energy_control_is_applied_again_after_the_window(any_sample: Matter) -> None:
    """(f)(1)(v): stop, and isolate again, before anything else is done. Seen."""
    stages = any_sample.procedure.stages
    for before, after in pairwise(stages):
        if before.powered and not after.powered:
            assert after.kind is StageKind.LOCK_AGAIN
            assert after.steps[0].kind is StepKind.PRESS_STOP
            isolated = [step.subject for step in after.steps if step.kind is StepKind.ISOLATE]
            assert isolated == list(any_sample.machine.energy)
    for stage in stages:
        if stage.powered:
            kinds = {step.kind for step in stage.steps}
            assert not kinds & {StepKind.FIT_GAUGE, StepKind.REMOVE_GAUGE}


def test_return_to_service(any_sample: Matter) -> None:
    """(e)(1) area inspected, (e)(2)(i) people clear, (e)(3) locks off, (e)(2)(ii) people told, then power."""
    last = any_sample.procedure.stages[-1]
    kinds = [step.kind for step in last.steps if step.kind is not StepKind.CHECK_VALVE]  # of the inspection
    assert kinds[:5] == [
        StepKind.INSPECT,
        StepKind.CLEAR_PEOPLE,
        StepKind.REMOVE_LOCKS,
        StepKind.TELL_AFTER,
        StepKind.RESTORE_SUPPLY,
    ]
    assert kinds.index(StepKind.START) > kinds.index(StepKind.RESTORE_SUPPLY)


Changed = Callable[..., pipeline.Described]


@pytest.mark.parametrize("kind", ["push button", "selector switch", "emergency stop", "controller output"])
def test_devices_of_the_control_circuit_isolate_nothing(changed: Changed, kind: str) -> None:
    """(b), definition of an energy isolating device: push buttons and selectors are none. Reported."""
    with pytest.raises(InputError) as caught:
        changed("clay_mixer", ("kind: main switch", f"kind: {kind}"))
    (problem,) = caught.value.problems
    assert "isn't an energy isolating device" in problem.what
    assert problem.fix


@pytest.mark.parametrize("kind", ["main switch", "circuit breaker"])
def test_devices_that_the_definition_names_are_taken(changed: Changed, kind: str) -> None:
    """(b): a disconnect switch and a hand operated circuit breaker are among its examples. Reported."""
    described = changed("clay_mixer", ("kind: main switch", f"kind: {kind}"))
    assert described.machine.energy["Q7"].isolator.kind == kind
