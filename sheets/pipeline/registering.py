"""What is asked of the register itself: history, copies, export, backup, and whether its chain holds."""

from __future__ import annotations

import contextlib
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date, datetime
from pathlib import Path
from typing import Final, Literal

from sheets.crockford import as_printed
from sheets.errors import ExitStatus, InputError, Problem, RefusedError, quoted
from sheets.machine.files import aside_of, bytes_of
from sheets.register import issuing as registered
from sheets.register.chain import Anchor, ChainVerdict, chain_in, check_chain
from sheets.register.copies import Copy, CopyHung, CopyTakenDown
from sheets.register.copies import copies as copies_of
from sheets.register.events import Event
from sheets.register.export import csv_lines, json_lines, lines_of, restore_lines
from sheets.register.finding import revision_in, revisions_in
from sheets.register.opening import Place, migrate_register, open_register
from sheets.register.recording import Telling, tell_of
from sheets.register.revisions import Revision, current
from sheets.register.store import View

_NO_ANCHOR: Final = (
    "No anchor was given: an end that was cut off, or a register written anew, wouldn't be seen."
)


def history(what: str, *, register_at: Place, changes: bool) -> list[str]:
    """Every event of a document, a machine or a record id, one line each; of all, if ``what`` is empty.

    ``changes``: with the list of what each revision changed. Raises InputError if nothing is known of it.
    """
    with open_register(register_at, read_only=True) as register, register.reading() as view:
        lines = [line for event in _about(view, what) for line in _event_lines(event, changes)]
    if not lines:
        raise InputError(
            Problem(
                where=quoted(what),
                what="The register knows no document, machine or record of that name.",
                fix="Write it as it stands on the sheets.",
            )
        )
    return lines


def _about(view: View, what: str) -> Iterator[Event]:
    if not what:
        return view.events()
    for events in (
        view.events(document=what),
        view.events(machine=what),
        view.events(record_id=as_printed(what)),
    ):
        first = next(events, None)
        if first is not None:
            return _with(first, events)
    return iter(())


def _with(first: Event, others: Iterator[Event]) -> Iterator[Event]:
    yield first
    yield from others


def _event_lines(event: Event, changes: bool) -> Iterator[str]:
    facts = event.facts
    kept = facts.pop("kept", None)
    said = "; ".join(f"{_called(name)} {_shown(value)}" for name, value in facts.items() if value != "")
    about = " ".join(part for part in (event.document or event.machine, event.record_id) if part)
    at = event.time[:16].replace("T", " ")
    yield "  ".join((f"{event.sequence:>6}", at, event.kind, about, f"by {event.who}", said))
    if changes and isinstance(kept, dict) and kept["changes"]:
        yield f"        {kept['reason']}; judged by {kept['reviewer']}"
        yield from (f"        {line}" for line in kept["changes"])


def _called(name: str) -> str:
    return name.replace("_", " ")


def _shown(value: object) -> str:
    if isinstance(value, list):
        return ", ".join(_shown(one) for one in value)
    if isinstance(value, dict):
        return " ".join(str(one) for one in value.values())
    return {True: "yes", False: "no"}.get(value, str(value)) if isinstance(value, bool) else str(value)


def withdraw(record_id: str, *, register_at: Place, reason: str, by: str, when: datetime) -> Revision:
    """Takes back the current revision; none is current then. Raises RefusedError if it isn't that."""
    with open_register(register_at) as register:
        return registered.withdraw(register, record_id, reason=reason, by=by, when=when)


def copies(document: str, *, register_at: Place) -> tuple[Copy, ...]:
    """All copies of a document. Raises InputError if the register doesn't know it."""
    with open_register(register_at, read_only=True) as register, register.reading() as view:
        _revision(view, document)
        return copies_of(view, document)


def copies_text(found: tuple[Copy, ...]) -> Iterator[str]:
    """One line a copy; those that are to be taken down say so."""
    if not found:
        yield "no copies"
    for one in found:
        hung = one.hung.said
        line = f"copy {hung.copy}  revision {one.revision.number}  {hung.where}  hung {hung.on} by {hung.by}"
        if one.down is not None:
            line += f"  taken down {one.down.said.on} by {one.down.said.by}"
        elif one.old:
            line += f"  TAKE DOWN: revision {one.revision.number} is no longer current"
        yield line


def hang(document: str, *, register_at: Place, where: str, by: str, on: date, when: datetime) -> str:
    """A numbered copy of the current revision hangs somewhere. ``on``: the day of it.

    Raises RefusedError if none is current.
    """
    with open_register(register_at) as register, register.writing() as writer:
        revision = current(revisions_in(writer, document)) if _revision(writer, document) else None
        if revision is None:
            raise RefusedError(
                Problem(
                    where=f"document {quoted(document)}",
                    what="None of its revisions is current.",
                    fix="Hang a copy once one is issued.",
                )
            )
        number = len(copies_of(writer, document)) + 1
        how = Telling(by=by, when=when, on=on, people=(by,))
        tell_of(writer, revision, CopyHung(copy=number, where=where, by=by, on=on), how)
    return f"copy {number} of revision {revision.number} hangs: {where}"


def take_down(document: str, number: int, *, register_at: Place, by: str, on: date, when: datetime) -> str:
    """A copy comes down; ``number`` is its own. ``on``: the day of it.

    Raises InputError if it doesn't hang.
    """
    with open_register(register_at) as register, register.writing() as writer:
        one = next((one for one in copies_of(writer, document) if one.hung.said.copy == number), None)
        if one is None or not one.hangs:
            raise InputError(
                Problem(
                    where=f"copy {number} of document {quoted(document)}",
                    what="It doesn't hang anywhere.",
                    fix="Look at the list: jamnut copies.",
                )
            )
        how = Telling(by=by, when=when, on=on, people=(by,))
        tell_of(writer, one.revision, CopyTakenDown(copy=number, by=by, on=on), how)
    return f"copy {number} is down"


def export(form: Literal["jsonl", "csv"], *, register_at: Place) -> Iterator[str]:
    """The register as JSON Lines or CSV, line by line."""
    with open_register(register_at, read_only=True) as register:
        yield from json_lines(register) if form == "jsonl" else csv_lines(register)


def backup(target: Path, *, register_at: Place) -> Anchor:
    """Writes the whole register into a new file, from which it can be restored; gives its last event.

    Raises InputError if something stands there or can't be written, and RefusedError if the chain doesn't
    hold: what is broken isn't kept as if it were whole.
    """
    if target.exists():
        raise InputError(
            Problem(where=str(target), what="It is there already.", fix="Name a file that isn't there yet.")
        )
    with open_register(register_at, read_only=True) as register, register.reading() as view:
        verdict = chain_in(view)
        if verdict.last is None or not verdict.holds:
            raise RefusedError(
                Problem(
                    where=f"event {verdict.broken_at} of the register",
                    what="The chain doesn't hold, so this is no state to go back to.",
                    fix="Keep a copy of the database as it is, and go back to an older backup.",
                )
            )
        aside = aside_of(target)
        try:
            with aside.open("w", encoding="utf-8", newline="") as file:
                file.writelines(lines_of(view))
            aside.replace(target)
        except OSError as error:
            with contextlib.suppress(OSError):
                aside.unlink(missing_ok=True)
            raise InputError(
                Problem(
                    where=str(target),
                    what=f"The backup can't be written: {error.strerror}.",
                    fix="Name a file in a folder that exists and that you may write to.",
                )
            ) from None
    return verdict.last


def restore(file: Path, *, register_at: Place, anchors: tuple[str, ...]) -> Anchor:
    """Makes a new register of a backup, in a file or in PostgreSQL, whichever the backup came from."""
    try:
        text = bytes_of(file).decode()
    except UnicodeDecodeError:
        raise InputError(
            Problem(
                where=str(file), what="It isn't text in UTF-8.", fix="Give a file that jamnut backup wrote."
            )
        ) from None
    *whole, rest = text.split("\n")  # and nowhere else: a file that was kept may hold other line ends
    lines = [f"{line}\n" for line in whole] + ([rest] if rest else [])
    return restore_lines(lines, register_at, anchors=[Anchor.read(one) for one in anchors])


def restored_text(anchor: Anchor, *, anchored: bool) -> Iterator[str]:
    """What was restored up to the ``anchor``, and what that doesn't show unless one was given."""
    yield f"{anchor.sequence} events, each as it was written"
    if not anchored:
        yield _NO_ANCHOR
    yield f"anchor to keep outside: {anchor}"


@dataclass(frozen=True, kw_only=True)
class RegisterCheck:
    """How far a register holds."""

    verdict: ChainVerdict

    @property
    def status(self) -> ExitStatus:
        return ExitStatus.GOOD if self.verdict.holds else ExitStatus.REFUSED


def check_register(register_at: Place, anchors: tuple[str, ...]) -> RegisterCheck:
    """Checks every event, and the anchors that were kept outside. Raises InputError."""
    with open_register(register_at, read_only=True) as register:
        return RegisterCheck(verdict=check_chain(register, *(Anchor.read(text) for text in anchors)))


def check_register_text(check: RegisterCheck) -> Iterator[str]:
    """What was found, and the anchor to keep."""
    verdict = check.verdict
    if verdict.broken is not None:
        yield f"broken at event {verdict.broken_at}: {verdict.broken.value}"
        yield "Nothing can be told from this register. Go back to a backup, and find out who did it."
        return
    yield f"whole: {verdict.last.sequence if verdict.last else 0} events, each as it was written"
    if not verdict.anchored:
        yield _NO_ANCHOR
    yield f"anchor to keep outside: {verdict.last}"


def migrate(register_at: Place, *, by: str, when: datetime) -> str:
    """Brings a register of an older format forward."""
    old, new = migrate_register(register_at, by=by, when=when)
    return f"format {new}" if old == new else f"format {new}, before {old}; no event was changed"


def _revision(view: View, document: str) -> Revision:
    """A revision of a document, any. Raises InputError if there is none."""
    known = revisions_in(view, document)
    if not known and (one := revision_in(view, as_printed(document))) is not None:
        return one
    if not known:
        raise InputError(
            Problem(
                where=f"document {quoted(document)}",
                what="The register doesn't know it.",
                fix="Write the document number as it stands on the sheets.",
            )
        )
    return known[-1]
