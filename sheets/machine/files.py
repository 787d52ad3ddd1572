"""Which files belong to a machine, which of a folder are machine files, and how a file is written."""

from __future__ import annotations

import contextlib
from collections.abc import Sequence
from pathlib import Path
from typing import Final

from sheets.errors import InputError, Problem

SITE_FILE: Final = "site.yaml"
WALKDOWN_ENDING: Final = ".walkdown.yaml"


def walkdown_file(machine_file: Path) -> Path:
    """Where the walk-down of a machine file stands."""
    return machine_file.with_name(f"{machine_file.stem}{WALKDOWN_ENDING}")


def machine_files(named: Sequence[Path]) -> tuple[Path, ...]:
    """Machine files among files and folders, each once, those of a folder by name.

    Raises InputError for a folder without any. A file that isn't there stays, for the reader to tell.
    """
    found: dict[Path, Path] = {}
    for path in named:
        for file in _inside(path) if path.is_dir() else (path,):
            found.setdefault(file.resolve(), file)
    return tuple(found.values())


def _inside(folder: Path) -> list[Path]:
    files = sorted(file for file in folder.glob("*.yaml") if _is_machine_file(file))
    if not files:
        raise InputError(
            Problem(
                where=str(folder),
                what="There is no machine file in this folder.",
                fix="Machine files end in .yaml; folders inside it aren't searched.",
            )
        )
    return files


def _is_machine_file(file: Path) -> bool:
    return (
        file.is_file()
        and not file.name.startswith(".")
        and file.name != SITE_FILE
        and not file.name.endswith(WALKDOWN_ENDING)
    )


_NAME_ANOTHER: Final = "Name a file with -o, in a folder that exists and that you may write to."


def bytes_of(file: Path) -> bytes:
    """What a file holds. Raises InputError if it can't be read."""
    try:
        return file.read_bytes()
    except OSError as error:
        raise InputError(
            Problem(
                where=str(file),
                what=f"The file can't be read: {error.strerror}.",
                fix="Look at the name of the file and whether you may read it.",
            )
        ) from None


def write_pdf(target: Path, data: bytes) -> None:
    """Writes a PDF aside and moves it into place, so that nothing half-written is left.

    Raises InputError if the folder isn't there or can't be written to, and if another kind of file already
    stands under that name.
    """
    check_pdf_target(target)
    move_into_place(target, data, fix=_NAME_ANOTHER)


def check_pdf_target(target: Path) -> None:
    """Whether a PDF may be written there, as far as can be told before. Raises InputError."""
    if target.exists() and not _is_pdf(target):
        raise InputError(
            Problem(
                where=str(target),
                what="Something stands there that isn't a PDF file.",
                fix="Name another file with -o; nothing was overwritten.",
            )
        )
    if not target.parent.is_dir():
        raise InputError(Problem(where=str(target), what="Its folder isn't there.", fix=_NAME_ANOTHER))


def move_into_place(target: Path, data: bytes, *, fix: str, private: bool = False) -> None:
    """Writes a file aside and moves it into place. Raises InputError with ``fix`` where it can't.

    ``private``: only whoever writes it may read it, where the system keeps such rights.
    """
    aside = aside_of(target)
    try:
        write_aside(target, data, fix=fix, private=private)
        move_aside(target, fix=fix)
    finally:
        aside.unlink(missing_ok=True)


def check_writable(target: Path) -> None:
    """Whether a file can be written into that folder now. Raises InputError."""
    probe = target.parent / f".{target.name}.probe"
    try:
        with probe.open("wb") as opened:
            opened.write(b"0")
        probe.unlink()
    except OSError as error:
        raise unwritten(target, error, _NAME_ANOTHER) from None


def aside_of(target: Path) -> Path:
    """Where a file is written before it is moved into place."""
    return target.parent / f".{target.name}.part"


def write_aside(target: Path, data: bytes, *, fix: str = _NAME_ANOTHER, private: bool = False) -> None:
    """Writes a file beside its place. Raises InputError with ``fix`` where it can't."""
    aside = aside_of(target)
    try:
        aside.unlink(missing_ok=True)
        aside.touch(mode=0o600 if private else 0o666, exist_ok=False)
        aside.write_bytes(data)
    except OSError as error:
        with contextlib.suppress(OSError):
            aside.unlink(missing_ok=True)
        raise unwritten(target, error, fix) from None


def move_aside(target: Path, *, fix: str = _NAME_ANOTHER) -> None:
    """Moves what was written aside into its place. Raises InputError with ``fix`` where it can't."""
    try:
        aside_of(target).replace(target)
    except OSError as error:
        raise unwritten(target, error, fix) from None


def unwritten(target: Path, error: OSError, fix: str) -> InputError:
    """The error for a file that the system doesn't let us write."""
    what = f"The file can't be written: {error.strerror}."
    return InputError(Problem(where=str(target), what=what, fix=fix))


def _is_pdf(file: Path) -> bool:
    if not file.is_file():
        return False
    with file.open("rb") as opened:
        return opened.read(5) in (b"%PDF-", b"")
