"""What the register's tests share: a new register, times, random bytes, and another program that meddles."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path
from random import Random

import pytest
from recording_bench import Bench
from register_bench import CONTENT, FILE, KEPT, MACHINE, NOON, at, unguarded

from sheets.register.issuing import Reservation, commit, reserve, sign_event
from sheets.register.opening import Place, create_register
from sheets.register.revisions import Revision, Signer
from sheets.register.store import Register

DATABASES = ("SQLite", "PostgreSQL")


def pytest_generate_tests(metafunc: pytest.Metafunc) -> None:
    """Every test of a register runs on both databases, but for one that is about the file itself."""
    if "database" in metafunc.fixturenames:
        names = DATABASES[:1] if "path" in metafunc.fixturenames else DATABASES
        metafunc.parametrize("database", names)


@pytest.fixture
def path(tmp_path: Path) -> Path:
    """The file of a register; a test that asks for it is about SQLite only."""
    return tmp_path / "plant.register"


@pytest.fixture
def place(database: str, tmp_path: Path, request: pytest.FixtureRequest) -> Iterator[Place]:
    """Where a register may be made."""
    if database == "PostgreSQL":
        with request.getfixturevalue("postgres").fresh() as url:
            yield url
    else:
        yield tmp_path / "plant.register"


@pytest.fixture
def register(place: Place) -> Iterator[Register]:
    with create_register(place, by="Ines Kurz", when=NOON) as made:
        yield made


@pytest.fixture
def chance() -> Callable[[int], bytes]:
    return Random(7).randbytes


@pytest.fixture
def hold(register: Register, chance: Callable[[int], bytes]) -> Callable[..., Reservation]:
    def held(document: str = "WI-204", machine: str = "KP-2", minutes: int = 1) -> Reservation:
        return reserve(
            register,
            document=document,
            machine=machine,
            by="Ines Kurz",
            when=at(minutes),
            random_bytes=chance,
        )

    return held


@pytest.fixture
def issue(register: Register, hold: Callable[..., Reservation]) -> Callable[..., Revision]:
    """A revision with its three signatures, issued."""

    def issued(document: str = "WI-204", machine: str = "KP-2", content: str = CONTENT) -> Revision:
        held = hold(document, machine)
        signers = [
            Signer(meaning="prepared", name="Ines Kurz"),
            Signer(meaning="approved", name="Olaf Brenner"),
        ]
        for signer in signers:
            sign_event(
                register,
                held.record_id,
                who=signer.name,
                meaning=signer.meaning,
                file_digest=FILE,
                when=at(2),
            )
        return commit(
            register,
            held.record_id,
            content_digest=content,
            file_digest=FILE,
            machine_digest=MACHINE,
            engine=3,
            signers=signers,
            by="Ines Kurz",
            when=at(3),
            kept=KEPT,
        )

    return issued


@pytest.fixture
def meddle(place: Place) -> Callable[..., None]:
    """Another program that takes the guards off, runs its statements, and puts the guards back."""

    def meddled(*statements: str, **values: object) -> None:
        with unguarded(place) as database:
            for statement in statements:
                database.run(statement, **values)

    return meddled


@pytest.fixture
def bench(register: Register, issue: Callable[..., Revision]) -> Bench:
    """A job from an issued revision, with a gauge that is due today."""
    return Bench(register, issue())
