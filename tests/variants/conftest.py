"""Machines that are written out in a test, computed once."""

from collections.abc import Callable
from functools import lru_cache

import pytest

from sheets.pages.compose.matter import Matter
from sheets.pipeline import check, steps


@pytest.fixture(scope="session")
def computed(tmp_path_factory: pytest.TempPathFactory) -> Callable[[str], Matter]:
    """Everything computed for a machine file that is given as text."""

    @lru_cache
    def compute(text: str) -> Matter:
        file = tmp_path_factory.mktemp("written") / "machine.yaml"
        file.write_text(text, encoding="utf-8")
        return steps(check(file))

    return compute
