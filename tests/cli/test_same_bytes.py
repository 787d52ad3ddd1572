"""The same file gives the same bytes, whatever the computer around it is set to."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

SURROUNDINGS = {
    "again": {},
    "elsewhere": {
        "PYTHONHASHSEED": "4711",
        "TZ": "Pacific/Chatham",
        "LC_ALL": "C",
        "LANGUAGE": "de",
        "SOURCE_DATE_EPOCH": "86400",
        "HOME": "/nonexistent",
    },
    "other words": {"PYTHONHASHSEED": "1", "TZ": "UTC0", "LC_ALL": "tr_TR.UTF-8", "PYTHONUTF8": "0"},
}


@pytest.fixture(scope="module")
def first(
    shell: Callable[..., object], root: Path, tmp_path_factory: pytest.TempPathFactory
) -> tuple[bytes, str]:
    """A pack and the line that tells of it, made in the checkout's own folder of samples."""
    target = tmp_path_factory.mktemp("first") / "pack.pdf"
    done = shell(
        "pack",
        "kiln_pusher.yaml",
        "-o",
        target,
        cwd=root / "sample_machines",
        PYTHONHASHSEED="0",
        TZ="Asia/Tokyo",
        LC_ALL="C.UTF-8",
    )
    assert done.status == 0, done.err
    return target.read_bytes(), done.out.split(": ")[-1]


@pytest.mark.parametrize("name", SURROUNDINGS)
def test_same_bytes(
    name: str, first: tuple[bytes, str], shell: Callable[..., object], root: Path, tmp_path: Path
) -> None:
    folder = tmp_path / "a folder with blanks" / "Μηχανές"
    folder.mkdir(parents=True)
    for file in ("kiln_pusher.yaml", "site.yaml"):
        shutil.copy(root / "sample_machines" / file, folder)

    done = shell("pack", "kiln_pusher.yaml", cwd=folder, umask=0o077, **SURROUNDINGS[name])

    assert done.status == 0, done.err
    assert (folder / "PU-03-draft.pdf").read_bytes() == first[0]
    assert done.out.split(": ")[-1] == first[1]


def test_another_content_has_other_bytes_and_another_digest(
    first: tuple[bytes, str],
    shell: Callable[..., object],
    root: Path,
    variant: Callable[..., Path],
    tmp_path: Path,
) -> None:
    """A check of the check: a pack that never changed would pass the tests above."""
    shutil.copy(root / "sample_machines" / "site.yaml", tmp_path)
    file = variant(("setting: 180 bar", "setting: 181 bar"))

    done = shell("pack", file, "-o", tmp_path / "pack.pdf", cwd=tmp_path)

    assert done.status == 0, done.err
    assert (tmp_path / "pack.pdf").read_bytes() != first[0]
    assert done.out.split(": ")[-1] != first[1]
