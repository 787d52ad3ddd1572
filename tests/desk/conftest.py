"""A works of its own for each test."""

from __future__ import annotations

from pathlib import Path

import pytest
from desk_bench import Bench
from starlette.testclient import TestClient


@pytest.fixture
def bench(tmp_path: Path) -> Bench:
    return Bench(tmp_path / "works")


@pytest.fixture(scope="module")
def bench_once(tmp_path_factory: pytest.TempPathFactory) -> tuple[Bench, TestClient]:
    """One works and one caller for many requests that write nothing."""
    made = Bench(tmp_path_factory.mktemp("once") / "works")
    made.issue()
    return made, made.client()
