"""What may take the place of a file that stands already: nothing that of an issued pack, or another kind."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Final

from sheets.errors import InputError, Problem
from sheets.machine.files import check_pdf_target
from sheets.pages.attached import attachments_in
from sheets.pipeline.attaching import ISSUE_NAME

AUDIT_NAME: Final = "machines.csv"
"""The list that every audit carries, and nothing else does: an audit is known by it, not by its name."""
_FIX: Final = "Name another file with -o; nothing was overwritten."


def keep_issued(target: Path) -> None:
    """Nothing that is printed takes the place of an issued pack, or of an audit. Raises InputError."""
    held = _held(target)
    if held is not None and ISSUE_NAME in held:
        raise _stands(target, "An issued pack stands there.", _FIX)
    if held is not None and AUDIT_NAME in held:
        raise _stands(target, "An audit of the register stands there.", _FIX)


def keep_all_but_audits(target: Path, lists: Sequence[tuple[Path, str]]) -> None:
    """An audit takes the place of an audit, and its lists that of such lists. Raises InputError otherwise.

    ``lists``: each file that goes beside it, with the first line that such a file begins with.
    """
    fix = "Name another file; nothing was overwritten."
    check_pdf_target(target)
    if target.exists():
        held = _held(target)
        if held is None or AUDIT_NAME not in held:
            what = "An issued pack" if held is not None and ISSUE_NAME in held else "A PDF that is no audit"
            raise _stands(target, f"{what} stands there.", fix)
    for file, head in lists:
        if file.exists() and not _begins(file, head):
            raise _stands(file, "Something stands there that isn't this list of an audit.", fix)


def _held(target: Path) -> dict[str, bytes] | None:
    """What travels in a PDF; None for no PDF, or one that can't be read."""
    try:
        return attachments_in(target.read_bytes())
    except (OSError, InputError):
        return None


def _begins(file: Path, head: str) -> bool:
    try:
        with file.open("rb") as opened:
            return opened.read(len(head.encode())) == head.encode()
    except OSError:
        return False


def _stands(target: Path, what: str, fix: str) -> InputError:
    return InputError(Problem(where=str(target), what=what, fix=fix))
