"""A file that several commands may write, held by one of them."""

from __future__ import annotations

import contextlib
from collections.abc import Iterator
from pathlib import Path

from filelock import FileLock, Timeout

from sheets.errors import InputError, Problem
from sheets.machine.files import unwritten


@contextlib.contextmanager
def held(target: Path, *, seconds: float = 10.0) -> Iterator[None]:
    """Keeps other processes from reading, changing and writing back the same file meanwhile.

    ``seconds``: how long to wait for another one. Raises InputError when it takes longer, and where no lock
    can be made beside the file. The operating system takes the lock off a process that ends.
    """
    lock = FileLock(target.parent / f".{target.name}.lock")
    try:
        lock.acquire(timeout=seconds)
    except Timeout:
        raise InputError(
            Problem(
                where=str(target),
                what="Another command is writing to this file.",
                fix="Wait until it has ended, then say it again; nothing was written.",
            )
        ) from None
    except OSError as error:
        raise unwritten(target, error, "Look whether you may write into its folder.") from None
    try:
        yield
    finally:
        lock.release()
