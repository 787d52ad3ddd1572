"""Issues a pack: reserve, print, sign, write aside, tell the register, move into place.

What breaks off before the register has the issue leaves a void revision and no file. What breaks off after
that leaves the file aside, where signing takes it up again.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import datetime
from pathlib import Path
from typing import Final
from zoneinfo import ZoneInfo

from sheets import ENGINE
from sheets.errors import InputError, JamnutError, Problem, RefusedError, quoted
from sheets.machine.files import aside_of, check_pdf_target, check_writable, move_aside, write_aside
from sheets.machine.site import Site
from sheets.pages.archive import archive_flaws
from sheets.pages.attached import attachments_in
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout
from sheets.pages.stamp import stamp_pdf
from sheets.pipeline.attaching import JOB_NAME, layout_of
from sheets.pipeline.changing import changes_since, hold_changed, hold_reason
from sheets.pipeline.computing import issuable
from sheets.pipeline.keeping import kept_of
from sheets.pipeline.persons import Named, Signing, check_people, check_trusted, named_by, trust_of
from sheets.pipeline.printing import Content, printed, whole_content
from sheets.pipeline.replacing import keep_issued
from sheets.pipeline.zones import zone_of
from sheets.register.finding import document_revisions, revision_of
from sheets.register.issuing import Reservation, commit, reserve, sign_event, void
from sheets.register.opening import Place, create_register, is_there, open_register
from sheets.register.revisions import Revision, RevisionState, Signer, current
from sheets.register.store import Register
from sheets.seal.canonical import canonical_bytes, digest
from sheets.seal.sign import SigningField, sign_field, signing_fields

ISSUED: Final = "issued"


@dataclass(frozen=True, kw_only=True)
class Issued:
    """What came of it."""

    file: Path
    revision: str
    record_id: str
    digest: str
    waiting: tuple[str, ...]
    """Signatures that are still to come; none: it is issued."""


def issue(
    matter: Matter,
    target: Path,
    *,
    signings: Sequence[Signing],
    passphrase: Callable[[Path], str],
    register_at: Place,
    site_folder: Path,
    when: datetime,
    random_bytes: Callable[[int], bytes],
    layout: Layout,
    ink: bool = False,
    reason: str = "",
    reviewer: str = "",
) -> Issued:
    """Issues the pack of a job, or begins to: with keys for some signatures, the others come by `sign`.

    ``site_folder`` is that of the site file, from where its trust list is read. ``reason``: why it takes the
    place of the current revision, if there is one; ``reviewer``: who judged what changed, without one who
    checks it, or else approves it. Raises InputError and RefusedError with everything that stands against
    it, before a revision is reserved.
    """
    said = whole_content(matter)  # a job that doesn't hold says why
    against = issuable(matter)
    if against:
        raise RefusedError(*against)
    site = _site(matter)
    zone = zone_of(site)
    check_pdf_target(target)
    people = [named_by(one, passphrase, when) for one in signings]
    check_people(site, people, ink=ink)
    if not ink:
        check_trusted(people, trust_of(site, site_folder))
    keep_issued(target)
    check_writable(target)
    by = people[0].name
    with _register(register_at, by, when) as register:
        before = current(document_revisions(register, matter.machine.document))
        hold_changed(before, said.digest)
        hold_reason(before, reason)
        changes = _changes(before, matter, said.data)
        reservation = reserve(
            register,
            document=matter.machine.document,
            machine=matter.machine.tag,
            by=by,
            when=when,
            random_bytes=random_bytes,
        )
        record_id = reservation.record_id
        try:
            _hold_before(before, reservation)
            context = replace(
                _context(site, zone, reservation, people, when),
                changes=changes,
                reason=reason,
                reviewer=(reviewer or _reviewer(people)) if changes else "",
            )
            data = printed(said, matter, layout, context, fillable=not ink)
            hold_archive_form(data)
            fields = {} if ink else signing_fields(data)
            signed: dict[str, tuple[Named, str]] = {}
            for one in people:
                if one.holder is None or ink:
                    break  # signatures follow in their order
                data = signed_by(data, one, site, fields, when=when)
                signed[one.meaning] = one, file_digest(data)
            waiting = tuple(name for name in fields if name not in signed)
            write_aside(target, data)
            for one, made in signed.values():
                tell_signed(register, record_id, one, made, when=when)
            if not waiting:
                signers = tuple(Signer(meaning=one.meaning, name=one.name) for one in people)
                commit_pack(register, context, matter, data, said, signers, when=when, ink=ink)
        except BaseException as error:
            state = break_off(register, record_id, target, error, by=by, when=when)
            error.add_note(
                f"revision {reservation.number} of {matter.machine.document} was given out, and is {state}; "
                "its number isn't used again"
            )
            raise
        put_in_place(target)
    return Issued(
        file=target,
        revision=context.revision,
        record_id=record_id,
        digest=said.digest,
        waiting=waiting,
    )


def issued_text(issued: Issued) -> Iterator[str]:
    """What came of an issue or a signature."""
    yield f"{issued.file}: revision {issued.revision}, record {issued.record_id}, content {issued.digest}"
    if issued.waiting:
        yield f"not issued yet; still to sign: {', '.join(issued.waiting)}"
    else:
        yield "issued"


def _context(
    site: Site, zone: ZoneInfo, reservation: Reservation, people: Sequence[Named], when: datetime
) -> IssueContext:
    note = site.signatures.note
    return IssueContext(
        record_id=reservation.record_id,
        record_address=str(site.record_address),
        revision=str(reservation.number),
        state=note or ISSUED,
        mark=note.split(",")[0].upper(),
        date=when.astimezone(zone).date().isoformat(),
        zone=site.zone,
        signers=tuple((one.meaning, one.name) for one in people),
    )


def hold_archive_form(data: bytes) -> None:
    """Nothing is signed that isn't in archive form (ISO 19005-3, 3b). Raises RefusedError with every flaw."""
    flaws = archive_flaws(data)
    if flaws:
        raise RefusedError(
            *(
                Problem(where="archive form", what=flaw, fix="This is an error of the pages: report it.")
                for flaw in flaws
            )
        )


def break_off(
    register: Register, record_id: str, target: Path, error: BaseException, *, by: str, when: datetime
) -> str:
    """Ends a revision that can't be finished, with the reason, takes its file away, and says how it stands.

    One that the register has as issued stays, and so does its file: it broke off too late to undo.
    """
    state = "not ended in the register yet"
    with contextlib.suppress(JamnutError):  # what can't be made void now, the next issue makes void
        void(register, record_id, reason=_reason(error), by=by, when=when)
    with contextlib.suppress(JamnutError):
        now = revision_of(register, record_id).state
        state = now.value
        if now is RevisionState.ISSUED:
            return f"issued, as {aside_of(target)}"
    aside_of(target).unlink(missing_ok=True)
    return state


def _reason(error: BaseException) -> str:
    if isinstance(error, JamnutError) and error.problems:
        return f"broken off: {error.problems[0].where}: {quoted(error.problems[0].what)}"
    return f"broken off by {type(error).__name__}"


def put_in_place(target: Path) -> None:
    """Moves what the register knows into place. Raises InputError that says where it stands if it can't."""
    move_aside(
        target,
        fix=f"The register has it already, and it stands as {aside_of(target)}: jamnut sign goes on from "
        "there, once the file can be written.",
    )


def file_digest(data: bytes) -> str:
    """SHA-256 of a file, in hexadecimal, as the register keeps it."""
    return hashlib.sha256(data).hexdigest()


@dataclass(frozen=True, kw_only=True)
class Shaping:
    """Everything that shaped the content, for its digest: input files, engine, language."""

    machine: str
    site: str
    engine: str
    language: str


def machine_digest(matter: Matter) -> str:
    """Digest of everything that shaped the content."""
    sources = matter.sources
    shaping = Shaping(
        machine=file_digest(sources.machine),
        site=file_digest(sources.site) if sources.site is not None else "",
        engine=matter.engine,
        language=matter.machine.language,
    )
    return digest(canonical_bytes(shaping))


def signed_by(
    data: bytes, one: Named, site: Site, fields: Mapping[str, SigningField], *, when: datetime
) -> bytes:
    """The file with one signature more; ``fields`` are those of the file. Raises as `sign_field` does."""
    if one.holder is None:
        raise ValueError(f"{one.meaning}: no key was given")
    local = when.astimezone(zone_of(site))
    field = fields.get(one.meaning)
    if field is None:
        raise InputError(
            Problem(
                where=f"signature {one.meaning}",
                what="The pack has no field for it.",
                fix="Sign a pack that was issued for signatures by key.",
            )
        )
    stamp = stamp_pdf(
        meaning=one.meaning,
        name=one.name,
        when=local,
        zone=site.zone,
        width=field.width,
        height=field.height,
    )
    return sign_field(
        data,
        field=one.meaning,
        signer=one.holder,
        when=local,
        stamp=stamp,
        needed=site.signatures.needed,
        time_server=site.signatures.time_server,
    )


def tell_signed(register: Register, record_id: str, one: Named, made: str, *, when: datetime) -> Revision:
    """The register hears of a signature; ``made`` is the digest of the file with it as its last."""
    return sign_event(register, record_id, who=one.name, meaning=one.meaning, file_digest=made, when=when)


def commit_pack(
    register: Register,
    context: IssueContext,
    matter: Matter,
    data: bytes,
    said: Content,
    signers: tuple[Signer, ...],
    *,
    when: datetime,
    ink: bool,
) -> None:
    """The register has it as issued from here on, and keeps what it was made from and what it says."""
    layout = layout_of(json.loads(attachments_in(data)[JOB_NAME]))
    commit(
        register,
        context.record_id,
        content_digest=said.digest,
        file_digest=file_digest(data),
        machine_digest=machine_digest(matter),
        engine=ENGINE,
        signers=signers,
        by=signers[-1].name,
        when=when,
        ink=ink,
        kept=kept_of(
            matter,
            layout,
            said.data,
            changes=context.changes,
            reason=context.reason,
            reviewer=context.reviewer,
        ),
    )


def _changes(before: Revision | None, matter: Matter, content: bytes) -> tuple[str, ...]:
    if before is None or before.issue is None:
        return ()
    if before.issue.kept is None:
        return ("not known: the register kept nothing of the revision before",)
    return changes_since(before.issue.kept, matter, content)


def _reviewer(people: Sequence[Named]) -> str:
    by_meaning = {one.meaning: one.name for one in people}
    return by_meaning.get("checked") or by_meaning.get("approved") or people[-1].name


def _hold_before(before: Revision | None, reservation: Reservation) -> None:
    """The list of changes is against the current revision. Raises RefusedError if another came meanwhile."""
    if (before and before.record_id) == (reservation.before and reservation.before.record_id):
        return
    raise RefusedError(
        Problem(
            where=f"document {quoted(reservation.document)}",
            what="Another program issued a revision meanwhile.",
            fix="Issue again: the list of what changed is then against that one.",
        )
    )


def _site(matter: Matter) -> Site:
    site = matter.site
    if site is None or site.record_address is None:
        raise InputError(
            Problem(
                where="site file",
                what="An issued pack carries a code with the record address, and none is given.",
                fix="Write record address into the site file, and name it with --site.",
            )
        )
    return site


def _register(at: Place, by: str, when: datetime) -> Register:
    return open_register(at) if is_there(at) else create_register(at, by=by, when=when)
