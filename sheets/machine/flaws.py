"""A flaw of a file before its line is known."""

from __future__ import annotations

from dataclasses import dataclass

Path = tuple[str | int, ...]
"""Keys and list places from the top of the file, in the file's own words."""


@dataclass(frozen=True, kw_only=True)
class Flaw:
    """One thing that is wrong at one place of a file."""

    at: Path
    what: str
    fix: str

    def under(self, path: Path) -> Flaw:
        """The same flaw, seen from further up."""
        return Flaw(at=path + self.at, what=self.what, fix=self.fix)
