"""Who is signed in, in this server's memory only: a random name in a cookie, never one that a caller gave."""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Callable
from dataclasses import dataclass, field
from datetime import datetime, timedelta
from threading import Lock
from typing import Final

from sheets.desk.limits import Limiter
from sheets.pipeline import User

IDLE: Final = timedelta(minutes=30)
WHOLE: Final = timedelta(hours=10)
"""A shift and its handover."""
MOST_SESSIONS: Final = 500
MOST_FORMS: Final = 40
"""Pages with a form that may stand open at once."""
WRITES: Final = 40
WRITES_WITHIN: Final = timedelta(minutes=1)


@dataclass
class Session:
    """One sign-in."""

    user: User
    begun: datetime
    used: datetime
    forms: OrderedDict[str, None] = field(default_factory=OrderedDict)
    """Tokens of forms that were shown and not yet sent."""


class Sessions:
    """All sign-ins of one server."""

    def __init__(self, now: Callable[[], datetime], random_text: Callable[[], str]) -> None:
        self._now, self._random = now, random_text
        self._lock = Lock()
        self._held: OrderedDict[str, Session] = OrderedDict()
        self.writes = Limiter(now, most=WRITES, within=WRITES_WITHIN)

    def begin(self, user: User) -> str:
        """A new session of somebody who has just shown a password; gives its token."""
        token = self._random()
        with self._lock:
            self._held[token] = Session(user=user, begun=self._now(), used=self._now())
            while len(self._held) > MOST_SESSIONS:
                self._held.popitem(last=False)
        return token

    def find(self, token: str) -> Session | None:
        """The session of a token, if it still counts."""
        with self._lock:
            found = self._held.get(token)
            if found is None:
                return None
            now = self._now()
            if now - found.used > IDLE or now - found.begun > WHOLE:
                del self._held[token]
                return None
            found.used = now
            return found

    def end(self, token: str) -> None:
        """Signs out."""
        with self._lock:
            self._held.pop(token, None)

    def form(self, session: Session) -> str:
        """A token for one form on one page."""
        token = self._random()
        with self._lock:
            session.forms[token] = None
            while len(session.forms) > MOST_FORMS:
                session.forms.popitem(last=False)
        return token

    def take(self, session: Session, token: str) -> bool:
        """Whether a form was shown to this session, and not sent before; it can't be sent again."""
        with self._lock:
            return session.forms.pop(token, False) is None
