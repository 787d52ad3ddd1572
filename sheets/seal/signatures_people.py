"""Who signs as what: the roles that a works asks for, and that nobody stands in two of them."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable
from dataclasses import dataclass

from cryptography import x509
from cryptography.hazmat.primitives.serialization import Encoding, PublicFormat

from sheets.errors import InputError, Problem
from sheets.names import same_person
from sheets.seal.keys import common_name
from sheets.seal.signatures_report import ALWAYS_NEEDED, ROLES


@dataclass(frozen=True, kw_only=True)
class Person:
    """A signer as the certificate tells: by name and by key."""

    name: str
    key: str
    """SHA-256 of the public key in hexadecimal."""

    def same_as(self, other: Person) -> bool:
        """One key, or one name whatever its spaces and capitals: either means one person."""
        return self.key == other.key or same_person(self.name, other.name)


def person_of(certificate: x509.Certificate) -> Person:
    """The person that a certificate names."""
    public = certificate.public_key().public_bytes(Encoding.DER, PublicFormat.SubjectPublicKeyInfo)
    return Person(name=common_name(certificate), key=hashlib.sha256(public).hexdigest())


def check_needed(needed: tuple[str, ...]) -> None:
    """The signatures that a works asks for: in order, prepared and approved among them. Raises InputError."""
    if tuple(role for role in ROLES if role in needed) != needed or not set(needed) >= ALWAYS_NEEDED:
        raise InputError(
            Problem(
                where="signatures that the works needs",
                what=f"{', '.join(needed) or 'none'} won't do: two persons are needed at least",
                fix=f"Name {' and '.join(sorted(ALWAYS_NEEDED, key=ROLES.index))}, or all three in the order "
                f"{', '.join(ROLES)}.",
            )
        )


def clash(role: str, person: Person, before: Iterable[tuple[str, Person]]) -> str:
    """What to say if the person signed in another role before; else nothing."""
    for other_role, other in before:
        if person.same_as(other):
            by = "name" if same_person(person.name, other.name) else "key"
            return f"{person.name} signed as {other_role} and as {role}: one person by {by}, in two roles."
    return ""
