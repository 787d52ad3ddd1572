"""Events that can't follow on those before are told by number, not folded into some state."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from register_bench import rehash

from sheets.errors import InputError
from sheets.register.currency import Standing, currency_of
from sheets.register.events import Event
from sheets.register.issuing import Reservation
from sheets.register.opening import Place
from sheets.register.revisions import revisions_from
from sheets.register.store import Register


@pytest.fixture
def reserved(register: Register, hold: Callable[..., Reservation]) -> Event:
    hold()
    with register.reading() as view:
        return next(view.events(after=1))


def next_one(reserved: Event, **changed: object) -> Event:
    """The reservation of the second revision, and the end of the first before it."""
    second = {"sequence": 4, "record_id": "1111111111", "data": '{"revision":2}'}
    return replace(reserved, **{**second, **changed})


def ended(reserved: Event) -> Event:
    return replace(reserved, sequence=3, kind="voided", data='{"reason":"Why"}')


def test_a_second_revision_after_the_first_has_ended(reserved: Event) -> None:
    events = [reserved, ended(reserved), next_one(reserved)]
    assert [one.state.value for one in revisions_from(events)["WI-204"]] == ["void", "reserved"]


@pytest.mark.parametrize(
    ("changed", "wrong"),
    [
        ({"machine": "KP-3"}, "belongs to another machine"),
        ({"record_id": None}, "given out before"),
        ({"record_id": None, "document": "WI-9", "data": '{"revision":1}'}, "given out before"),
        ({"data": '{"revision":3}'}, "reserves revision 3 after 1"),
    ],
)
def test_a_reservation_that_cannot_follow(reserved: Event, changed: dict[str, object], wrong: str) -> None:
    if "record_id" in changed:
        changed = {**changed, "record_id": reserved.record_id}
    with pytest.raises(InputError, match=rf"event 4 (.|\n)*{wrong}"):
        revisions_from([reserved, ended(reserved), next_one(reserved, **changed)])


def test_a_reservation_while_another_is_open(reserved: Event) -> None:
    with pytest.raises(InputError, match=r"event 4 (.|\n)*while another is open"):
        revisions_from([reserved, next_one(reserved)])


def test_kinds_of_other_purposes_are_passed_over(reserved: Event) -> None:
    other = replace(reserved, sequence=3, kind="reading", data='{"found":"182"}')
    assert revisions_from([reserved, other]) == revisions_from([reserved])


def test_a_record_id_of_two_documents_names_neither(
    register: Register, hold: Callable[..., Reservation], meddle: Callable[..., None], place: Place
) -> None:
    held = hold("WI-1")
    hold("WI-2")
    meddle("UPDATE events SET record_id = :same WHERE kind = 'reserved'", same=held.record_id)
    rehash(place, 1)
    currency = currency_of(register, held.record_id)
    assert currency.standing is Standing.NOT_ESTABLISHED
    assert "event 3" in currency.trouble
