"""A works with a record page: its register, its pages as a caller gets them, and a clock that stands."""

from __future__ import annotations

import hashlib
import json
import re
import sqlite3
from dataclasses import dataclass, field
from datetime import UTC, date, datetime, timedelta
from pathlib import Path
from random import Random

import httpx2
from starlette.testclient import TestClient

from sheets import pipeline
from sheets.desk.app import create
from sheets.register import issuing
from sheets.register.kept import Kept
from sheets.register.opening import create_register, open_register
from sheets.register.revisions import Revision, Signer
from sheets.register.rows import Row

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
        self,
        document: str = "WI-204",
        machine: str = "KP-2",
        *,
        data: bytes = b"%PDF-1.7 a pack",
        kept: Kept | None = None,
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
                kept=kept,
            )


FACE = {
    "is": "GaugeFace", "gauge": "G1", "caption": "G1 at TP1", "unit": "bar", "digital": False,
    "scale_end": "400", "graduation": "5", "target": "205", "window": ["200", "210"],
    "never_exceed": "250", "target_text": "205", "window_text": "200 to 210", "never_exceed_text": "250",
}  # fmt: skip
"""As a dial to 400 bar stands in a content."""


def row(number: int, adjuster: str, called: str, **other: str) -> Row:
    """A row: 205 bar, accepted 200 to 210, never above 250; beyond 190 to 230 out of order."""
    given = {
        "gauge": "G1", "test_point": "TP1", "unit": "bar", "target": "205", "low": "200", "high": "210",
        "never_exceed": "250", "ladder_low": "190", "ladder_high": "230", "drift_low": "185",
        "drift_high": "225", "gauge_error": "4", **other,
    }  # fmt: skip
    return Row(row=number, adjuster=adjuster, called=called, **given)


def kept(called: str = "RV1") -> Kept:
    """What a register keeps of a pack with two settings; only the first is drawn."""
    tag = {"is": "SettingTag", "id": "RV1", "face": FACE, "second_unit": "2973 psi"}
    content = {"sections": [{"kind": "tags", "blocks": [{"is": "TagSheet", "tags": [tag]}]}]}
    return Kept(
        rows=(row(1, "RV1", called), row(2, "PU1.compensator", "compensator of PU1")),
        task="set",
        paper="A4",
        unit="bar",
        zero_limit="2",
        machine="format: 1\n",
        content=json.dumps(content),
    )


def list_gauge(
    register: Path,
    serial: str = "4711",
    number: str = "17",
    due: date = date(2031, 12, 31),
    when: datetime = NOON,
    accuracy_class: str = "1.0",
) -> None:
    """A dial to 400 bar; of class 1.0 it is out by at most 4 bar."""
    pipeline.list_gauge(
        register,
        serial=serial,
        number=number,
        what="dial gauge",
        range_text="400 bar",
        accuracy_class=accuracy_class,
        error_text="",
        certificate="C-1",
        due=due,
        by="Ines Kurz",
        when=when,
    )


def events(bench: Bench, *kinds: str) -> list[tuple[str, str, dict[str, object]]]:
    """Kind, who and data of the register's events of those kinds."""
    with open_register(bench.register, read_only=True) as register, register.reading() as view:
        return [(one.kind, one.who, one.facts) for one in view.events() if one.kind in kinds]


def rewrite(bench: Bench) -> None:
    """What an administrator can do: change an old event in its place."""
    with sqlite3.connect(bench.register) as other:
        (sql,) = other.execute("SELECT sql FROM sqlite_master WHERE name = 'no_update'").fetchone()
        other.execute("DROP TRIGGER no_update")
        other.execute("UPDATE events SET who = 'Somebody Else' WHERE kind = 'signed'")
        other.execute(sql)


def code_of(revision: Revision) -> str:
    """The path that the code of a revision's pages holds."""
    assert revision.issue is not None
    return f"/r/{revision.record_id}?d={revision.issue.content_digest[:8]}&v={revision.number}"


PASSWORD = "clay goes in first"


def form_in(answer: httpx2.Response) -> str:
    (found,) = re.findall(r'name="form" value="([^"]+)"', answer.text)
    return found


def sign_in(
    client: TestClient, name: str = "Tom Ness", password: str = PASSWORD, to: str = ""
) -> httpx2.Response:
    form = form_in(client.get("/sign-in", params={"to": to}))
    return client.post("/sign-in", data={"form": form, "name": name, "password": password, "to": to})


def word(answer: httpx2.Response) -> str:
    """What the page says largest."""
    return answer.text.split('<h1 class="word">')[1].split("</h1>")[0]
