"""One demonstration site with its issued pack, made once; each test that changes something gets a copy."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from works import WHEN, Chance, Works

from sheets import pipeline
from sheets.pages.compose.matter import Matter

BEFORE, AFTER = "name: Kiln-car pusher power unit", "name: Kiln-car pusher, power unit"


@pytest.fixture(scope="session")
def issued(root: Path, tmp_path_factory: pytest.TempPathFactory) -> Works:
    """Never written to by a test."""
    folder = tmp_path_factory.mktemp("works") / "demonstration"
    made = pipeline.demo(
        root / "sample_machines" / "kiln_pusher.yaml", folder, when=WHEN, random_bytes=Chance(1)
    )
    assert made.issued.waiting == ()
    # The machine file goes on from there: only what has changed can be issued again.
    machine = Works(folder).machine
    text = machine.read_text(encoding="utf-8")
    machine.write_text(text.replace(BEFORE, AFTER), encoding="utf-8")
    return Works(folder)


@pytest.fixture(scope="session")
def job(issued: Works) -> Matter:
    """The job of that site, changed in its name, ready to be issued again."""
    return pipeline.steps(pipeline.check(issued.machine))


@pytest.fixture
def works(issued: Works, tmp_path: Path) -> Works:
    """A copy that a test may do anything to."""
    shutil.copytree(issued.folder, tmp_path / "works")
    return Works(tmp_path / "works")


@pytest.fixture(scope="session")
def half_signed(issued: Works, job: Matter, tmp_path_factory: pytest.TempPathFactory) -> Works:
    """A second revision that only its preparer has signed. Never written to by a test."""
    shutil.copytree(issued.folder, tmp_path_factory.mktemp("half") / "works")
    copy = Works(next(iter(tmp_path_factory.getbasetemp().glob("half*"))) / "works")
    copy.issue(job, checked="Bram Tolliver", approved="Cleo Harnett")
    return copy


@pytest.fixture
def waiting(half_signed: Works, tmp_path: Path) -> Works:
    """A copy of it."""
    shutil.copytree(half_signed.folder, tmp_path / "works")
    return Works(tmp_path / "works")
