"""The application that a server runs: routes, the guard before them, the gates behind them."""

from __future__ import annotations

import secrets
from collections.abc import AsyncIterator, Callable
from contextlib import asynccontextmanager
from datetime import UTC, datetime
from functools import partial
from typing import Final
from urllib.parse import urlencode, urlsplit

from starlette.applications import Starlette
from starlette.exceptions import HTTPException
from starlette.requests import Request
from starlette.responses import RedirectResponse, Response
from starlette.routing import Mount, Route

from sheets.desk import reading, signing_in, writing
from sheets.desk.gatekeeping import Gatekeeper
from sheets.desk.guard import Guard
from sheets.desk.sessions import Sessions
from sheets.desk.showing import Desk, KeptPages, Visit, bug, status_of
from sheets.errors import JamnutError, Problem
from sheets.pipeline import DeskSettings, ReadingRoom, Role

OWN_NAMES: Final = ("localhost", "127.0.0.1", "::1")

CLOSED: Final = Problem(
    where="",
    what="This site's record page is closed to the public.",
    fix="Sign in, or telephone the planner.",
)

SIGN_IN: Final = Problem(where="", what="Nobody is signed in.", fix="Sign in, and fill in the form again.")
ROLE: Final = Problem(where="", what="Your role doesn't reach this.", fix="Ask who keeps the users file.")
FAST: Final = Problem(where="", what="That was too much in one minute.", fix="Wait a minute.")

View = Callable[[Visit], Response]


def clock() -> datetime:
    """The only look at a clock, in UTC."""
    return datetime.now(UTC)


def create(
    settings: DeskSettings,
    *,
    now: Callable[[], datetime] = clock,
    random_text: Callable[[], str] = secrets.token_urlsafe,
) -> Guard:
    """The record page of a site. Raises InputError for settings that can't be used."""
    room = ReadingRoom(settings)
    address = urlsplit(room.site.record_address) if room.site and room.site.record_address else None
    desk = Desk(
        room=room,
        now=now,
        base=address.path.rstrip("/") if address else "",
        sessions=Sessions(now, random_text),
        gate=Gatekeeper(now, random_text),
        kept=KeptPages(),
    )
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
    def at(path: str, view: View, *, method: str = "GET", needs: Role | None = None) -> Route:
        """A route for whoever may read, or for a role; a form only once, and from whom it was shown to."""

        def endpoint(request: Request) -> Response:
            visit = Visit(desk, request)
            refusal = _refusal(visit, needs, form=method == "POST")
            return view(visit) if refusal is None else refusal

        return Route(path, endpoint, methods=[method], name=view.__name__)

    def always(path: str, view: View, *, method: str = "GET") -> Route:
        def endpoint(request: Request) -> Response:
            return view(Visit(desk, request))

        return Route(path, endpoint, methods=[method], name=view.__name__)

    routes = [
        at("/r/{record_id}", reading.record),
        at("/r/{record_id}/file", reading.file),
        at("/", reading.machines),
        at("/dates", reading.dates),
        at("/machine", reading.machine),
        at("/find", reading.find),
        always("/look.css", reading.look_css),
        always("/favicon.ico", reading.no_icon),
    ]
    if desk.room.settings.users is None:
        return routes
    return [
        *routes,
        always("/sign-in", signing_in.ask),
        always("/sign-in", signing_in.sign_in, method="POST"),
        at("/r/{record_id}/row/{row:int}", writing.ask_row, needs=Role.TECHNICIAN),
        at("/r/{record_id}/row/{row:int}", writing.record_row, method="POST", needs=Role.TECHNICIAN),
        at("/r/{record_id}/deviation/{number:int}", writing.ask_deviation, needs=Role.TECHNICIAN),
        at("/r/{record_id}/deviation/{number:int}", writing.settle, method="POST", needs=Role.TECHNICIAN),
        at("/r/{record_id}/tag", writing.ask_tag, needs=Role.TECHNICIAN),
        at("/r/{record_id}/tag", writing.post_tag, method="POST", needs=Role.TECHNICIAN),
        at("/r/{record_id}/tags.pdf", writing.tags, needs=Role.TECHNICIAN),
        at("/sign-out", signing_in.ask_out, needs=Role.READER),
        at("/sign-out", signing_in.sign_out, method="POST", needs=Role.READER),
    ]


def _refusal(visit: Visit, needs: Role | None, *, form: bool) -> Response | None:
    """What stands against a request, or None. A form's token is used up by it."""
    desk = visit.desk
    if visit.user is None and (needs is not None or not desk.room.open_to_all):
        if desk.room.settings.users is None or form:
            return visit.problem(401, CLOSED if needs is None else SIGN_IN)
        path = visit.request.url.path
        query = f"?{visit.request.url.query}" if visit.request.url.query else ""
        to = urlencode({"to": f"{path}{query}"})
        return RedirectResponse(f"{desk.base}/sign-in?{to}", status_code=303)
    if needs is not None and not visit.may(needs):
        return visit.problem(403, ROLE)
    if form and visit.session is not None:
        if not desk.sessions.take(visit.session, visit.said("form")):
            return visit.problem(403, signing_in.STALE)
        if wait_s := desk.sessions.writes.take(visit.token):
            answer = visit.problem(429, FAST)
            answer.headers["Retry-After"] = str(wait_s)
            return answer
    return None


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
