"""Issued files in a folder, found by what they hold: never by a name, which anybody can give."""

from __future__ import annotations

from pathlib import Path
from threading import Lock
from typing import Final

from sheets.pipeline.issuing import file_digest

LARGEST_FILE: Final = 64_000_000
"""Bytes; a pack has a hundredth of it."""
MOST_FILES: Final = 5000

_Stamp = tuple[int, int, int]


class KeptFiles:
    """The PDF files of one folder by their digest; folders inside it aren't searched."""

    def __init__(self, folder: Path | None) -> None:
        self.folder = folder
        self._lock = Lock()
        self._digests: dict[Path, tuple[_Stamp, str]] = {}

    def holds(self, digest: str) -> bool:
        """Whether a file with that SHA-256 ``digest`` lies there."""
        return self._find(digest) is not None

    def read(self, digest: str) -> bytes | None:
        """The file with that ``digest``, judged on the very bytes that are handed out; None without one."""
        file = self._find(digest)
        if file is None:
            return None
        try:
            data = file.read_bytes()
        except OSError:
            return None
        return data if file_digest(data) == digest else None

    def _find(self, digest: str) -> Path | None:
        if self.folder is None:
            return None
        with self._lock:
            try:
                self._look(self.folder)
            except OSError:
                return None
            return next((file for file, (_, found) in self._digests.items() if found == digest), None)

    def _look(self, folder: Path) -> None:
        """Reads what is new or was changed. A folder's own time is too coarse to tell that files came."""
        known, self._digests = self._digests, {}
        for file in sorted(folder.glob("*.pdf"))[:MOST_FILES]:
            found = file.stat()
            if not file.is_file() or found.st_size > LARGEST_FILE:
                continue
            mark = (found.st_mtime_ns, found.st_size, found.st_ino)
            if file in known and known[file][0] == mark:
                self._digests[file] = known[file]
            else:
                self._digests[file] = (mark, file_digest(file.read_bytes()))
