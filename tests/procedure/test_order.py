"""The order of settings from made-up test states: edges, ties, and a cycle that is named."""

from dataclasses import replace

import pytest

from sheets.amounts import Severity
from sheets.circuit.plant import Adjust, MoveValve
from sheets.pages.compose.matter import Matter
from sheets.procedure import answers
from sheets.procedure.order import EdgeKind, Order, derive_order
from sheets.targets.settings import Targets


@pytest.fixture
def order_of(clay_mixer: Matter) -> object:
    """Order of adjusters given as name: (target, raised away, shifted by)."""
    pattern = clay_mixer.procedure.search.found()["RV1"]
    setting = clay_mixer.targets.settings["RV1"]

    def derive(**given: tuple[float, str, str]) -> Order:
        found: dict[str, answers.TestState] = {}
        settings = {}
        for name, (target_bar, raised, shifted_by) in given.items():
            found[name] = replace(
                pattern,
                adjuster=name,
                changes=(
                    MoveValve(valve="HV1", position="closed"),
                    *(Adjust(adjuster=other, setting_bar=300.0) for other in raised.split()),
                ),
                earlier=tuple(shifted_by.split()),
            )
            settings[name] = replace(setting, adjuster=name, target_bar=target_bar)
        return derive_order(found, Targets(settings=settings, findings=()))

    return derive


def test_without_edges_the_highest_comes_first(order_of) -> None:  # type: ignore[no-untyped-def]  # the fixture above
    order = order_of(A=(20.0, "", ""), B=(200.0, "", ""), C=(90.0, "", ""))
    assert order.sequence == ("B", "C", "A")
    assert order.edges == ()
    assert order.ties == (frozenset("ABC"), frozenset("AC"))


def test_equal_targets_keep_the_order_of_the_file(order_of) -> None:  # type: ignore[no-untyped-def]  # as above
    assert order_of(B=(90.0, "", ""), A=(90.0, "", "")).sequence == ("B", "A")


def test_a_state_that_moves_another_away_comes_before_it(order_of) -> None:  # type: ignore[no-untyped-def]  # as above
    # A is the lowest, and yet first: its state holds B away.
    order = order_of(A=(20.0, "B", ""), B=(200.0, "", ""))
    assert order.sequence == ("A", "B")
    (edge,) = order.edges
    assert (edge.before, edge.after, edge.kind) == ("A", "B", EdgeKind.NEEDS_AWAY)
    assert order.ties == ()


def test_what_shifts_a_reading_comes_before_it(order_of) -> None:  # type: ignore[no-untyped-def]  # as above
    # B's reading moves with A: A is set first, though it is lower.
    order = order_of(A=(20.0, "", ""), B=(200.0, "", "A"))
    assert order.sequence == ("A", "B")
    (edge,) = order.edges
    assert (edge.before, edge.after, edge.kind) == ("A", "B", EdgeKind.SHIFTS)


def test_edges_that_follow_one_another(order_of) -> None:  # type: ignore[no-untyped-def]  # as above
    order = order_of(A=(10.0, "", ""), B=(20.0, "A", ""), C=(30.0, "", "A"), D=(5.0, "B", ""))
    place = order.sequence.index
    assert place("D") < place("B") < place("A") < place("C")


def test_what_is_moved_away_and_not_set_makes_no_edge(order_of) -> None:  # type: ignore[no-untyped-def]  # as above
    assert order_of(A=(20.0, "Z", "Y")).edges == ()


def test_cycle_is_refused_and_named(order_of) -> None:  # type: ignore[no-untyped-def]  # as above
    order = order_of(A=(20.0, "B", ""), B=(200.0, "A", ""), C=(300.0, "", ""))

    assert order.sequence == ()
    (finding,) = order.findings
    assert (finding.code, finding.severity) == ("order_cycle", Severity.REFUSED)
    assert set(str(finding.data["members"]).split(", ")) == {"A", "B"}


def test_what_only_follows_a_cycle_is_not_named(order_of) -> None:  # type: ignore[no-untyped-def]  # as above
    order = order_of(
        A=(20.0, "B D", ""), B=(200.0, "A", ""), C=(300.0, "A", ""), D=(30.0, "E", ""), E=(40.0, "", "")
    )
    assert set(str(order.findings[0].data["members"]).split(", ")) == {"A", "B"}


def test_cycle_of_both_kinds_of_edge(order_of) -> None:  # type: ignore[no-untyped-def]  # as above
    # A's state moves B away, so A first; B shifts A's reading, so B first.
    order = order_of(A=(20.0, "B", ""), B=(200.0, "", ""), C=(10.0, "A", ""))
    assert order.sequence == ("C", "A", "B")
    order = order_of(A=(20.0, "B", "C"), B=(200.0, "C", ""), C=(10.0, "", ""))
    assert order.sequence == ()
    assert set(str(order.findings[0].data["members"]).split(", ")) == {"A", "B", "C"}
