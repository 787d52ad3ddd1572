"""Issues a pack: reserve, print, sign, write, commit. What breaks off leaves a void revision and no file."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Final
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

from sheets import ENGINE
from sheets.errors import InputError, Problem, RefusedError, quoted
from sheets.machine.files import write_pdf
from sheets.machine.site import Site
from sheets.pages.attached import attachments_in
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout
from sheets.pages.stamp import stamp_pdf
from sheets.pipeline.attaching import ISSUE_NAME, issue_of
from sheets.pipeline.computing import issuable
from sheets.pipeline.printing import pack, whole_content
from sheets.register.issuing import commit, reject, reserve, sign_event, void
from sheets.register.revisions import Revision, Signer
from sheets.register.store import Register, create_register, open_register
from sheets.seal.canonical import canonical_bytes, digest
from sheets.seal.sign import open_signer, sign_field, signing_fields

ISSUED: Final = "issued"


@dataclass(frozen=True, kw_only=True)
class Signing:
    """One of the signatures: by key now, or by somebody named who signs later or in ink."""

    meaning: str
    name: str = ""
    """Of the person; taken from the certificate where a key is given."""
    key: Path | None = None


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
    register_file: Path,
    when: datetime,
    random_bytes: Callable[[int], bytes],
    layout: Layout,
    ink: bool = False,
) -> Issued:
    """Issues the pack of a job, or begins to: with keys for some signatures, the others come by `sign_pack`.

    Raises RefusedError with everything that stands against it, before a revision is reserved.
    """
    against = issuable(matter)
    if against:
        raise RefusedError(*against)
    site = _site(matter)
    named = [named_by(one, passphrase, when) for one in signings]
    _check_people(site, named, ink=ink)
    said = whole_content(matter)
    by = named[0].name
    with _register(register_file, by, when) as register:
        reservation = reserve(
            register,
            document=matter.machine.document,
            machine=matter.machine.tag,
            by=by,
            when=when,
            random_bytes=random_bytes,
        )
        local = when.astimezone(_zone(site))
        context = IssueContext(
            record_id=reservation.record_id,
            record_address=str(site.record_address),
            revision=str(reservation.number),
            state=site.signatures.note or ISSUED,
            mark=site.signatures.note.split(",")[0].upper(),
            date=local.date().isoformat(),
            zone=site.zone,
            signers=tuple((one.meaning, one.name) for one in named),
        )
        try:
            data = pack(matter, layout, context, fillable=not ink)
            for one in named:
                if one.key is None or ink:
                    break  # signatures follow in their order
                data = signed_by(data, one, passphrase, site, register, reservation.record_id, when=when)
            write_pdf(target, data)
            waiting = () if ink else waiting_in(data)
            if not waiting:
                commit_pack(
                    register,
                    reservation.record_id,
                    matter,
                    data,
                    said.digest,
                    tuple(Signer(meaning=one.meaning, name=one.name) for one in named),
                    when=when,
                    ink=ink,
                )
        except BaseException:  # whatever breaks it off, an issue that isn't finished leaves no file behind
            target.unlink(missing_ok=True)
            void(register, reservation.record_id, reason="broken off", by=by, when=when)
            raise
    return Issued(
        file=target,
        revision=context.revision,
        record_id=context.record_id,
        digest=said.digest,
        waiting=waiting,
    )


def issued_text(issued: Issued) -> Iterator[str]:
    """What came of an issue or a signature."""
    yield (f"{issued.file}: revision {issued.revision}, record {issued.record_id}, content {issued.digest}")
    if issued.waiting:
        yield f"not issued yet; still to sign: {', '.join(issued.waiting)}"
    else:
        yield "issued"


def reject_issue(file: Path, *, register_file: Path, by: str, reason: str, when: datetime) -> Revision:
    """Ends an issue between its signatures, with a reason. Raises RefusedError once it is issued."""
    context = context_of(file.read_bytes())
    with open_register(register_file) as register:
        return reject(register, context.record_id, reason=reason, by=by, when=when)


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


def waiting_in(data: bytes) -> tuple[str, ...]:
    """Signature fields of a pack that are still empty, in the order in which they are signed."""
    return tuple(name for name, field in signing_fields(data).items() if not field.signed)


def context_of(data: bytes) -> IssueContext:
    held = attachments_in(data).get(ISSUE_NAME)
    if held is None:
        raise InputError(
            Problem(
                where="file",
                what="It is no issued pack: it carries no issue.",
                fix="Give a file that jamnut issue wrote.",
            )
        )
    return issue_of(json.loads(held))


def signed_by(
    data: bytes,
    one: Signing,
    passphrase: Callable[[Path], str],
    site: Site,
    register: Register,
    record_id: str,
    *,
    when: datetime,
) -> bytes:
    """The file with one signature more, and the register told of it."""
    if one.key is None:
        raise ValueError(f"{one.meaning}: no key was given")
    local = when.astimezone(_zone(site))
    signer = open_signer(one.key.read_bytes(), passphrase(one.key), where=str(one.key), when=when)
    field = signing_fields(data)[one.meaning]
    stamp = stamp_pdf(
        meaning=one.meaning,
        name=one.name,
        when=local,
        zone=site.zone,
        width=field.width,
        height=field.height,
    )
    signed = sign_field(
        data,
        field=one.meaning,
        signer=signer,
        when=local,
        stamp=stamp,
        needed=site.signatures.needed,
        time_server=site.signatures.time_server,
    )
    sign_event(
        register, record_id, who=one.name, meaning=one.meaning, file_digest=file_digest(signed), when=when
    )
    return signed


def commit_pack(
    register: Register,
    record_id: str,
    matter: Matter,
    data: bytes,
    printed: str,
    signers: tuple[Signer, ...],
    *,
    when: datetime,
    ink: bool,
) -> None:
    commit(
        register,
        record_id,
        content_digest=printed,
        file_digest=file_digest(data),
        machine_digest=machine_digest(matter),
        engine=ENGINE,
        signers=signers,
        by=signers[-1].name,
        when=when,
        ink=ink,
    )


def named_by(one: Signing, passphrase: Callable[[Path], str], when: datetime) -> Signing:
    """The signing with the name from its certificate, where a key is given."""
    if one.key is None:
        return one
    try:
        data = one.key.read_bytes()
    except OSError as error:
        raise InputError(
            Problem(
                where=str(one.key),
                what=f"The key file can't be read: {error.strerror}.",
                fix="Look at the name of the file and whether you may read it.",
            )
        ) from None
    signer = open_signer(data, passphrase(one.key), where=str(one.key), when=when)
    return Signing(meaning=one.meaning, name=signer.person.name, key=one.key)


def _check_people(site: Site, named: Sequence[Signing], *, ink: bool) -> None:
    """Every signature that the site needs has a person, and no two that must differ are one."""
    problems: list[Problem] = []
    names = {one.meaning: one.name for one in named}
    for meaning in site.signatures.needed:
        if not names.get(meaning):
            problems.append(
                Problem(
                    where=f"signature {meaning}",
                    what="Nobody is named for it, and the site needs it.",
                    fix=f"Give --{meaning} with a key file, or with the name of who signs later.",
                )
            )
    folded = {meaning: " ".join(name.split()).casefold() for meaning, name in names.items() if name}
    if folded.get("prepared") and folded["prepared"] in (folded.get("approved"), folded.get("checked")):
        problems.append(
            Problem(
                where="signatures",
                what=f"{names['prepared']} would sign twice.",
                fix="Whoever prepared a sheet neither checks nor approves it: name another person.",
            )
        )
    if not ink and named and named[0].key is None:
        problems.append(
            Problem(
                where=f"signature {named[0].meaning}",
                what="The first signature needs a key now.",
                fix=f"Give --{named[0].meaning} KEY.p12, or issue for ink with --ink.",
            )
        )
    if problems:
        raise RefusedError(*problems)


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
    _zone(site)
    return site


def _zone(site: Site) -> ZoneInfo:
    try:
        return ZoneInfo(site.zone)
    except (ZoneInfoNotFoundError, ValueError):
        raise InputError(
            Problem(
                where="site file, zone",
                what=f"The time zone {quoted(site.zone)} isn't known.",
                fix="Write an IANA name, such as Europe/Lisbon, or UTC.",
            )
        ) from None


def _register(file: Path, by: str, when: datetime) -> Register:
    return open_register(file) if file.exists() else create_register(file, by=by, when=when)
