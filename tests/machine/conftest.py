"""The small machine file that the tests of this folder change."""

from pathlib import Path

import pytest


@pytest.fixture(scope="session")
def small_text() -> str:
    return (Path(__file__).parent / "small_power_unit.yaml").read_text(encoding="utf-8")
