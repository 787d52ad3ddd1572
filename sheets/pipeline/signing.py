"""Adds the next signature to an issued pack; the last one commits it."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from pathlib import Path

from sheets.errors import InputError, Problem, RefusedError, quoted
from sheets.machine.files import write_pdf
from sheets.machine.loading import load_site
from sheets.pipeline.issuing import (
    Issued,
    Signing,
    commit_pack,
    context_of,
    named_by,
    signed_by,
    waiting_in,
)
from sheets.pipeline.verifying import remade_with_digest
from sheets.register.revisions import Signer
from sheets.register.store import open_register


def sign_pack(
    file: Path,
    signing: Signing,
    *,
    site_file: Path,
    passphrase: Callable[[Path], str],
    register_file: Path,
    when: datetime,
) -> Issued:
    """Signs a pack for one more of the persons named on it.

    The pack is made again from what travels in it first, so nobody signs what this engine doesn't make of
    that data. Raises RefusedError if it isn't this person's turn, InputError if it isn't as it was made.
    """
    try:
        data = file.read_bytes()
    except OSError as error:
        raise InputError(
            Problem(
                where=str(file),
                what=f"The file can't be read: {error.strerror}.",
                fix="Look at the name of the file and whether you may read it.",
            )
        ) from None
    context = context_of(data)
    named = named_by(signing, passphrase, when)
    if (named.meaning, named.name) not in context.signers:
        expected = dict(context.signers).get(named.meaning, "nobody")
        raise RefusedError(
            Problem(
                where=f"signature {named.meaning}",
                what=f"The pack names {quoted(expected)} for it, not {quoted(named.name)}.",
                fix="Sign with the key of the person named, or reject the pack and issue it anew.",
            )
        )
    made, printed = remade_with_digest(data)
    with open_register(register_file) as register:
        site = load_site(site_file).site
        signed = signed_by(data, named, passphrase, site, register, context.record_id, when=when)
        waiting = waiting_in(signed)
        write_pdf(file, signed)
        if not waiting:
            signers = tuple(Signer(meaning=meaning, name=name) for meaning, name in context.signers)
            commit_pack(register, context.record_id, made, signed, printed, signers, when=when, ink=False)
    return Issued(
        file=file,
        revision=context.revision,
        record_id=context.record_id,
        digest=printed,
        waiting=waiting,
    )
