"""A works of its own for each test."""

from __future__ import annotations

from pathlib import Path

import pytest
from desk_bench import Bench
from starlette.testclient import TestClient

from sheets.seal import passwords


@pytest.fixture(autouse=True)
def _quick(monkeypatch: pytest.MonkeyPatch) -> None:
    """Hashes that cost little: how slow they are is the library's own matter."""
    cheap = passwords.PasswordHasher(time_cost=1, memory_cost=8, parallelism=1)
    monkeypatch.setattr(passwords, "_HASHER", cheap)
    passwords._nobody.cache_clear()


@pytest.fixture
def bench(tmp_path: Path) -> Bench:
    return Bench(tmp_path / "works")


@pytest.fixture(scope="module")
def bench_once(tmp_path_factory: pytest.TempPathFactory) -> tuple[Bench, TestClient]:
    """One works and one caller for many requests that write nothing."""
    made = Bench(tmp_path_factory.mktemp("once") / "works")
    made.issue()
    return made, made.client()
