"""Sets of changes: each once, cheapest first, as many as counted; and what may be changed at all."""

from collections.abc import Callable
from itertools import pairwise, product

from hypothesis import given, settings
from hypothesis import strategies as st

from sheets.circuit.plant import Adjust, MoveValve
from sheets.machine.parts import HandValve
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described
from sheets.procedure.changes import Option, apply, candidates, count_candidates, possible_options


def option(thing: int, position: int, cost: float) -> Option:
    name = f"V{thing}"
    return Option(change=MoveValve(valve=name, position=str(position)), touches=name, cost=cost)


SHAPES = st.lists(st.lists(st.integers(1, 5), min_size=1, max_size=3), max_size=5)


@given(SHAPES)
@settings(max_examples=60, deadline=None)
def test_each_set_once_cheapest_first(shape: list[list[int]]) -> None:
    options = tuple(
        option(thing, position, float(cost))
        for thing, costs in enumerate(shape)
        for position, cost in enumerate(costs)
    )
    found = list(candidates(options))
    sets = [frozenset(candidate.changes) for candidate in found]

    # Independently: nothing or one alternative of each thing.
    expected = {
        frozenset(one.change for one in choice if one is not None): sum(
            one.cost for one in choice if one is not None
        )
        for choice in product(
            *([None, *(one for one in options if one.touches == f"V{thing}")] for thing in range(len(shape)))
        )
    }
    assert len(sets) == len(set(sets)) == count_candidates(options)
    assert set(sets) == set(expected)
    for candidate in found:
        assert candidate.cost == expected[frozenset(candidate.changes)]
        assert len(candidate.changes) == len(set(candidate.changes))
    costs = [(candidate.cost, len(candidate.changes)) for candidate in found]
    assert costs == sorted(costs)  # then fewest


def test_ties_keep_the_order_of_options() -> None:
    found = list(candidates((option(0, 0, 2.0), option(1, 0, 2.0))))
    assert [len(one.changes) for one in found] == [0, 1, 1, 2]
    assert found[1].changes[0] == option(0, 0, 2.0).change


def test_count_by_hand(clay_mixer: Matter) -> None:
    # HV3, BV1, HV1, HV2 two positions each, DV1 three, three adjusters in place or away: 2^4 · 3 · 2^3 = 384.
    options = possible_options(clay_mixer.machine, clay_mixer.circuit)
    assert count_candidates(options) == 384


def test_hand_valves_cost_least_and_forced_signals_most(clay_mixer: Matter, glaze_press: Matter) -> None:
    def cost(matter: Matter, thing: str) -> float:
        options = possible_options(matter.machine, matter.circuit)
        return next(one.cost for one in options if one.touches == thing)

    assert (
        cost(clay_mixer, "HV1")
        < cost(clay_mixer, "DV1")  # a lever
        < cost(clay_mixer, "RV1")
        < cost(glaze_press, "DV1")  # solenoids
    )
    for before, after in pairwise(possible_options(clay_mixer.machine, clay_mixer.circuit)):
        assert before.cost <= after.cost


def test_a_screw_moves_to_the_end_of_its_range_only(any_sample: Matter) -> None:
    ends = {site.id: site.highest_bar for site in any_sample.circuit.adjusters}
    for one in possible_options(any_sample.machine, any_sample.circuit):
        if isinstance(one.change, Adjust):
            assert one.change.setting_bar == ends[one.change.adjuster]
        elif isinstance(any_sample.machine.parts[one.change.valve], HandValve):
            assert one.change.position != any_sample.circuit.positions[one.change.valve][0]


def test_sealed_screws_and_unknown_directions_stay(changed: Callable[..., Described]) -> None:
    where = "      raises: clockwise\n      where: the upper"
    for text in ("      raises: not known\n      where: the upper", "      may be set: no\n" + where):
        described = changed("clay_mixer", (where, text))
        touched = {one.touches for one in possible_options(described.machine, described.circuit)}
        assert "PU1.compensator" not in touched
        assert "RV1" in touched


def test_changes_are_applied_to_the_state(clay_mixer: Matter) -> None:
    rest = clay_mixer.circuit.rest_state({"RV1": 1.0})
    state = apply(rest, (MoveValve(valve="HV1", position="closed"), Adjust(adjuster="RV1", setting_bar=7.0)))
    assert (state.positions["HV1"], state.settings_bar["RV1"]) == ("closed", 7.0)
    assert (rest.positions["HV1"], rest.settings_bar["RV1"]) == ("open", 1.0)
