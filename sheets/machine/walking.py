"""What of a machine file is walked down, how it stands, and how answers come into the walk-down.

Digests are made outside (``seal``) and handed in; this module only says what they are made of.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import date
from enum import Enum
from typing import Final

from sheets.errors import InputError, Problem, nearest, quoted
from sheets.machine.fields import Entry
from sheets.machine.leaves import leaves
from sheets.machine.model import Machine
from sheets.machine.screws import screws_of
from sheets.machine.site import Policies
from sheets.machine.walkdown import SECTIONS, Acceptance, Answer, Walkdown
from sheets.quantities import number

Place = tuple[str, str]
"""Section and id of an entry."""
Content = tuple[tuple[tuple[str, ...], str | bool | tuple[str, ...]], ...]
"""What an entry says: each value with its keys, quantities as digits in the base unit."""

COMPUTING: Final = ("parts", "gauges", "nets")
"""Sections that a computed setting comes from, beside the fluid and the policy figures."""
SAME_BAR: Final = 0.01
"""An accepted value and the computed one are the same within this; far below any gauge."""


def walk_contents(machine: Machine) -> dict[Place, Content]:
    """Every entry that is walked down, with what it says, in the order of the file."""
    found: dict[Place, Content] = {("parts", id_): _content(part) for id_, part in machine.parts.items()}
    found |= {("gauges", id_): _content(gauge) for id_, gauge in machine.gauges.items()}
    found |= {("nets", name): ((("ports",), tuple(sorted(ports))),) for name, ports in machine.nets.items()}
    found |= {("energy", id_): _content(supply) for id_, supply in machine.energy.items()}
    found["whole", "fluid"] = _content(machine.fluid)
    found["whole", "controls"] = _content(machine.controls)
    found["whole", "absent"] = (
        (("absent",), tuple(sorted(machine.absent))),
        (("load is held up",), machine.load_is_held_up),
    )
    return found


def computing_contents(machine: Machine, policies: Policies) -> tuple[tuple[Place, Content], ...]:
    """Everything that computed settings come from."""
    contents = walk_contents(machine)
    kept = [(place, contents[place]) for place in sorted(contents) if place[0] in COMPUTING]
    return (
        *kept,
        (("whole", "fluid"), contents["whole", "fluid"]),
        (("site", "policies"), _content(policies)),
    )


def _content(entry: Entry) -> Content:
    return tuple(
        sorted(
            (leaf.path, number(leaf.value) if isinstance(leaf.value, float) else leaf.value)
            for leaf in leaves(entry)
        )
    )


class EntryState(Enum):
    """How one entry stands."""

    AGREES = "agrees"
    DIFFERS = "differs"
    CHANGED = "changed since"
    NOT_COMPARED = "not compared"
    GONE = "gone from the file"


@dataclass(frozen=True, kw_only=True)
class WalkedEntry:
    """One entry, and what was said of it."""

    section: str
    id: str
    state: EntryState
    by: str = ""
    on: date | None = None
    note: str = ""


class AcceptanceState(Enum):
    """How a computed setting stands."""

    ACCEPTED = "accepted"
    VOID = "void"
    PROPOSAL = "proposal"


@dataclass(frozen=True, kw_only=True)
class AcceptedSetting:
    """One computed setting, and whether somebody took it on."""

    adjuster: str
    state: AcceptanceState
    computed_bar: float
    accepted_bar: float | None = None
    by: str = ""
    on: date | None = None


@dataclass(frozen=True, kw_only=True)
class WalkdownState:
    """How far the walk-down of a machine file is, and whether it still holds."""

    entries: tuple[WalkedEntry, ...]
    """Those of the file in its order, then those that are gone from it."""
    acceptances: tuple[AcceptedSetting, ...]
    """One for each computed setting."""

    def in_state(self, *states: EntryState) -> tuple[WalkedEntry, ...]:
        return tuple(one for one in self.entries if one.state in states)

    @property
    def begun(self) -> bool:
        """Whether anybody compared anything."""
        return any(one.by for one in self.entries)

    @property
    def touched(self) -> bool:
        """Whether anything was compared or accepted at all."""
        return self.begun or any(one.by for one in self.acceptances)

    @property
    def complete(self) -> bool:
        """Whether every entry was compared as it now stands, and agrees."""
        return all(one.state is EntryState.AGREES for one in self.entries)

    @property
    def proposals(self) -> frozenset[str]:
        """Adjusters whose setting was computed, and that nobody has accepted as it now stands."""
        return frozenset(
            one.adjuster for one in self.acceptances if one.state is not AcceptanceState.ACCEPTED
        )


def walkdown_state(
    walkdown: Walkdown | None,
    *,
    digests: Mapping[Place, str],
    computed_bar: Mapping[str, float],
    computed_from: str,
) -> WalkdownState:
    """How the entries and the computed settings stand.

    ``digests``: of every entry as now read, in the order of the file. ``computed_bar``: computed settings by
    adjuster, in bar. ``computed_from``: digest of what they come from. No walk-down: nothing was compared.
    """
    answers = walkdown.answers() if walkdown else {}
    accepted = walkdown.acceptances if walkdown else {}
    entries = [_walked(place, answers.get(place), digest) for place, digest in digests.items()]
    entries += [
        WalkedEntry(section=place[0], id=place[1], state=EntryState.GONE, by=answer.by, on=answer.day)
        for place, answer in answers.items()
        if place not in digests
    ]
    return WalkdownState(
        entries=tuple(entries),
        acceptances=tuple(
            _accepted(id_, accepted.get(id_), value_bar, computed_from)
            for id_, value_bar in computed_bar.items()
        ),
    )


def _walked(place: Place, answer: Answer | None, digest: str) -> WalkedEntry:
    section, id_ = place
    if answer is None:
        return WalkedEntry(section=section, id=id_, state=EntryState.NOT_COMPARED)
    if answer.seen != digest:
        state = EntryState.CHANGED
    else:
        state = EntryState.AGREES if answer.answer == "agrees" else EntryState.DIFFERS
    return WalkedEntry(section=section, id=id_, state=state, by=answer.by, on=answer.day, note=answer.note)


def _accepted(
    id_: str, acceptance: Acceptance | None, value_bar: float, computed_from: str
) -> AcceptedSetting:
    if acceptance is None:
        return AcceptedSetting(adjuster=id_, state=AcceptanceState.PROPOSAL, computed_bar=value_bar)
    holds = acceptance.computed_from == computed_from and abs(acceptance.value_bar - value_bar) <= SAME_BAR
    return AcceptedSetting(
        adjuster=id_,
        state=AcceptanceState.ACCEPTED if holds else AcceptanceState.VOID,
        computed_bar=value_bar,
        accepted_bar=acceptance.value_bar,
        by=acceptance.by,
        on=acceptance.day,
    )


def find_place(named: str, places: Iterable[Place]) -> Place:
    """The entry that a person names, by its id or as ``section/id``. Raises InputError."""
    kept = tuple(places)
    found = [place for place in kept if named in (place[1], f"{place[0]}/{place[1]}")]
    if len(found) == 1:
        return found[0]
    if found:
        raise InputError(
            Problem(
                where=quoted(named),
                what="Several entries are called so.",
                fix=f"Write one of: {', '.join(f'{section}/{id_}' for section, id_ in found)}.",
            )
        )
    right = nearest(named, [id_ for _, id_ in kept])
    raise InputError(
        Problem(
            where=quoted(named),
            what="The walk-down has no entry of that name.",
            fix=(f"Did you mean {right}? " if right else "")
            + "Name a part, gauge, line or supply of the machine file, or fluid, controls, absent.",
        )
    )


def with_answers(
    walkdown: Walkdown | None,
    machine: Machine,
    answers: Mapping[Place, Answer | None],
    acceptances: Mapping[str, Acceptance],
) -> Walkdown:
    """The walk-down with these answers in place of older ones, in the order of the machine file.

    An answer of None takes an entry out: it is gone from the machine file, and from the machine.
    """
    kept: dict[Place, Answer | None] = dict(walkdown.answers()) if walkdown else {}
    kept |= answers
    order = {place: number for number, place in enumerate(walk_contents(machine))}
    places = sorted(kept, key=lambda place: (order.get(place, len(order)), place))
    sections: dict[str, dict[str, Answer]] = {section: {} for section in SECTIONS}
    for place in places:
        answer = kept[place]
        if answer is not None:
            sections[place[0]][place[1]] = answer
    accepted = {**(walkdown.acceptances if walkdown else {}), **acceptances}
    screws = list(screws_of(machine))
    ranked = sorted(accepted, key=lambda id_: (screws.index(id_) if id_ in screws else len(screws), id_))
    return Walkdown.model_validate(
        {
            "format": 1,
            "machine": machine.tag,
            **sections,
            "acceptances": {id_: accepted[id_] for id_ in ranked},
        }
    )
