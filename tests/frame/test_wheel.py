"""What is handed out: the wheel works without the checkout, and the source archive is whole."""

from __future__ import annotations

import os
import subprocess
import sys
import tarfile
import venv
import zipfile
from importlib.metadata import distributions
from pathlib import Path

import pytest

SAMPLE = "glaze_press.yaml"
KEPT = {".py", ".yaml", ".json", ".j2", ".png", ".html", ".css"}
"""Endings of what people wrote; the rest beside it was made by running something."""
PROGRAMS = "Scripts" if os.name == "nt" else "bin"


def call(*command: str | Path, cwd: Path) -> str:
    """Runs a command that knows nothing of the checkout; gives its output."""
    done = subprocess.run(
        [str(word) for word in command],
        cwd=cwd,
        env={name: value for name, value in os.environ.items() if not name.startswith("PYTHON")},
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
    )
    assert done.returncode == 0, f"{command}\n{done.stdout}\n{done.stderr}"
    return done.stdout


@pytest.fixture(scope="module")
def built(root: Path, tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Path]:
    """The source archive, and the wheel that was built from it."""
    folder = tmp_path_factory.mktemp("dist")
    call(sys.executable, "-m", "build", "--outdir", folder, root, cwd=folder)
    (archive,) = folder.glob("*.tar.gz")
    (wheel,) = folder.glob("*.whl")
    return archive, wheel


@pytest.fixture(scope="module")
def installed(built: tuple[Path, Path], tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A fresh environment that holds the wheel and what it asks for, in the versions of this one."""
    folder = tmp_path_factory.mktemp("installed")
    versions = {one.metadata["Name"]: one.version for one in distributions()}
    lines = [f"{name}=={version}" for name, version in sorted(versions.items()) if name != "jamnut"]
    (folder / "versions.txt").write_text("\n".join(lines) + "\n", encoding="utf-8")
    venv.create(folder / "venv", with_pip=True)
    python = folder / "venv" / PROGRAMS / "python"
    call(python, "-m", "pip", "install", "-q", "-c", "versions.txt", built[1], cwd=folder)
    return python


def test_wheel_holds_the_package_and_its_resources_alone(built: tuple[Path, Path], root: Path) -> None:
    names = zipfile.ZipFile(built[1]).namelist()
    assert {name.split("/")[0].split("-")[0] for name in names} == {"sheets", "jamnut"}
    for folder in ("templates", "schemas"):
        beside = {str(path.relative_to(root)) for path in (root / folder).rglob("*") if path.is_file()}
        assert beside
        shipped = {
            name.removeprefix("sheets/_shipped/")
            for name in names
            if name.startswith(f"sheets/_shipped/{folder}/")
        }
        assert shipped == beside


def test_source_archive_is_whole(built: tuple[Path, Path], root: Path) -> None:
    with tarfile.open(built[0]) as archive:
        names = {member.name.split("/", 1)[1] for member in archive if member.isfile()}
    wanted = {
        str(path)
        for folder in ("sheets", "templates", "schemas", "tests", "sample_machines", ".ci")
        for path in (found.relative_to(root) for found in (root / folder).rglob("*") if found.is_file())
        if path.suffix in KEPT or path.parts[0] == ".ci"
    }
    assert len(wanted) > 100
    assert wanted | {"README.md", "DEVELOPERS.md", "pyproject.toml"} <= names


def test_installed_package_stands_alone(installed: Path, tmp_path: Path) -> None:
    where = call(installed, "-c", "import sheets; print(sheets.__file__)", cwd=tmp_path)
    assert installed.parents[1] in Path(where.strip()).parents
    listed = call(installed, "-m", "pip", "list", "--format=freeze", cwd=tmp_path).lower()
    assert "jamnut==" in listed
    assert "pytest==" not in listed
    call(installed, "-m", "pip", "check", cwd=tmp_path)


def test_installed_command_makes_the_same_paper(installed: Path, root: Path, tmp_path: Path) -> None:
    for name in (SAMPLE, "site.yaml"):
        (tmp_path / name).write_bytes((root / "sample_machines" / name).read_bytes())
    told = call(installed.parent / "jamnut", "pack", SAMPLE, "-o", "wheel.pdf", cwd=tmp_path)

    subprocess.run(
        [sys.executable, "-c", "from sheets.cli import entry; entry()", "pack", SAMPLE, "-o", "checkout.pdf"],
        cwd=tmp_path,
        env={**os.environ, "PYTHONPATH": str(root)},
        check=True,
        capture_output=True,
    )

    assert told.startswith("wheel.pdf: ")
    assert (tmp_path / "wheel.pdf").read_bytes() == (tmp_path / "checkout.pdf").read_bytes()
