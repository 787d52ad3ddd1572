"""Between reserving and issuing: the next signature, of which the last one issues, or a rejection."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from pathlib import Path

from sheets.errors import InputError, Problem, RefusedError, quoted
from sheets.machine.files import aside_of, bytes_of, write_aside
from sheets.machine.loading import load_site
from sheets.pages.attached import attachments_in
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext
from sheets.pipeline.attaching import issue_in
from sheets.pipeline.issuing import (
    Issued,
    commit_pack,
    file_digest,
    put_in_place,
    signed_by,
    tell_signed,
)
from sheets.pipeline.persons import Named, Signing, check_trusted, named_by, trust_of
from sheets.pipeline.verifying import remade_with_content
from sheets.register import issuing as registered
from sheets.register.finding import revision_of
from sheets.register.opening import Place, open_register
from sheets.register.revisions import Revision, RevisionState, Signer
from sheets.register.store import Register
from sheets.seal.sign import signing_fields


def sign(
    file: Path,
    signing: Signing,
    *,
    site_file: Path,
    passphrase: Callable[[Path], str],
    register_at: Place,
    when: datetime,
) -> Issued:
    """Signs a pack for one more of the persons named on it; the last of them issues it.

    The file must be the one that the register knows, and is made again from what travels in it, so nobody
    signs what this engine doesn't make of that data. The site file says whom to trust. Where a signature was
    told to the register and something broke off then, the same command goes on from there.

    Raises RefusedError if it isn't this person's turn, InputError if the file isn't as it was made.
    """
    with open_register(register_at) as register:
        data = _taken_up(file, register)
        context = context_of(data)
        revision = revision_of(register, context.record_id)
        person = named_by(signing, passphrase, when)
        _check_named(context, person)
        last = revision.signatures[-1] if revision.signatures else None
        told = last is not None and last.meaning == person.meaning
        if not (told and revision.state is RevisionState.ISSUED):
            _check_open(revision)
        if not told:
            _check_unsigned(revision, person)
        _check_known(data, last.file_digest if last else "")
        made, said = remade_with_content(data)
        if told:  # and something broke off behind it
            signed = data
        else:
            signed = _signed(data, person, made, site_file, when)
            write_aside(file, signed)
            try:
                tell_signed(register, context.record_id, person, file_digest(signed), when=when)
            except BaseException:
                aside_of(file).unlink(missing_ok=True)
                raise
        waiting = tuple(name for name, field in signing_fields(signed).items() if not field.signed)
        if not waiting and revision.state is RevisionState.RESERVED:
            signers = tuple(Signer(meaning=meaning, name=name) for meaning, name in context.signers)
            commit_pack(register, context, made, signed, said, signers, when=when, ink=False)
        if signed is not data:
            put_in_place(file)
    return Issued(
        file=file,
        revision=context.revision,
        record_id=context.record_id,
        digest=said.digest,
        waiting=waiting,
    )


def reject(file: Path, *, register_at: Place, by: str, reason: str, when: datetime) -> Revision:
    """Ends an issue between its signatures, with a reason. Raises RefusedError once it is issued."""
    context = context_of(bytes_of(file))
    with open_register(register_at) as register:
        return registered.reject(register, context.record_id, reason=reason, by=by, when=when)


def context_of(data: bytes) -> IssueContext:
    """The issue that a pack carries. Raises InputError if it carries none."""
    issue = issue_in(attachments_in(data))
    if issue is None:
        raise InputError(
            Problem(
                where="file",
                what="It is no issued pack: it carries no issue.",
                fix="Give a file that jamnut issue wrote.",
            )
        )
    return issue


def _taken_up(file: Path, register: Register) -> bytes:
    """The file; or what the register was told of and didn't come into its place, which it gets now."""
    aside = aside_of(file)
    if not aside.is_file():
        return bytes_of(file)
    data = aside.read_bytes()
    try:
        revision = revision_of(register, context_of(data).record_id)
    except InputError:
        return bytes_of(file)  # left over from before the register was told
    if not revision.signatures or revision.signatures[-1].file_digest != file_digest(data):
        return bytes_of(file)
    put_in_place(file)
    return data


def _signed(data: bytes, person: Named, made: Matter, site_file: Path, when: datetime) -> bytes:
    trusting = load_site(site_file).site
    check_trusted([person], trust_of(trusting, site_file.parent))
    if made.site is None:
        raise InputError(
            Problem(where="file", what="It carries no site file.", fix="Issue it anew, with a site file.")
        )
    return signed_by(data, person, made.site, signing_fields(data), when=when)


def _check_named(context: IssueContext, person: Named) -> None:
    if (person.meaning, person.name) in context.signers:
        return
    expected = dict(context.signers).get(person.meaning, "nobody")
    raise RefusedError(
        Problem(
            where=f"signature {person.meaning}",
            what=f"The pack names {quoted(expected)} for it, not {quoted(person.name)}.",
            fix="Sign with the key of the person named, or reject the pack and issue it anew.",
        )
    )


def _check_open(revision: Revision) -> None:
    if revision.state is RevisionState.RESERVED:
        return
    why = f", for {quoted(revision.reason)}" if revision.reason else ""
    raise RefusedError(
        Problem(
            where=f"revision {revision.number} of document {quoted(revision.document)}",
            what=f"It is {revision.state.value}{why}; nobody signs it any more.",
            fix="Issue a new revision.",
        )
    )


def _check_unsigned(revision: Revision, person: Named) -> None:
    if person.meaning not in {one.meaning for one in revision.signatures}:
        return
    raise RefusedError(
        Problem(
            where=f"signature {person.meaning}",
            what=f"It is signed as {person.meaning} already, by {quoted(person.name)}.",
            fix="See with jamnut verify which signature comes next.",
        )
    )


def _check_known(data: bytes, known: str) -> None:
    if file_digest(data) == known:
        return
    raise RefusedError(
        Problem(
            where="file",
            what="It isn't the file that the register knows under this record: it was changed since it was "
            "signed last, or it is an older copy.",
            fix="Sign the file as the last signer left it, or reject it and issue it anew.",
        )
    )
