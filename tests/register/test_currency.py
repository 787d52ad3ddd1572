"""Whether a paper is the current one."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from register_bench import CONTENT, FILE, at

from sheets.register.chain import Anchor, Break
from sheets.register.currency import Standing, currency_of
from sheets.register.issuing import Reservation, reject, void, withdraw
from sheets.register.revisions import Revision
from sheets.register.store import Register

OTHER = "0000000000000000"


def test_current_and_superseded(register: Register, issue: Callable[..., Revision]) -> None:
    first, second = issue(), issue(content=OTHER)
    now = currency_of(register, second.record_id)
    assert (now.standing, now.revision, now.current) == (Standing.CURRENT, second, second)
    old = currency_of(register, first.record_id)
    assert (old.standing, old.current) == (Standing.SUPERSEDED, second)
    assert old.revision is not None
    assert old.revision.superseded_by == 2
    assert currency_of(register, CONTENT).standing is Standing.SUPERSEDED
    assert currency_of(register, OTHER).standing is Standing.CURRENT


def test_by_digest_the_newest_and_those_alike(register: Register, issue: Callable[..., Revision]) -> None:
    first, _, third = issue(), issue(content=OTHER), issue()
    found = currency_of(register, CONTENT)
    assert (found.standing, found.revision) == (Standing.CURRENT, third)
    assert [one.record_id for one in found.alike] == [first.record_id]
    assert currency_of(register, FILE).revision == third


def test_ids_and_digests_as_people_type_them(register: Register, issue: Callable[..., Revision]) -> None:
    revision = issue()
    typed = revision.record_id.lower().replace("0", "o").replace("1", "l")
    for key in (typed, f" {typed[:5]}-{typed[5:]} ", "ol23 4567 89ab cdef", FILE.upper()):
        assert currency_of(register, key).revision == revision, key


def test_ends(register: Register, hold: Callable[..., Reservation], issue: Callable[..., Revision]) -> None:
    why = {"reason": "Why", "by": "Olaf Brenner", "when": at(9)}
    held = hold("WI-1")
    assert currency_of(register, held.record_id).standing is Standing.NOT_ISSUED
    void(register, held.record_id, **why)
    assert currency_of(register, held.record_id).standing is Standing.VOID
    held = hold("WI-1")
    reject(register, held.record_id, **why)
    assert currency_of(register, held.record_id).standing is Standing.REJECTED
    revision = issue("WI-1")
    withdraw(register, revision.record_id, **why)
    found = currency_of(register, revision.record_id)
    assert (found.standing, found.current) == (Standing.WITHDRAWN, None)
    assert currency_of(register, CONTENT).standing is Standing.WITHDRAWN


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None, max_examples=60)
@given(key=st.text() | st.text(alphabet="0123456789ABCDEFGHJKMNPQRSTVWXYZ%_\"'-", max_size=70))
def test_any_other_text_is_unknown(register: Register, key: str) -> None:
    assert currency_of(register, key).standing is Standing.UNKNOWN


def test_a_content_digest_that_only_stands_in_another_field_is_no_match(
    register: Register, hold: Callable[..., Reservation], issue: Callable[..., Revision]
) -> None:
    revision = issue()
    assert revision.issue is not None
    assert currency_of(register, revision.issue.machine_digest).standing is Standing.UNKNOWN
    void(register, hold("WI-1").record_id, reason=OTHER, by="Ines Kurz", when=at(9))
    assert currency_of(register, OTHER).standing is Standing.UNKNOWN


def test_nothing_counts_from_a_broken_register(
    register: Register, issue: Callable[..., Revision], meddle: Callable[..., None]
) -> None:
    """The event that superseded it was taken out: without the check it would read as current."""
    first, _ = issue(), issue()
    meddle("DELETE FROM events WHERE sequence = 9", "UPDATE events SET sequence = 9 WHERE sequence = 8")
    found = currency_of(register, first.record_id)
    assert found.standing is Standing.NOT_ESTABLISHED
    assert found.revision is None
    assert found.chain.broken_at == 8


def test_an_anchor_is_asked_too(
    register: Register, issue: Callable[..., Revision], meddle: Callable[..., None]
) -> None:
    first, _ = issue(), issue()
    last = currency_of(register, first.record_id).chain.last
    assert last is not None
    meddle("DELETE FROM events WHERE sequence = 9")
    assert currency_of(register, first.record_id).standing is Standing.CURRENT  # so it reads without one
    found = currency_of(register, first.record_id, last)
    assert (found.standing, found.chain.broken) == (Standing.NOT_ESTABLISHED, Break.CUT)
    with pytest.raises(TypeError):
        currency_of(register)  # type: ignore[call-arg]  # a key is no option
    assert Anchor.read(str(last)) == last
