"""The application that a server runs: routes, the guard before them, the gates behind them."""

from __future__ import annotations

import secrets
from collections.abc import AsyncIterator, Callable
from contextlib import asynccontextmanager
from datetime import UTC, datetime
from functools import partial
from typing import Final, Protocol
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
SENT: Final = Problem(
    where="",
    what="This form has been sent before, or is too old.",
    fix="See first whether it was written. If it wasn't, send it again from here.",
)
FAST: Final = Problem(where="", what="That was too much in one minute.", fix="Wait a minute.")

View = Callable[[Visit], Response]


class Asking(Protocol):
    """Shows a form with what was filled in, and what stood against it."""

    __name__: str

    def __call__(self, visit: Visit, /, *problems: Problem, status: int = 200) -> Response: ...


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
        base=room.base,
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
        routes=[Mount(desk.base, routes=routes), Route("/", partial(_in, desk))] if desk.base else routes,
        exception_handlers={
            JamnutError: partial(_known, desk),
            HTTPException: partial(_http, desk),
            Exception: partial(bug, desk),
        },
        lifespan=lifespan,
    )
    return Guard(app, hosts=hosts, secure=settings.secure)  # around the last gate, too


def _in(desk: Desk, _: Request) -> Response:
    """From the server's own address to where the page begins."""
    return RedirectResponse(f"{desk.base}/", status_code=303)


def _routes(desk: Desk) -> list[Route]:
    def at(path: str, view: View, *, needs: Role | None = None) -> Route:
        """A route for whoever may read, or for a role."""

        def endpoint(request: Request) -> Response:
            visit = Visit(desk, request)
            refusal = _refusal(visit, needs)
            return view(visit) if refusal is None else refusal

        return Route(path, endpoint, methods=["GET"], name=view.__name__)

    def form(path: str, ask: Asking, view: View, *, needs: Role) -> list[Route]:
        """The routes of a form for a role: taken once, from whom it was shown to; else shown again."""

        def endpoint(request: Request) -> Response:
            visit = Visit(desk, request)
            refusal = _refusal(visit, needs, ask=ask)
            return view(visit) if refusal is None else refusal

        return [at(path, ask, needs=needs), Route(path, endpoint, methods=["POST"], name=view.__name__)]

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
        *form("/r/{record_id}/row/{row:int}", writing.ask_row, writing.record_row, needs=Role.TECHNICIAN),
        *form(
            "/r/{record_id}/deviation/{number:int}",
            writing.ask_deviation,
            writing.settle,
            needs=Role.TECHNICIAN,
        ),
        *form("/r/{record_id}/tag", writing.ask_tag, writing.post_tag, needs=Role.TECHNICIAN),
        at("/r/{record_id}/tags.pdf", writing.tags, needs=Role.TECHNICIAN),
        *form("/sign-out", signing_in.ask_out, signing_in.sign_out, needs=Role.READER),
    ]


def _refusal(visit: Visit, needs: Role | None, *, ask: Asking | None = None) -> Response | None:
    """What stands against a request, or None. ``ask`` shows the form that was sent; its token is used up."""
    desk, form = visit.desk, ask is not None
    if visit.user is None and (needs is not None or not desk.room.open_to_all):
        if desk.room.settings.users is None or form:
            return visit.problem(401, CLOSED if needs is None else SIGN_IN)
        path = visit.request.url.path
        query = f"?{visit.request.url.query}" if visit.request.url.query else ""
        to = urlencode({"to": f"{path}{query}"})
        return RedirectResponse(f"{desk.base}/sign-in?{to}", status_code=303)
    if needs is not None and not visit.may(needs):
        return visit.problem(403, ROLE)
    if ask is not None and visit.session is not None:
        if not desk.sessions.take(visit.session, visit.said("form")):
            return ask(visit, SENT, status=403)
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
