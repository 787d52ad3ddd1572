"""Where the record page looks things up: one open register, judged as a whole before anything is told of it.

Judging the chain takes as long as the register is, so it is judged anew whenever an event has come, and again
after a while all the same: an old event may have been rewritten behind the last one.
"""

from __future__ import annotations

import contextlib
from collections.abc import Callable, Hashable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from pathlib import Path
from threading import Lock
from typing import Final, TypeVar, cast
from urllib.parse import urlsplit
from zoneinfo import ZoneInfo

from sheets.errors import InputError
from sheets.machine.loading import load_site
from sheets.machine.site import Site
from sheets.pipeline.kept_files import KeptFiles
from sheets.pipeline.zones import zone_of
from sheets.register.chain import Anchor, ChainVerdict, chain_in
from sheets.register.opening import Place, is_url, open_register
from sheets.register.store import Register, View

JUDGED_FOR: Final = timedelta(seconds=30)
MOST_KEPT: Final = 256
"""Answers that are kept in memory until the next event: whoever asks can't fill it."""

T = TypeVar("T")


@dataclass(frozen=True, kw_only=True)
class DeskSettings:
    """What a record page is served from."""

    register_at: Place
    site_file: Path | None = None
    files: Path | None = None
    """Folder with issued files; each is offered only if the register knows it."""
    users: Path | None = None
    """File of those who may sign in; None: nobody, the page is read only."""
    anchors: tuple[str, ...] = ()
    """Anchors that were kept outside."""
    secure: bool = False
    """Reached by TLS: cookies are sent by nothing else."""
    hosts: tuple[str, ...] = ()
    """Names under which it answers, beside the site's record address and this computer's own."""


class ReadingRoom:
    """An open register with the site's own words. Safe to use from several threads."""

    def __init__(self, settings: DeskSettings) -> None:
        """Raises InputError for a site file, an anchor or a register that can't be used."""
        self.settings = settings
        self.site: Site | None = load_site(settings.site_file).site if settings.site_file else None
        self.zone: ZoneInfo = zone_of(self.site) if self.site else ZoneInfo("UTC")
        self.files = KeptFiles(settings.files)
        self._anchors = tuple(Anchor.read(text) for text in settings.anchors)
        self._lock = Lock()
        self._file: tuple[int, int] | None = None
        self._register: Register | None = None
        self._judged: tuple[tuple[int, str], ChainVerdict, datetime] | None = None
        self._kept: dict[Hashable, object] = {}
        self._kept_at: tuple[int, str] | None = None
        self._opened()

    @property
    def open_to_all(self) -> bool:
        """Whether anybody may read; else only who has signed in."""
        return self.site.record_page_open if self.site else True

    @property
    def base(self) -> str:
        """Path under which it is reached, without a closing slash: that of the site's record address."""
        return urlsplit(self.site.record_address or "").path.rstrip("/") if self.site else ""

    def day(self, now: datetime) -> date:
        """The day at the works."""
        return now.astimezone(self.zone).date()

    def close(self) -> None:
        """Gives the register back."""
        with self._lock:
            if self._register is not None:
                self._register.close()
            self._register = None

    @contextmanager
    def view(self, now: datetime) -> Iterator[tuple[View, ChainVerdict]]:
        """The register as it stands, with the verdict on its chain. Raises InputError if it can't be read."""
        with self._opened().reading() as view:
            yield view, self._verdict(view, view.last(), now)

    def answer(self, key: Hashable, now: datetime, find: Callable[[View, ChainVerdict], T]) -> T:
        """What ``find`` gives, kept until the register's next event or judgement, or the next day."""
        with self._opened().reading() as view:
            last = view.last()
            chain = self._verdict(view, last, now)
            whole = (key, self.day(now), chain)
            with self._lock:
                if self._kept_at != last:
                    self._kept.clear()
                    self._kept_at = last
                if whole in self._kept:
                    return cast("T", self._kept[whole])
            found = find(view, chain)
            with self._lock:
                if self._kept_at == last:
                    if len(self._kept) >= MOST_KEPT:
                        self._kept.pop(next(iter(self._kept)))
                    self._kept[whole] = found
            return found

    def _verdict(self, view: View, last: tuple[int, str], now: datetime) -> ChainVerdict:
        with self._lock:
            if self._judged is not None:
                at, verdict, when = self._judged
                if at == last and timedelta() <= now - when < JUDGED_FOR:
                    return verdict
        verdict = chain_in(view, self._anchors)
        with self._lock:
            self._judged = last, verdict, now
        return verdict

    def _opened(self) -> Register:
        """The register, opened anew if another file stands in its place: a copy that was put back."""
        place = self.settings.register_at
        file = None
        if not is_url(place):
            with contextlib.suppress(OSError):
                found = Path(place).stat()
                file = found.st_dev, found.st_ino
        with self._lock:
            if self._register is None or file != self._file or (file is None and not is_url(place)):
                if self._register is not None:
                    self._register.close()
                self._register = None
                self._register = _open(place)
                self._file = file
                self._judged = None
            return self._register


def _open(place: Place) -> Register:
    """To write if that can be: only so SQLite clears away what a stopped writer left."""
    try:
        return open_register(place)
    except InputError:
        return open_register(place, read_only=True)
