"""The command, run as a person runs it: in a folder of its own, with status, output and errors."""

import os
import subprocess
import sys
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from sheets import cli

COMMAND = [sys.executable, "-c", "from sheets.cli import entry; entry()"]
"""What the installed command runs, without needing the folder that it is installed in."""


@dataclass(frozen=True, kw_only=True)
class Outcome:
    """What a command left behind."""

    status: int
    out: str
    err: str


@pytest.fixture
def run(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> Callable[..., Outcome]:
    """Runs the command's entry in this process, in ``tmp_path``."""
    monkeypatch.chdir(tmp_path)

    def call(*arguments: str | Path) -> Outcome:
        monkeypatch.setattr(sys, "argv", ["jamnut", *map(str, arguments)])
        status: object = 0
        try:
            cli.entry()
        except SystemExit as leaving:
            status = leaving.code
        shown = capsys.readouterr()
        assert isinstance(status, int)
        return Outcome(status=status, out=shown.out, err=shown.err)

    return call


@pytest.fixture(scope="session")
def shell(root: Path) -> Callable[..., Outcome]:
    """Runs the command in a process of its own, with an environment of its own."""

    def call(*arguments: str | Path, cwd: Path, umask: int = -1, **environment: str) -> Outcome:
        done = subprocess.run(
            [*COMMAND, *map(str, arguments)],
            cwd=cwd,
            env={**os.environ, "PYTHONPATH": str(root), **environment},
            umask=umask,
            capture_output=True,
            timeout=120,
            check=False,
        )
        return Outcome(
            status=done.returncode,
            out=done.stdout.decode("utf-8", "replace"),
            err=done.stderr.decode("utf-8", "replace"),
        )

    return call


@pytest.fixture
def variant(tmp_path: Path, root: Path) -> Callable[..., Path]:
    """A sample with pieces of its text replaced, in ``tmp_path``; each piece must stand in it once."""

    def write(*replacements: tuple[str, str], sample: str = "kiln_pusher") -> Path:
        text = (root / "sample_machines" / f"{sample}.yaml").read_text(encoding="utf-8")
        for old, new in replacements:
            assert text.count(old) == 1, f"{old!r} stands {text.count(old)} times in {sample}"
            text = text.replace(old, new)
        file = tmp_path / "machine.yaml"
        file.write_text(text, encoding="utf-8")
        return file

    return write
