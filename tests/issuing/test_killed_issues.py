"""A program that issues packs, killed at random moments: no half file, nothing acknowledged that is lost."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

KILLS = 12
"""By itself the script takes any number; each takes some seconds, since packs are printed and signed."""


@pytest.mark.slow
def test_a_kill_leaves_whole_files_and_a_register_that_holds(root: Path, tmp_path: Path) -> None:
    script = Path(__file__).with_name("killing_issues.py")
    done = subprocess.run(
        [sys.executable, script, tmp_path / "works", str(KILLS)],
        env={**os.environ, "PYTHONPATH": str(root)},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stdout + done.stderr
    assert "none lost; the next one is GOOD" in done.stdout
