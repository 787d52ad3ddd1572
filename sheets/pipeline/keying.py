"""Makes the keys of a works: its own authority, and one for each person who signs."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from pathlib import Path
from typing import Final

from sheets.errors import InputError, Problem, quoted
from sheets.machine.files import move_into_place
from sheets.seal.keys import (
    SERIAL_BYTES,
    KeyFile,
    OpenKey,
    Validity,
    make_authority,
    make_signer,
    open_key,
    serial_from,
)

AUTHORITY: Final = "authority"
AUTHORITY_YEARS: Final = 10
SIGNER_YEARS: Final = 3
"""Policy: how long certificates hold."""
_FIX: Final = "Name a folder that exists and that you may write to."


@dataclass(frozen=True, kw_only=True)
class KeyRing:
    """Files that were written."""

    authority: Path
    certificate: Path
    """What the site file trusts."""
    signers: tuple[Path, ...]


def keys(
    folder: Path,
    *,
    authority_name: str,
    persons: Sequence[str],
    passphrase: Callable[[Path], str],
    when: datetime,
    random_bytes: Callable[[int], bytes],
) -> KeyRing:
    """Writes the authority of a works, unless the folder has one, and a key file for each person.

    Each file is locked with its own passphrase; an authority that is there is opened with its.
    Existing key files are never overwritten. Raises InputError.
    """
    if not folder.is_dir():
        raise InputError(
            Problem(
                where=str(folder),
                what="There is no such folder.",
                fix="Make the folder first, where not everyone may read; keys are not for everyone.",
            )
        )
    targets = [folder / f"{_file_name(person)}.p12" for person in persons]
    taken = [target for target in targets if target.exists()]
    if taken or len(set(targets)) < len(targets):
        raise InputError(
            Problem(
                where=str(taken[0] if taken else folder),
                what="A key file of that name is there already."
                if taken
                else "Two persons share a file name.",
                fix="A key is never overwritten: take the old file away, or name the person more fully.",
            )
        )
    authority_file, certificate = folder / f"{AUTHORITY}.p12", folder / f"{AUTHORITY}.pem"
    if authority_file.exists():
        opened = open_key(authority_file.read_bytes(), passphrase(authority_file), where=str(authority_file))
    else:
        validity = Validity(start=when, end=when + timedelta(days=365 * AUTHORITY_YEARS))
        chosen = passphrase(authority_file)
        made = make_authority(
            authority_name,
            validity=validity,
            serial=serial_from(random_bytes(SERIAL_BYTES)),
            passphrase=chosen,
        )
        move_into_place(authority_file, made.p12, fix=_FIX, private=True)
        move_into_place(certificate, made.certificate_pem.encode(), fix=_FIX)
        opened = open_key(made.p12, chosen)
    for person, target in zip(persons, targets, strict=True):
        signer = _signer(opened, person, passphrase(target), when, random_bytes)
        move_into_place(target, signer.p12, fix=_FIX, private=True)
    return KeyRing(authority=authority_file, certificate=certificate, signers=tuple(targets))


def _signer(
    authority: OpenKey, person: str, passphrase: str, when: datetime, random_bytes: Callable[[int], bytes]
) -> KeyFile:
    end = min(when + timedelta(days=365 * SIGNER_YEARS), authority.certificate.not_valid_after_utc)
    return make_signer(
        authority,
        person,
        validity=Validity(start=when, end=end),
        serial=serial_from(random_bytes(SERIAL_BYTES)),
        passphrase=passphrase,
    )


def _file_name(person: str) -> str:
    """Letters and digits of a name, in lower case, joined by hyphens."""
    words = "".join(sign if sign.isalnum() else " " for sign in person.lower()).split()
    if not words:
        raise InputError(
            Problem(
                where="name of a person",
                what="It has no letter.",
                fix="Write the name as it is to stand on the sheets.",
            )
        )
    if words == [AUTHORITY]:
        raise InputError(
            Problem(
                where=f"name {quoted(person)}",
                what="The key file of the authority has that name.",
                fix="Name the person more fully.",
            )
        )
    return "-".join(words)
