"""Makes a demonstration site on the spot: an invented works with keys, and a signed pack marked as such."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Final

from sheets.errors import InputError, Problem
from sheets.machine.answering import Answers
from sheets.machine.files import move_into_place
from sheets.machine.loading import load_machine
from sheets.pages.document import Layout
from sheets.pipeline.computing import steps, targets
from sheets.pipeline.describing import check
from sheets.pipeline.issuing import Issued, issue
from sheets.pipeline.keying import keys
from sheets.pipeline.persons import Signing
from sheets.pipeline.walking import write_walkdown
from sheets.targets.accepting import computed_settings

PERSONS: Final = ("Ada Quarrow", "Bram Tolliver", "Cleo Harnett")
"""Invented, as the works is."""
PASSPHRASE: Final = "demonstration only"
MARK: Final = "demonstration, not for use"
SITE: Final = """\
# A demonstration site, made by jamnut demo. Nobody works here.
format: 1
plant: Brackwater Tileworks
record address: https://records.brackwater.example
planner telephone: extension 417
emergency telephone: extension 333
signatures:
  needed: [prepared, checked, approved]
  trust: [keys/authority.pem]
  note: demonstration, not for use
"""
_FIX: Final = "Name a folder that you may write to."


@dataclass(frozen=True, kw_only=True)
class Demonstration:
    """What was made."""

    folder: Path
    site: Path
    register: Path
    issued: Issued


def demo(
    machine_file: Path, folder: Path, *, when: datetime, random_bytes: Callable[[int], bytes]
) -> Demonstration:
    """Copies a machine file into a new folder, makes a site with keys there, and issues a signed pack.

    The walk-down is answered for an invented person, so the pack says that it is a demonstration. Raises
    InputError if the folder is there already.
    """
    if folder.exists():
        raise InputError(
            Problem(
                where=str(folder),
                what="It is there already.",
                fix="Name a folder that isn't there yet; a demonstration overwrites nothing.",
            )
        )
    source = load_machine(machine_file).source
    (folder / "keys").mkdir(parents=True)
    copied, site = folder / machine_file.name, folder / "site.yaml"
    move_into_place(copied, source, fix=_FIX)
    move_into_place(site, SITE.encode(), fix=_FIX)
    ring = keys(
        folder / "keys",
        authority_name="Brackwater Tileworks demonstration authority",
        persons=PERSONS,
        passphrase=lambda _: PASSPHRASE,
        when=when,
        random_bytes=random_bytes,
    )
    for key in (ring.authority, *ring.signers):
        move_into_place(key.with_suffix(".txt"), f"{PASSPHRASE}\n".encode(), fix=_FIX, private=True)
    described = check(copied, site)
    # A clock that stands before the day of the machine file is no reason to show nothing.
    day = max(when.date(), described.machine.dated)
    write_walkdown(
        copied,
        described,
        Answers(
            today=day,
            on="",
            by=PERSONS[0],
            rest_agrees=True,
            accept=tuple(computed_settings(targets(described))),
        ),
    )
    matter = steps(check(copied, site, day))
    register = folder / "register.db"
    issued = issue(
        matter,
        folder / f"{matter.machine.tag}.pdf",
        signings=tuple(
            Signing(meaning=meaning, key=key)
            for meaning, key in zip(("prepared", "checked", "approved"), ring.signers, strict=True)
        ),
        passphrase=lambda _: PASSPHRASE,
        register_at=register,
        site_folder=folder,
        when=when,
        random_bytes=random_bytes,
        layout=Layout(),
    )
    return Demonstration(folder=folder, site=site, register=register, issued=issued)


def demo_text(made: Demonstration) -> Iterator[str]:
    """What to look at."""
    yield f"{made.issued.file}: revision {made.issued.revision}, record {made.issued.record_id}, {MARK}"
    yield f"{made.register}: the register"
    yield f"look at it:  jamnut verify {made.issued.file} --site {made.site} --register {made.register}"
    yield "the walk-down was answered, and the keys were made, for invented persons; beside each key, in a"
    yield "file that no works would keep there, stands its passphrase"
