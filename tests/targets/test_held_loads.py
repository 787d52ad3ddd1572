"""Loads that are held up: what the lockout sheet says of them must be described, and not declared absent."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from sheets.errors import RefusedError
from sheets.pages.compose.matter import Matter
from sheets.pipeline.printing import whole_content

ABSENT = "absent: [accumulator, suspended load, spring brake, pneumatic supply]"
Refused = Callable[..., Matter]


def codes(matter: Matter) -> set[str]:
    return {finding.code for finding in matter.targets.findings}


def test_a_held_up_load_that_no_part_has_is_refused(refused: Refused) -> None:
    looked = "absent: [accumulator, spring brake, pneumatic supply]"
    matter = refused("glaze_press", (ABSENT, f"{looked}\nload is held up: yes"))
    assert "load_not_described" in codes(matter)
    with pytest.raises(RefusedError):
        whole_content(matter)


def test_a_load_is_not_held_up_and_declared_absent(refused: Refused) -> None:
    matter = refused("glaze_press", (ABSENT, f"{ABSENT}\nload is held up: yes"))
    assert codes(matter) & {"load_not_described", "load_declared_absent"}


def test_a_sample_that_holds_nothing_up_says_nothing(refused: Refused) -> None:
    assert not codes(refused("glaze_press")) & {"load_not_described", "load_declared_absent"}


def test_a_coupling_takes_one_gauge(refused: Refused) -> None:
    matter = refused(
        "clay_mixer",
        ("fitted at: [TP1, TP2]", "fitted at: [TP1]"),
        ("fitted at: [TP2, TP3, TP1]", "fitted at: [TP1]"),
    )
    assert "two_gauges_one_coupling" in {finding.code for finding in matter.procedure.findings}
    with pytest.raises(RefusedError):
        whole_content(matter)
