"""How often somebody may try something within a time."""

from __future__ import annotations

from collections import OrderedDict, deque
from collections.abc import Callable
from datetime import datetime, timedelta
from threading import Lock
from typing import Final

MOST_KEYS: Final = 10_000
"""Kept in memory; beyond it the oldest is forgotten."""


class Limiter:
    """At most ``most`` events of a key within ``within``."""

    def __init__(self, now: Callable[[], datetime], *, most: int, within: timedelta) -> None:
        self._now, self._most, self._within = now, most, within
        self._lock = Lock()
        self._seen: OrderedDict[str, deque[datetime]] = OrderedDict()

    def take(self, key: str) -> int:
        """Counts one more and gives 0; where there were too many, the seconds until another is allowed."""
        with self._lock:
            seen = self._fresh(key)
            if len(seen) >= self._most:
                return max(1, int((seen[0] + self._within - self._now()).total_seconds()) + 1)
            seen.append(self._now())
            self._seen.move_to_end(key)
            while len(self._seen) > MOST_KEYS:
                self._seen.popitem(last=False)
            return 0

    def forget(self, key: str) -> None:
        """Begins anew."""
        with self._lock:
            self._seen.pop(key, None)

    def _fresh(self, key: str) -> deque[datetime]:
        seen = self._seen.setdefault(key, deque())
        since = self._now() - self._within
        while seen and seen[0] <= since:
            seen.popleft()
        return seen
