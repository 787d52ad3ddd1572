"""A works with a record page: its register, its pages as a caller gets them, and a clock that stands."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from pathlib import Path
from random import Random

import httpx2
from starlette.testclient import TestClient

from sheets import pipeline
from sheets.desk.app import create
from sheets.register import issuing
from sheets.register.opening import create_register, open_register
from sheets.register.revisions import Revision, Signer

NOON = datetime(2031, 3, 4, 12, tzinfo=UTC)
SIGNERS = (Signer(meaning="prepared", name="Ines Kurz"), Signer(meaning="approved", name="Olaf Brenner"))
SITE = """\
format: 1
plant: Brackwater Tileworks
record address: http://records.brackwater.example
planner telephone: extension 417
emergency telephone: extension 333
"""
ADDRESS = "http://records.brackwater.example"
ALPHABET = "0123456789ABCDEFGHJKMNPQRSTVWXYZ"


@dataclass
class Clock:
    """Stands still until it is moved."""

    at: datetime = NOON

    def __call__(self) -> datetime:
        return self.at

    def move(self, **by: float) -> None:
        self.at += timedelta(**by)


@dataclass
class Bench:
    """Folder, register and clock of one test."""

    folder: Path
    clock: Clock = field(default_factory=Clock)
    random: Random = field(default_factory=lambda: Random(11))

    def __post_init__(self) -> None:
        (self.folder / "packs").mkdir(parents=True)
        self.site.write_text(SITE, encoding="utf-8")
        create_register(self.register, by="Ines Kurz", when=NOON).close()

    @property
    def register(self) -> Path:
        return self.folder / "plant.register"

    @property
    def users(self) -> Path:
        return self.folder / "users.json"

    @property
    def site(self) -> Path:
        return self.folder / "site.yaml"

    def settings(self, **other: object) -> pipeline.DeskSettings:
        given: dict[str, object] = {
            "register_at": self.register,
            "site_file": self.site,
            "files": self.folder / "packs",
            **other,
        }
        return pipeline.DeskSettings(**given)  # type: ignore[arg-type]  # names of its fields

    def client(self, *, loud: bool = False, **other: object) -> TestClient:
        return TestClient(
            create(self.settings(**other), now=self.clock),
            base_url=ADDRESS,
            raise_server_exceptions=loud,
            follow_redirects=False,
        )

    def reserve(self, document: str = "WI-204", machine: str = "KP-2") -> str:
        with open_register(self.register) as register:
            return issuing.reserve(
                register,
                document=document,
                machine=machine,
                by="Ines Kurz",
                when=self.clock(),
                random_bytes=self.random.randbytes,
            ).record_id

    def issue(
        self, document: str = "WI-204", machine: str = "KP-2", *, data: bytes = b"%PDF-1.7 a pack"
    ) -> Revision:
        """A revision issued with the file ``data``, which isn't kept anywhere yet."""
        record_id = self.reserve(document, machine)
        digest = hashlib.sha256(data).hexdigest()
        content = "".join(self.random.choices(ALPHABET, k=16))
        with open_register(self.register) as register:
            for one in SIGNERS:
                issuing.sign_event(
                    register,
                    record_id,
                    who=one.name,
                    meaning=one.meaning,
                    file_digest=digest,
                    when=self.clock(),
                )
            return issuing.commit(
                register,
                record_id,
                content_digest=content,
                file_digest=digest,
                machine_digest="FEDCBA9876543210",
                engine=1,
                signers=SIGNERS,
                by="Olaf Brenner",
                when=self.clock(),
            )


def code_of(revision: Revision) -> str:
    """The path that the code of a revision's pages holds."""
    assert revision.issue is not None
    return f"/r/{revision.record_id}?d={revision.issue.content_digest[:8]}&v={revision.number}"


def word(answer: httpx2.Response) -> str:
    """What the page says largest."""
    return answer.text.split('<h1 class="word">')[1].split("</h1>")[0]
