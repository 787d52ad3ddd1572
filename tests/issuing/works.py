"""A works to try things at: its files, its persons, and the verbs with what they mostly get."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from itertools import count
from pathlib import Path

from sheets import pipeline
from sheets.pages.compose.matter import Matter
from sheets.pages.document import Layout
from sheets.pipeline.demonstrating import PASSPHRASE, PERSONS
from sheets.pipeline.issuing import Issued
from sheets.pipeline.persons import Signing
from sheets.pipeline.verifying import Verification
from sheets.register.chain import check_chain
from sheets.register.finding import document_revisions
from sheets.register.opening import open_register
from sheets.register.revisions import Revision

WHEN = datetime(2026, 12, 1, 9, 30, tzinfo=UTC)
LATER = WHEN + timedelta(hours=1)
ADA, BRAM, CLEO = PERSONS
MEANINGS = ("prepared", "checked", "approved")
KEYS = dict(zip(MEANINGS, ("ada-quarrow", "bram-tolliver", "cleo-harnett"), strict=True))
DOCUMENT = "WI-0139"


@dataclass
class Chance:
    """Bytes that differ from call to call, the same in every run."""

    seed: int
    calls: count[int] = field(default_factory=count)

    def __call__(self, length: int) -> bytes:
        return bytes([self.seed, next(self.calls)]) + bytes(range(length - 2))


def passphrase(_: Path) -> str:
    return PASSPHRASE


@dataclass(frozen=True)
class Works:
    """A folder as `jamnut demo` makes it."""

    folder: Path

    @property
    def machine(self) -> Path:
        return self.folder / "kiln_pusher.yaml"

    @property
    def site(self) -> Path:
        return self.folder / "site.yaml"

    @property
    def register(self) -> Path:
        return self.folder / "register.db"

    @property
    def pack(self) -> Path:
        return self.folder / "PU-03.pdf"

    def key(self, name: str) -> Path:
        return self.folder / "keys" / f"{name}.p12"

    def signing(self, meaning: str, who: str | None) -> Signing:
        """By the key of the person who mostly does it; by another key's name, or a person's name."""
        if who is None or self.key(who).exists():
            return Signing(meaning=meaning, key=self.key(who or KEYS[meaning]))
        return Signing(meaning=meaning, name=who)

    def issue(self, matter: Matter, target: Path | None = None, **other: object) -> Issued:
        """By three keys, unless said otherwise; ``None`` names nobody.

        Without a target the pack that stands there is put away before, and back if nothing comes of it.
        """
        people = {meaning: other.pop(meaning, KEYS[meaning]) for meaning in MEANINGS}
        given: dict[str, object] = {
            "signings": [self.signing(meaning, who) for meaning, who in people.items() if who],  # type: ignore[arg-type]  # names
            "passphrase": passphrase,
            "register_at": self.register,
            "site_folder": self.folder,
            "when": LATER,
            "random_bytes": Chance(2),
            "layout": Layout(),
            "reason": "a name was wrong",
            **other,
        }
        if target is None and self.pack.exists():
            self.pack.rename(self._put_away)
        try:
            return pipeline.issue(matter, target or self.pack, **given)
        finally:
            self.take_back()

    @property
    def _put_away(self) -> Path:
        return self.pack.with_suffix(".put-away")

    def take_back(self) -> None:
        """The pack that was put away for another stands in its place again, unless the other came."""
        if self._put_away.exists() and not self.pack.exists():
            self._put_away.rename(self.pack)
        self._put_away.unlink(missing_ok=True)

    def sign(self, meaning: str, who: str | None = None, **other: object) -> Issued:
        given: dict[str, object] = {
            "site_file": self.site,
            "passphrase": passphrase,
            "register_at": self.register,
            "when": LATER + timedelta(minutes=5 * MEANINGS.index(meaning)),
            **other,
        }
        return pipeline.sign(self.pack, self.signing(meaning, who), **given)

    def verify(self, file: Path | None = None, **other: object) -> Verification:
        given: dict[str, object] = {
            "site_file": self.site,
            "register_at": self.register,
            "now": LATER + timedelta(days=1),
            **other,
        }
        return pipeline.verify(file or self.pack, **given)

    def revisions(self) -> tuple[Revision, ...]:
        """Those of the register, which has to hold."""
        with open_register(self.register, read_only=True) as register:
            assert check_chain(register).holds
            return document_revisions(register, DOCUMENT)

    def files(self) -> dict[str, bytes]:
        """All that stands in the folder, but for the keys."""
        return {path.name: path.read_bytes() for path in self.folder.iterdir() if path.is_file()}


def words(one: Verification) -> tuple[str, str, str]:
    return (one.signatures.judgement.value, one.content.judgement.value, one.currency.judgement.value)


def told(one: Verification) -> str:
    return "\n".join(pipeline.verify_text(one))
