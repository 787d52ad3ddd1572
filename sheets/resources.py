"""Finds templates/ and schemas/: the shipped copy in a wheel, else the checkout."""

from __future__ import annotations

from pathlib import Path

_PACKAGE = Path(__file__).parent


def resource_folder(name: str) -> Path:
    """Folder of that name; ``name`` is ``templates`` or ``schemas``.

    Raises FileNotFoundError if neither an installed copy nor a checkout has it: a broken installation.
    """
    for folder in (_PACKAGE / "_shipped" / name, _PACKAGE.parent / name):
        if folder.is_dir():
            return folder
    raise FileNotFoundError(f"{name}/ is neither in the installed package nor beside it")
