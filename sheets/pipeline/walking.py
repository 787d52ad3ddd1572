"""Compares a machine file with the machine, by name and date, and takes computed settings on."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

from sheets.machine.answering import Answers, answered
from sheets.machine.files import move_into_place, walkdown_file
from sheets.machine.holding import held
from sheets.machine.walkdown import Walkdown, walkdown_text
from sheets.machine.walking import (
    EntryState,
    Place,
    WalkdownState,
    computing_contents,
    walk_contents,
    walkdown_state,
    with_answers,
)
from sheets.pipeline.describing import Described, walkdown_beside
from sheets.pipeline.speaking import speaker_of
from sheets.seal.canonical import canonical_bytes, digest
from sheets.targets.accepting import accept, computed_settings
from sheets.targets.compute import compute_targets
from sheets.targets.settings import Targets
from sheets.wording.plain import Json
from sheets.wording.walk_list import entry_lines, standing, walk_json, walk_lines


def walkdown(described: Described) -> WalkdownState:
    """How far the machine file was compared with the machine, and which computed settings were accepted."""
    return walked(described, _targets(described))


def walked(described: Described, found: Targets) -> WalkdownState:
    return walkdown_state(
        described.walkdown,
        digests=_entry_digests(described),
        computed_bar=computed_settings(found),
        computed_from=_computing_digest(described),
    )


def _entry_digests(described: Described) -> dict[Place, str]:
    return {place: digest(canonical_bytes(said)) for place, said in walk_contents(described.machine).items()}


def _computing_digest(described: Described) -> str:
    return digest(canonical_bytes(computing_contents(described.machine, described.policies)))


def write_walkdown(machine_file: Path, described: Described, answers: Answers) -> WalkdownState:
    """Adds answers to the walk-down beside the machine file, and says how it stands then.

    Raises InputError for unknown entries, wrong dates, and what can't be accepted, and writes nothing.
    """
    found = _targets(described)
    _with_answers(machine_file, described, answers, found)  # what is refused leaves no lock beside the file
    with held(walkdown_file(machine_file)):  # another's answer between reading and writing would be lost
        changed = _with_answers(machine_file, described, answers, found)
        move_into_place(
            walkdown_file(machine_file),
            walkdown_text(changed).encode(),
            fix="Look whether you may write into the folder of the machine file.",
        )
    return walked(replace(described, walkdown=changed), found)


def _with_answers(machine_file: Path, described: Described, answers: Answers, found: Targets) -> Walkdown:
    """The walk-down as it stands beside the machine file now, with these answers in it. Raises InputError."""
    by, on = answers.signed(dated=described.machine.dated)
    beside = walkdown_beside(machine_file, described.machine, answers.today)
    now = replace(described, walkdown=beside.walkdown if beside else None)
    computed_from = _computing_digest(now)
    return with_answers(
        now.walkdown,
        now.machine,
        answered(answers, now.walkdown, _entry_digests(now), by=by, on=on),
        {
            id_: accept(now.machine, found, id_, by=by, on=on, computed_from=computed_from)
            for id_ in answers.accept
        },
    )


def walkdown_text_lines(described: Described, state: WalkdownState) -> Iterator[str]:
    return walk_lines(speaker_of(described), state)


def walkdown_json(described: Described, state: WalkdownState) -> dict[str, Json]:
    return walk_json(speaker_of(described), state)


def walkdown_questions(described: Described, state: WalkdownState) -> Iterator[tuple[str, tuple[str, ...]]]:
    """Every entry that doesn't agree yet, as ``section/id`` with its lines of the list."""
    speaker = speaker_of(described)
    for one in state.entries:
        if one.state is not EntryState.AGREES:
            yield f"{one.section}/{one.id}", tuple(entry_lines(speaker, one))


def walkdown_standing(described: Described, state: WalkdownState) -> str:
    return standing(described.machine, state)


def _targets(described: Described) -> Targets:
    return compute_targets(described.machine, described.circuit, described.policies)
