"""The list that is taken to the machine: what to read and compare, place by place, and how each stands."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Final

from sheets.machine.fields import Entry
from sheets.machine.gauges import Gauge
from sheets.machine.leaves import Leaf, leaves
from sheets.machine.model import Machine, Supply
from sheets.machine.walking import AcceptanceState, AcceptedSetting, EntryState, WalkdownState, WalkedEntry
from sheets.wording.figures import Figures
from sheets.wording.plain import FORMAT, Json, rounded
from sheets.wording.plates import plate_values
from sheets.wording.sentences import Sentences
from sheets.wording.steps import Speaker, capital

_BOX: Final = {
    EntryState.AGREES: "[agrees]",
    EntryState.DIFFERS: "[differs]",
    EntryState.CHANGED: "[changed since]",
    EntryState.NOT_COMPARED: "[ ]",
    EntryState.GONE: "[gone]",
}
_TOLD: Final = ("kind", "name", "where")
"""Stand in the heading line of an entry."""


def walk_lines(speaker: Speaker, state: WalkdownState) -> Iterator[str]:
    """The whole list with the state of each entry, then how the walk-down stands."""
    machine, say = speaker.machine, Sentences(speaker.machine.language, "walkdown.j2")
    yield say.say("title", tag=machine.tag, name=machine.name, dated=machine.dated.isoformat())
    yield say.say("lead")
    for area, entries in _areas(machine, state).items():
        yield ""
        yield capital(area)
        for one in entries:
            yield from entry_lines(speaker, one)
    for section, heading in (("nets", "nets_heading"), ("whole", "whole_heading")):
        yield ""
        yield say.say(heading)
        for one in state.entries:
            if one.section == section and one.state is not EntryState.GONE:
                yield from entry_lines(speaker, one)
    gone = state.in_state(EntryState.GONE)
    if gone:
        yield ""
        yield say.say("gone_heading")
        for one in gone:
            yield from entry_lines(speaker, one)
    if state.acceptances:
        yield ""
        yield say.say("settings_heading")
        for setting in state.acceptances:
            yield f"  {say_setting(speaker, setting)}"
    yield ""
    yield standing(machine, state)


def _areas(machine: Machine, state: WalkdownState) -> dict[str, list[WalkedEntry]]:
    """Parts, gauges and supplies by where they are, the first words of it, in the order of the file."""
    found: dict[str, list[WalkedEntry]] = {}
    spelt: dict[str, str] = {}
    for one in state.entries:
        thing = _thing(machine, one)
        if thing is not None and one.section != "whole":
            area = _where(machine, one, thing).split(",")[0].strip()
            found.setdefault(spelt.setdefault(area.casefold(), area), []).append(one)
    return found


def _where(machine: Machine, one: WalkedEntry, thing: Entry) -> str:
    """Where an entry is to be found; a gauge that is fixed on a line isn't in any box."""
    if isinstance(thing, Supply):
        return thing.isolator.where
    if isinstance(thing, Gauge) and "where" not in thing.model_fields_set:
        line = next((net for net, ports in machine.nets.items() if f"{one.id}.P" in ports), "")
        if line:
            return Sentences(machine.language, "walkdown.j2").say("fixed_gauge", line=line)
    return str(getattr(thing, "where", ""))


def _thing(machine: Machine, one: WalkedEntry) -> Entry | None:
    """The entry itself; None for lines and for what is gone."""
    if one.state is EntryState.GONE:
        return None
    if one.section == "whole":
        return {"fluid": machine.fluid, "controls": machine.controls}.get(one.id)
    sections: dict[str, Mapping[str, Entry]] = {
        "parts": machine.parts,
        "gauges": machine.gauges,
        "energy": machine.energy,
    }
    return sections[one.section][one.id] if one.section in sections else None


def entry_lines(speaker: Speaker, one: WalkedEntry) -> Iterator[str]:
    """One entry: what it is and where, then what to read off it."""
    machine = speaker.machine
    thing = _thing(machine, one)
    yield f"  {_BOX[one.state]} {_heading(machine, one, thing)}{_said(one)}"
    for line in _details(speaker, one, thing):
        yield f"      {line}"


def _said(one: WalkedEntry) -> str:
    if not one.by or one.on is None:
        return ""
    note = f": {one.note}" if one.note else ""
    return f"  ({one.by}, {one.on.isoformat()}{note})"


def _heading(machine: Machine, one: WalkedEntry, thing: Entry | None) -> str:
    if one.section == "nets" or thing is None or one.section == "whole":
        return one.id
    if isinstance(thing, Supply):
        return f"{one.id} {thing.kind}, {thing.isolator.where}"
    kind, where = getattr(thing, "kind", ""), _where(machine, one, thing)
    name = getattr(thing, "name", "") or kind
    told = name if name == kind else f"{name} ({kind})"
    return f"{one.id} {told}, {where}"


def _details(speaker: Speaker, one: WalkedEntry, thing: Entry | None) -> Iterator[str]:
    machine, say = speaker.machine, Sentences(speaker.machine.language, "walkdown.j2")
    if one.state is EntryState.GONE:
        return
    if one.section == "nets":
        yield ", ".join(machine.nets[one.id])
    elif one.id == "absent" and one.section == "whole":
        yield say.say("absent_line", items=", ".join(machine.absent))
        yield say.say("held_up_line", held="yes" if machine.load_is_held_up else "")
    elif thing is not None:
        for group in _groups(thing, () if one.section == "whole" else _TOLD):
            inner = len(group[0].path) > 1
            head = f"{' '.join(group[0].path[:-1])}: " if inner else ""
            yield head + plate_values(group, machine.units)


def _groups(thing: Entry, told: tuple[str, ...]) -> Iterator[tuple[Leaf, ...]]:
    """Values under the same key together, in one line each; adjusters and isolators have their own."""
    groups: dict[tuple[str, ...], list[Leaf]] = {}
    for leaf in leaves(thing):
        if len(leaf.path) > 1 or leaf.path[0] not in told:
            groups.setdefault(leaf.path[:-1], []).append(leaf)
    yield from (tuple(group) for group in groups.values())


def say_setting(speaker: Speaker, setting: AcceptedSetting) -> str:
    """A computed setting, and whether somebody accepted it."""
    say = Sentences(speaker.machine.language, "walkdown.j2")
    return say.say(f"{setting.state.value}_line", **setting_values(speaker, setting))


def setting_values(speaker: Speaker, setting: AcceptedSetting) -> dict[str, str]:
    """What sentences about a computed setting may name."""
    figures: Figures = speaker.figures
    accepted = setting.accepted_bar
    return {
        "id": setting.adjuster,
        "adjuster": speaker.adjuster(setting.adjuster),
        "value": figures.pressure(setting.computed_bar),
        "accepted": figures.pressure(accepted) if accepted is not None else "",
        "by": setting.by,
        "on": setting.on.isoformat() if setting.on else "",
    }


def standing(machine: Machine, state: WalkdownState) -> str:
    """How far the walk-down is, in one sentence."""
    say = Sentences(machine.language, "walkdown.j2")
    count = {one: str(len(state.in_state(one))) for one in EntryState}
    total = str(len(state.entries) - len(state.in_state(EntryState.GONE)))
    if not state.begun:
        return say.say("standing_none", total=total)
    return say.say(
        "standing",
        total=total,
        agree=count[EntryState.AGREES],
        differ=count[EntryState.DIFFERS],
        changed=count[EntryState.CHANGED],
        missing=count[EntryState.NOT_COMPARED],
        gone=count[EntryState.GONE],
    )


def proposal_words(state: WalkdownState | None) -> dict[str, str]:
    """For each computed setting, what its origin is followed by."""
    words: dict[str, str] = {}
    for one in state.acceptances if state else ():
        accepted = one.state is AcceptanceState.ACCEPTED and one.on is not None
        words[one.adjuster] = f"accepted by {one.by} on {one.on}" if accepted else "proposal"
    return words


def walk_json(speaker: Speaker, state: WalkdownState) -> dict[str, Json]:
    """The list as data: each entry with what it says and how it stands, and the computed settings."""
    machine = speaker.machine
    return {
        "format": FORMAT,
        "tag": machine.tag,
        "dated": machine.dated.isoformat(),
        "complete": state.complete,
        "entries": [
            {
                "section": one.section,
                "id": one.id,
                "state": one.state.value,
                "by": one.by or None,
                "on": one.on.isoformat() if one.on else None,
                "note": one.note or None,
                "reads": list[Json](_details(speaker, one, _thing(machine, one))),
            }
            for one in state.entries
        ],
        "settings": [
            {
                "adjuster": one.adjuster,
                "state": one.state.value,
                "computed_bar": rounded(one.computed_bar),
                "accepted_bar": None if one.accepted_bar is None else rounded(one.accepted_bar),
                "by": one.by or None,
                "on": one.on.isoformat() if one.on else None,
            }
            for one in state.acceptances
        ],
    }
