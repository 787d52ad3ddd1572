"""What a state shows of an adjuster, judged by hand-made figures at the edges of each rule."""

from collections.abc import Mapping

import pytest

from sheets.procedure.conditions import Condition, Failure, Sight, earlier_ones, not_following


def seen(effect: float, others: Mapping[str, float], alone: float = 1.0) -> Sight:
    return Sight(reading_bar=206.0, effect=effect, alone_effect=alone, others=others, flow_lpm=100.0)


def judged(effect: float, others: Mapping[str, float], alone: float = 1.0) -> Failure | None:
    return not_following(seen(effect, others, alone), 206.0)


def test_reading_must_follow_by_half_of_the_own_effect() -> None:
    assert judged(1.0, {}) is None
    assert judged(0.5, {}) is None
    failure = judged(0.49, {"PU1.compensator": 0.5})
    assert failure is not None
    assert failure.condition is Condition.FOLLOWS
    assert failure.data["governs"] == "PU1.compensator"
    assert judged(0.49, {}, alone=0.95) is None  # a relief at little flow has a smaller effect of its own


def test_what_governs_is_named_only_if_it_does() -> None:
    failure = judged(0.0, {"PU1.compensator": 0.3})
    assert failure is not None
    assert failure.data["governs"] == ""


def test_another_with_half_of_the_own_effect_refuses_the_state() -> None:
    for effect in (0.5, -0.5, 0.9):
        failure = judged(1.0, {"B": effect, "C": 0.01})
        assert failure is not None
        assert failure.condition is Condition.ALONE
        assert failure.data["governs"] == "B"
    assert judged(1.0, {"B": 0.49}) is None


@pytest.mark.parametrize(
    ("effect", "own", "first"),
    [
        (0.03, 1.0, True),
        (-0.03, 1.0, True),  # it pulls the reading down just as well
        (0.02, 1.0, True),
        (0.019, 1.0, False),
        (0.011, 0.5, True),  # 2 % of the own effect
        (0.009, 0.5, False),
    ],
)
def test_another_from_two_per_cent_comes_first(effect: float, own: float, first: bool) -> None:
    assert earlier_ones(seen(own, {"B": effect})) == (("B",) if first else ())
