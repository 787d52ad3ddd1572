"""A program that issues and records, killed at 300 random moments on each database."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from sheets.register.opening import Place

KILLS = 300


@pytest.mark.slow
def test_what_was_acknowledged_before_a_kill_is_there_and_the_chain_is_whole(
    place: Place, root: Path
) -> None:
    script = Path(__file__).with_name("killing.py")
    done = subprocess.run(
        [sys.executable, script, str(place), str(KILLS)],
        env={**os.environ, "PYTHONPATH": str(root)},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stdout + done.stderr
    assert done.stdout.startswith(f"{KILLS} kills")
    assert done.stdout.endswith("none lost\n")
