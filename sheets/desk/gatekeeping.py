"""What keeps guessing and forged forms from signing in."""

from __future__ import annotations

import hmac
from collections.abc import Callable
from datetime import datetime, timedelta
from threading import BoundedSemaphore
from typing import Final

from sheets.desk.limits import Limiter

WITHIN: Final = timedelta(minutes=15)
FROM_ADDRESS: Final = 40
"""Sign-ins from one address, right or wrong; several people may share it."""
OF_NAME: Final = 8
"""Wrong passwords for one name, wherever they come from."""
AT_ONCE: Final = 2
"""Passwords that are judged at the same time: each takes 64 MiB of memory."""


class Gatekeeper:
    """What signing in needs beside a page: a key for its form, and a count of wrong passwords."""

    def __init__(self, now: Callable[[], datetime], random_text: Callable[[], str]) -> None:
        self._random = random_text
        self._key = random_text().encode()
        self.addresses = Limiter(now, most=FROM_ADDRESS, within=WITHIN)
        self.names = Limiter(now, most=OF_NAME, within=WITHIN)
        self.turn = BoundedSemaphore(AT_ONCE)

    def form(self) -> tuple[str, str]:
        """A new cookie, and what the form must say beside it: another site knows neither."""
        cookie = self._random()
        return cookie, self._mark(cookie)

    def ours(self, cookie: str, said: str) -> bool:
        """Whether a form was made for that cookie."""
        return bool(cookie) and hmac.compare_digest(self._mark(cookie).encode(), said.encode())

    def _mark(self, cookie: str) -> str:
        return hmac.new(self._key, cookie.encode(), "sha256").hexdigest()
