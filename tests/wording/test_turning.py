"""Steps of a turn and temperatures, by hand."""

import pytest

from sheets.machine.model import Units
from sheets.pages.compose.matter import Matter
from sheets.procedure.steps import StepKind
from sheets.wording.figures import Figures
from sheets.wording.turning import coarse_until_bar, step_of_turn


@pytest.mark.parametrize(
    ("per_turn", "half", "expected"),
    [
        (12.0, 4.0, 0.25),  # a quarter turn is 3 bar
        (16.0, 4.0, 0.25),  # just half of the window
        (16.1, 4.0, 0.125),
        (55.0, 4.0, 0.0625),  # an eighth is 6.9 bar, a sixteenth 3.4
        (70.0, 4.0, 0.0),  # a sixteenth is 4.4 bar
        (None, 4.0, 0.125),
    ],
)
def test_step_of_a_turn(per_turn: float | None, half: float, expected: float) -> None:
    assert step_of_turn(per_turn_bar=per_turn, half_window_bar=half) == expected


def test_a_quarter_turn_from_there_ends_below_the_window() -> None:
    # 176 − 55/4 = 162.25 bar: the division below is 162.
    assert coarse_until_bar(low_bar=176.0, per_turn_bar=55.0, graduation_bar=2.0) == 162.0
    assert coarse_until_bar(low_bar=26.0, per_turn_bar=200.0, graduation_bar=1.0) == 0.0


def test_steps_that_come_up_stay_within_half_of_the_window(any_sample: Matter) -> None:
    shares = {"quarter turns": 0.25, "eighths": 0.125, "sixteenths": 0.0625, "smallest steps": 0.0}
    for stage in any_sample.procedure.stages:
        for said in any_sample.spoken(stage):
            if said.step.kind is StepKind.COME_UP:
                last = said.order.rsplit(" by ", 1)[1]
                (share,) = (share for words, share in shares.items() if words in last)
                per_turn_bar = any_sample.speaker.screws[said.step.subject].adjuster.per_turn_bar
                assert per_turn_bar is not None
                half_bar = any_sample.speaker.found[said.step.subject].gauge.window.half_width_bar
                assert share * per_turn_bar <= half_bar + 1e-9


def test_temperatures_are_rounded_inward() -> None:
    figures = Figures(Units())
    # 150 °F is 65.56 °C, 113 °F is 45 °C, 131 °F is 55 °C, 115 °F is 46.1 °C.
    assert figures.limit_c((150 - 32) / 1.8) == "65 °C"
    assert figures.inside_c((113 - 32) / 1.8, (131 - 32) / 1.8) == ("45 °C", "55 °C")
    assert figures.inside_c((115 - 32) / 1.8, (130 - 32) / 1.8) == ("47 °C", "54 °C")
    assert figures.inside_c(45.2, 46.1) == ("45.2 °C", "46.1 °C")
