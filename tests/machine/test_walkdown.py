"""The walk-down file: what it holds, what of it still holds, and what is refused in it."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from datetime import date
from pathlib import Path

import pytest

from sheets.errors import InputError
from sheets.machine.answering import Answers, answered
from sheets.machine.loading import load_walkdown, parse_machine
from sheets.machine.model import Machine
from sheets.machine.site import Policies
from sheets.machine.walkdown import Acceptance, Answer, Walkdown, walkdown_text
from sheets.machine.walking import (
    AcceptanceState,
    EntryState,
    Place,
    WalkdownState,
    computing_contents,
    find_place,
    walk_contents,
    walkdown_state,
    with_answers,
)

DAY = date(2026, 2, 3)
SEEN = "0123456789ABCDEF"
OTHER = "FEDCBA9876543210"


@pytest.fixture
def machine(small_text: str) -> Machine:
    return parse_machine(small_text.encode(), "small.yaml")


@pytest.fixture
def read(tmp_path: Path, machine: Machine) -> Callable[..., Walkdown]:
    def load(text: str, today: date | None = None) -> Walkdown:
        file = tmp_path / "small.walkdown.yaml"
        file.write_text(text, encoding="utf-8")
        return load_walkdown(file, machine=machine, today=today).walkdown

    return load


def agrees(**changes: object) -> Answer:
    return Answer.model_validate({"seen": SEEN, "by": "A. Person", "day": DAY, "answer": "agrees", **changes})


def state_of(walkdown: Walkdown | None, digests: Mapping[Place, str]) -> WalkdownState:
    return walkdown_state(walkdown, digests=digests, computed_bar={}, computed_from=SEEN)


def test_every_entry_of_the_file_is_walked_down(machine: Machine) -> None:
    places = list(walk_contents(machine))

    expected = [
        (section, id_)
        for section, entries in (
            ("parts", machine.parts),
            ("gauges", machine.gauges),
            ("nets", machine.nets),
            ("energy", machine.energy),
        )
        for id_ in entries
    ]
    assert places == [*expected, ("whole", "fluid"), ("whole", "controls"), ("whole", "absent")]


@pytest.mark.parametrize(
    ("old", "new", "place"),
    [
        ("rating: 3000 psi", "rating: 3010 psi", ("parts", "RV1")),
        ("rest: closed", "rest: open", ("parts", "HV1")),
        ("centre: [P to T]", "centre: [A to T]", ("parts", "DV1")),
        ("voltage: 24 V", "voltage: 25 V", ("energy", "Q2")),
        ("absent: [accumulator]", "absent: [accumulator, spring brake]", ("whole", "absent")),
    ],
)
def test_a_change_of_meaning_changes_that_entry_alone(
    small_text: str, machine: Machine, old: str, new: str, place: Place
) -> None:
    assert small_text.count(old) == 1
    other = parse_machine(small_text.replace(old, new).encode(), "small.yaml")
    before, after = walk_contents(machine), walk_contents(other)

    assert [one for one in before if before[one] != after[one]] == [place]


def test_what_means_the_same_changes_nothing(small_text: str, machine: Machine) -> None:
    """Comments, another unit for the same pressure (3000 psi is 206.842719 bar), ports in another order."""
    text = small_text.replace("rating: 3000 psi", "rating: 206.842719 bar   # off the plate")
    text = text.replace("[DV1.A, CY1.A]", "[CY1.A, DV1.A]")
    assert text != small_text

    assert walk_contents(parse_machine(text.encode(), "small.yaml")) == walk_contents(machine)


def test_a_default_that_is_written_out_changes_nothing_and_another_value_does(
    small_text: str, machine: Machine
) -> None:
    default = small_text.replace("power: 5.5 kW", "power: 5.5 kW\n    service factor: 1.0")
    other = small_text.replace("power: 5.5 kW", "power: 5.5 kW\n    service factor: 1.15")
    place = ("parts", "M1")

    assert walk_contents(parse_machine(default.encode(), "a"))[place] == walk_contents(machine)[place]
    assert walk_contents(parse_machine(other.encode(), "a"))[place] != walk_contents(machine)[place]


def test_states() -> None:
    digests = {("parts", id_): SEEN for id_ in ("A1", "B1", "C1", "D1")}
    walkdown = Walkdown(
        format=1,
        machine="PU-1",
        parts={
            "A1": agrees(),
            "B1": agrees(answer="differs", note="another plate"),
            "C1": agrees(seen=OTHER),
            "X9": agrees(),
        },
    )

    state = state_of(walkdown, digests)

    assert [(one.id, one.state) for one in state.entries] == [
        ("A1", EntryState.AGREES),
        ("B1", EntryState.DIFFERS),
        ("C1", EntryState.CHANGED),
        ("D1", EntryState.NOT_COMPARED),
        ("X9", EntryState.GONE),
    ]
    assert state.begun
    assert not state.complete


def test_a_difference_in_an_entry_that_changed_since_is_to_be_looked_at_again() -> None:
    walkdown = Walkdown(
        format=1, machine="PU-1", parts={"A1": agrees(seen=OTHER, answer="differs", note="plate says 5")}
    )

    (entry,) = state_of(walkdown, {("parts", "A1"): SEEN}).entries

    assert entry.state is EntryState.CHANGED


def test_complete_only_when_all_agree_and_nothing_is_gone() -> None:
    digests = {("parts", "A1"): SEEN, ("nets", "A1"): SEEN}
    whole = Walkdown(format=1, machine="PU-1", parts={"A1": agrees()}, nets={"A1": agrees()})
    gone = whole.model_copy(update={"energy": {"Q9": agrees()}})

    assert state_of(whole, digests).complete
    assert not state_of(gone, digests).complete  # a supply that nobody lists any more may still be there
    assert not state_of(None, digests).begun


@pytest.mark.parametrize(
    ("accepted_bar", "computed_from", "state"),
    [
        (206.0, SEEN, AcceptanceState.ACCEPTED),
        (206.0, OTHER, AcceptanceState.VOID),
        (206.1, SEEN, AcceptanceState.VOID),
    ],
)
def test_acceptances(accepted_bar: float, computed_from: str, state: AcceptanceState) -> None:
    acceptance = Acceptance(value_bar=accepted_bar, by="B", day=DAY, computed_from=computed_from)
    walkdown = Walkdown(format=1, machine="PU-1", acceptances={"RV1": acceptance})

    found = walkdown_state(walkdown, digests={}, computed_bar={"RV1": 206.0, "RV2": 90.0}, computed_from=SEEN)

    assert [one.state for one in found.acceptances] == [state, AcceptanceState.PROPOSAL]
    assert ("RV1" in found.proposals) is (state is AcceptanceState.VOID)
    assert "RV2" in found.proposals


def test_what_settings_are_computed_from(small_text: str, machine: Machine) -> None:
    """Any part, gauge or line, the fluid and the policy figures; not the supplies and the start places."""
    base = computing_contents(machine, Policies())
    part = parse_machine(small_text.replace("rating: 3000 psi", "rating: 3010 psi").encode(), "a")
    supply = parse_machine(small_text.replace("voltage: 24 V", "voltage: 25 V").encode(), "a")

    assert computing_contents(part, Policies()) != base
    assert computing_contents(machine, Policies(gap_bar=6.0)) != base
    assert computing_contents(supply, Policies()) == base


def test_writing_and_reading_give_the_same(read: Callable[..., Walkdown], machine: Machine) -> None:
    walkdown = Walkdown(
        format=1,
        machine=machine.tag,
        parts={"RV1": agrees(by="no", note="- # 'both' \"quotes\": {a}, Größe")},
        nets={"line A": agrees(answer="differs", note="yes")},
        whole={"absent": agrees()},
        acceptances={
            "PU1.load sensing": Acceptance(value_bar=206.842719, by="1:30", day=DAY, computed_from=SEEN)
        },
    )

    assert read(walkdown_text(walkdown)) == walkdown


def answers(**changes: object) -> Answers:
    return Answers(**{"by": "B. Person", "on": "", "today": DAY, **changes})  # type: ignore[arg-type]  # by name


def test_new_answers_keep_the_others_and_the_order_of_the_file(machine: Machine) -> None:
    digests = dict.fromkeys(walk_contents(machine), SEEN)
    first = with_answers(None, machine, {("parts", "TP1"): agrees(), ("parts", "RV1"): agrees()}, {})
    given = answered(answers(agree=("TK1",)), first, digests, by="B", on=DAY)

    walkdown = with_answers(first, machine, given, {})

    assert list(walkdown.parts) == [id_ for id_ in machine.parts if id_ in ("TK1", "RV1", "TP1")]
    assert (walkdown.parts["TK1"].by, walkdown.parts["RV1"].by) == ("B", "A. Person")


def test_all_but_what_differs(machine: Machine) -> None:
    digests = dict.fromkeys(walk_contents(machine), SEEN)
    given = answered(
        answers(rest_agrees=True, differ={"RV1": "plate says 4000 psi"}), None, digests, by="B", on=DAY
    )

    assert list(given) != []
    assert {answer.answer for place, answer in given.items() if answer and place[1] != "RV1"} == {"agrees"}
    assert given["parts", "RV1"] == agrees(by="B", answer="differs", note="plate says 4000 psi")
    assert set(given) == set(digests)


def test_what_is_gone_is_taken_out_when_it_is_gone_from_the_machine_too(machine: Machine) -> None:
    digests = dict.fromkeys(walk_contents(machine), SEEN)
    old = with_answers(None, machine, {("energy", "Q9"): agrees()}, {})

    given = answered(answers(agree=("Q9",)), old, digests, by="B", on=DAY)

    assert given == {("energy", "Q9"): None}
    assert with_answers(old, machine, given, {}).energy == {}
    with pytest.raises(InputError, match="gone from the machine file"):
        answered(answers(differ={"Q9": "it is there"}), old, digests, by="B", on=DAY)


@pytest.mark.parametrize(
    ("changes", "what"),
    [
        ({"agree": ("RV9",)}, r"no entry of that name.\n.*Did you mean RV1\?"),
        ({"agree": ("RV1",), "differ": {"parts/RV1": "a"}}, "to agree and to differ"),
        ({"differ": {"RV1": "\x1b[31m"}}, "can't be printed"),
        ({"differ": {"RV1": " "}}, "empty"),
    ],
)
def test_answers_that_can_not_be(machine: Machine, changes: dict[str, object], what: str) -> None:
    digests = dict.fromkeys(walk_contents(machine), SEEN)

    with pytest.raises(InputError, match=what):
        answered(answers(**changes), None, digests, by="B", on=DAY)


def test_a_name_that_stands_for_two() -> None:
    places = [("parts", "A1"), ("nets", "A1")]

    assert find_place("nets/A1", places) == ("nets", "A1")
    with pytest.raises(InputError, match="parts/A1, nets/A1"):
        find_place("A1", places)


@pytest.mark.parametrize(
    ("on", "what"), [("2026-02-04", "future"), ("2026-01-30", "before 2026-01-31"), ("3.2.2026", "a date")]
)
def test_days_that_can_not_be(on: str, what: str) -> None:
    with pytest.raises(InputError, match=what):
        answers(on=on).signed(dated=date(2026, 1, 31))
    assert answers(on="2026-01-31").signed(dated=date(2026, 1, 31)) == ("B. Person", date(2026, 1, 31))


GOOD = f"""format: 1
machine: PU-99
parts:
  RV1: {{seen: {SEEN}, by: A, day: 2026-02-03, answer: agrees}}
acceptances:
  RV1: {{value: 150 bar, by: A, day: 2026-02-03, computed from: {SEEN}}}
"""


@pytest.mark.parametrize(
    ("old", "new", "where", "what"),
    [
        ("machine: PU-99", "machine: PU-98", "line 2, machine", "walk-down of PU-98"),
        (f"seen: {SEEN}", "seen: 0123", "line 4, RV1, seen", "can't be used"),
        (f"seen: {SEEN}", f"seen: {SEEN[:-1]}U", "line 4, RV1, seen", "can't be used"),
        ("agrees", "agreed", "line 4, RV1, answer", "can't stand here"),
        ("agrees", "differs", "line 4, RV1, note", "no note"),
        ("parts:", "part:", "line 3, part", "isn't known"),
        ("format: 1", "format: 2", "line 1, format", "isn't known"),
        ("150 bar", "150 kW", "line 6, acceptances, RV1, value", "power"),
        ("150 bar", "-1 bar", "line 6, acceptances, RV1, value", "negative"),
        ("by: A, day: 2026-02-03, answer", "by: A, day: 2026-02-30, answer", "line 4, RV1, day", "a date"),
        ("by: A, day: 2026-02-03, answer", "by: A, day: 2026-02-05, answer", "line 4, RV1, day", "future"),
        ("by: A, day: 2026-02-03, comp", "by: A, day: 2027-02-03, comp", "acceptances, RV1, day", "future"),
        ("by: A, day: 2026-02-03, answer", "by: &a A, day: 2026-02-03, answer", "line 4", "anchor"),
        ("  RV1: {value", "  '../x': {value", "line 6, acceptances, ../x", "can't be used"),
    ],
)
def test_a_file_that_was_edited_wrongly(
    read: Callable[..., Walkdown], machine: Machine, old: str, new: str, where: str, what: str
) -> None:
    good = GOOD.replace("PU-99", machine.tag)
    old, new = old.replace("PU-99", machine.tag), new
    assert read(good, today=date(2026, 2, 4)).acceptances["RV1"].value_bar == 150.0
    assert good.count(old) == 1

    with pytest.raises(InputError) as caught:
        read(good.replace(old, new), today=date(2026, 2, 4))

    (problem,) = caught.value.problems
    assert where in problem.where
    assert what in problem.what
