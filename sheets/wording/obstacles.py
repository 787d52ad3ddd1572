"""What stands against issuing a pack, each with what to do; a draft may be printed all the same."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import Final

from sheets.amounts import Finding, Severity
from sheets.errors import Problem
from sheets.machine.walking import AcceptanceState, EntryState, WalkdownState, WalkedEntry
from sheets.wording.findings import say_finding
from sheets.wording.sentences import Sentences
from sheets.wording.steps import Speaker
from sheets.wording.walk_list import setting_values

MOST_NAMED: Final = 8
"""So many entries are named; the rest are counted."""
_BY_STATE: Final = (
    (EntryState.CHANGED, "changed"),
    (EntryState.DIFFERS, "differs"),
    (EntryState.GONE, "gone"),
    (EntryState.NOT_COMPARED, "not_compared"),
)


def refusals(speaker: Speaker, findings: Iterable[Finding]) -> tuple[Problem, ...]:
    """What stands against printing; never empty: where nothing is refused, there is nothing to set."""
    where, against = speaker.machine.tag, (Severity.REFUSED, Severity.NOT_ESTABLISHED)
    said = (say_finding(speaker, one) for one in findings if one.severity in against)
    return tuple(Problem(where=where, what=what, fix=fix) for what, fix in said) or (
        Problem(
            where=where,
            what="There is no adjuster that is in use and may be set.",
            fix="Look for 'may be set: no' in the machine file, and at what jamnut steps says of each.",
        ),
    )


def obstacles(speaker: Speaker, state: WalkdownState, *, established: bool) -> tuple[Problem, ...]:
    """Everything that stands against issuing; empty where nothing does.

    ``established``: whether targets and procedure hold.
    """
    where = speaker.machine.tag
    return tuple(
        Problem(where=where, what=what, fix=fix) for what, fix in _found(speaker, state, established)
    )


def _found(speaker: Speaker, state: WalkdownState, established: bool) -> Iterator[tuple[str, str]]:
    say = Sentences(speaker.machine.language, "walkdown.j2")
    if not established:
        yield say.say("not_established_what"), say.say("not_established_fix")
    if not state.begun:
        yield say.say("nobody_what"), say.say("nobody_fix")
    else:
        for kind, name in _BY_STATE:
            entries = state.in_state(kind)
            if entries:
                what = say.say(f"{name}_what", count=str(len(entries)), items=named(entries))
                yield what, say.say(f"{name}_fix")
    changed = named(state.in_state(EntryState.CHANGED, EntryState.GONE))
    for setting in state.acceptances:
        if setting.state is not AcceptanceState.ACCEPTED:
            values = setting_values(speaker, setting) | {"items": changed}
            kind_name = setting.state.value
            yield say.say(f"{kind_name}_what", **values), say.say(f"{kind_name}_fix", **values)


def named(entries: Iterable[WalkedEntry]) -> str:
    """Ids of entries in one line, the first few of many."""
    ids = [one.id for one in entries]
    more = len(ids) - MOST_NAMED
    return ", ".join(ids[:MOST_NAMED]) + (f" and {more} more" if more > 0 else "")
