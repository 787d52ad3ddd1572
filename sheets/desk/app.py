"""The application that a server runs: routes, the guard before them, the gates behind them."""

from __future__ import annotations

from collections.abc import AsyncIterator, Callable
from contextlib import asynccontextmanager
from datetime import UTC, datetime
from functools import partial
from typing import Final
from urllib.parse import urlsplit

from starlette.applications import Starlette
from starlette.exceptions import HTTPException
from starlette.requests import Request
from starlette.responses import Response
from starlette.routing import Mount, Route

from sheets.desk import reading
from sheets.desk.guard import Guard
from sheets.desk.showing import Desk, bug, status_of
from sheets.errors import JamnutError, Problem
from sheets.pipeline import DeskSettings, ReadingRoom

OWN_NAMES: Final = ("localhost", "127.0.0.1", "::1")

CLOSED: Final = Problem(
    where="",
    what="This site's record page is closed to the public.",
    fix="Sign in, or telephone the planner.",
)

View = Callable[[Desk, Request], Response]


def clock() -> datetime:
    """The only look at a clock, in UTC."""
    return datetime.now(UTC)


def create(
    settings: DeskSettings,
    *,
    now: Callable[[], datetime] = clock,
) -> Guard:
    """The record page of a site. Raises InputError for settings that can't be used."""
    room = ReadingRoom(settings)
    address = urlsplit(room.site.record_address) if room.site and room.site.record_address else None
    desk = Desk(room=room, now=now, base=address.path.rstrip("/") if address else "")
    hosts = {*OWN_NAMES, *settings.hosts, *([address.hostname] if address and address.hostname else [])}
    routes = _routes(desk)

    @asynccontextmanager
    async def lifespan(_: Starlette) -> AsyncIterator[None]:
        yield
        room.close()

    app = Starlette(
        routes=[Mount(desk.base, routes=routes)] if desk.base else routes,
        exception_handlers={
            JamnutError: partial(_known, desk),
            HTTPException: partial(_http, desk),
            Exception: partial(bug, desk),
        },
        lifespan=lifespan,
    )
    return Guard(app, hosts=hosts, secure=settings.secure)  # around the last gate, too


def _routes(desk: Desk) -> list[Route]:
    def at(path: str, view: View, *methods: str, open_: bool = False) -> Route:
        def endpoint(request: Request) -> Response:
            if not open_ and not desk.room.open_to_all:
                return desk.problem(401, CLOSED)
            return view(desk, request)

        return Route(path, endpoint, methods=list(methods or ("GET",)), name=view.__name__)

    return [
        at("/r/{record_id}", reading.record),
        at("/r/{record_id}/file", reading.file),
        at("/find", reading.find),
        at("/look.css", reading.look_css, open_=True),
    ]


def _known(desk: Desk, request: Request, error: Exception) -> Response:
    """An error with its own words; where only reading was asked for, it is the register that failed."""
    if not isinstance(error, JamnutError):
        raise TypeError(type(error).__name__)
    if request.method in ("GET", "HEAD"):
        return desk.unread(error)
    return desk.problem(status_of(error), *error.problems)


_SAYS: Final = {
    404: Problem(where="", what="There is no such page.", fix="Scan the code again, or find the record."),
    405: Problem(where="", what="This isn't served so.", fix="Go back, and use the page's own buttons."),
}


def _http(desk: Desk, _: Request, error: Exception) -> Response:
    status = error.status_code if isinstance(error, HTTPException) else 404
    return desk.problem(status, _SAYS.get(status, _SAYS[404]))
