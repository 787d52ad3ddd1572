"""Who signs as what: opens the keys, and holds the persons against what the site asks for."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from sheets.errors import InputError, Problem, RefusedError, quoted
from sheets.machine.site import Site
from sheets.seal.sign import Signer as KeyHolder
from sheets.seal.sign import open_signer
from sheets.seal.signatures_people import Person, clash
from sheets.seal.signatures_report import Flaw
from sheets.seal.signatures_trust import check_signing_use, read_trust, vouching


@dataclass(frozen=True, kw_only=True)
class Signing:
    """One of the signatures: by key now, or by somebody named who signs later or in ink."""

    meaning: str
    name: str = ""
    """Of the person; taken from the certificate where a key is given."""
    key: Path | None = None


@dataclass(frozen=True, kw_only=True)
class Named:
    """A signing whose person is known by name, with the key open where one was given."""

    meaning: str
    name: str
    holder: KeyHolder | None = None

    @property
    def person(self) -> Person:
        """As far as is known: who has no key here yet shares it with nobody."""
        return self.holder.person if self.holder else Person(name=self.name, key=f"of {self.meaning}")


def named_by(one: Signing, passphrase: Callable[[Path], str], when: datetime) -> Named:
    """The signing with its person: from the certificate, where a key is given.

    ``when``: the certificate has to hold then. Raises InputError for a key that can't be opened, RefusedError
    for one that doesn't hold.
    """
    if one.key is None:
        return Named(meaning=one.meaning, name=" ".join(one.name.split()))
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
    holder = open_signer(data, passphrase(one.key), where=str(one.key), when=when)
    return Named(meaning=one.meaning, name=holder.person.name, holder=holder)


def check_people(site: Site, people: Sequence[Named], *, ink: bool) -> None:
    """Every signature that the site needs has a person, and nobody stands in two places. Raises RefusedError.

    ``ink``: signed on paper, without keys.
    """
    problems = [*_missing(site, people), *_clashes(people)]
    if not ink and people and people[0].holder is None:
        problems.append(
            Problem(
                where=f"signature {people[0].meaning}",
                what="The first signature needs a key now.",
                fix=f"Give --{people[0].meaning} KEY.p12, or issue for ink with --ink.",
            )
        )
    if problems:
        raise RefusedError(*problems)


def _missing(site: Site, people: Sequence[Named]) -> Iterator[Problem]:
    names = {one.meaning: one.name for one in people}
    for meaning in site.signatures.needed:
        if not names.get(meaning):
            yield Problem(
                where=f"signature {meaning}",
                what="Nobody is named for it, and the site needs it.",
                fix=f"Give --{meaning} with a key file, or with the name of who signs later.",
            )


def _clashes(people: Sequence[Named]) -> Iterator[Problem]:
    for index, one in enumerate(people):
        same = clash(one.meaning, one.person, ((other.meaning, other.person) for other in people[:index]))
        if same:
            yield Problem(
                where=f"signature {one.meaning}",
                what=same,
                fix="Whoever prepared a sheet neither checks nor approves it: name another person.",
            )


def check_trusted(people: Sequence[Named], trust: Sequence[str]) -> None:
    """The trust list of the site vouches for every key, or nobody could verify what it signs.

    Raises RefusedError.
    """
    trusted = read_trust(trust, where="trust list of the site")
    problems = []
    for one in people:
        if one.holder is None:
            continue
        try:
            vouching(one.holder.certificate, trusted)
            check_signing_use(one.holder.certificate)
        except Flaw as flaw:
            problems.append(
                Problem(
                    where=f"signature {one.meaning}",
                    what=flaw.reason.says,
                    fix="Sign with a key of the site's authority, and name its certificate in the site file, "
                    "under signatures, trust.",
                )
            )
    if problems:
        raise RefusedError(*problems)


def trust_of(site: Site | None, folder: Path) -> tuple[str, ...]:
    """Certificates of the authorities whose signers a site trusts, from the files that its site file names.

    ``folder`` is that of the site file. Raises InputError for a file that can't be read.
    """
    return _certificates(site.signatures.trust if site is not None else (), folder, "trust")


def time_trust_of(site: Site | None, folder: Path) -> tuple[str, ...]:
    """The same of the authorities behind its time server."""
    return _certificates(site.signatures.time_trust if site is not None else (), folder, "time trust")


def _certificates(names: Sequence[str], folder: Path, where: str) -> tuple[str, ...]:
    found = []
    for name in names:
        try:
            found.append((folder / name).read_text(encoding="ascii"))
        except (OSError, UnicodeDecodeError):
            raise InputError(
                Problem(
                    where=f"site file, signatures, {where}",
                    what=f"The certificate {quoted(name)} can't be read.",
                    fix="Name a PEM file beside the site file.",
                )
            ) from None
    return tuple(found)
