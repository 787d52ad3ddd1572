"""Making pages: the values that every page has, and one gate for every error."""

from __future__ import annotations

import logging
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final
from urllib.parse import parse_qsl

from starlette.responses import HTMLResponse

from sheets import pipeline
from sheets.desk.guard import BODY
from sheets.errors import ExitStatus, InputError, JamnutError, Problem

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime

    from starlette.requests import Request
    from starlette.responses import Response

    from sheets.desk.gatekeeping import Gatekeeper
    from sheets.desk.sessions import Session, Sessions
    from sheets.pipeline import Paper, ReadingRoom, RecordLook, Role, User

LOG: Final = logging.getLogger("jamnut.desk")
MOST_FIELDS: Final = 60
MOST_PAGES: Final = 64
_HTTP: Final = {
    ExitStatus.WRONG_INPUT: 422,
    ExitStatus.REFUSED: 409,
    ExitStatus.NOT_ESTABLISHED: 503,
}
_HEADINGS: Final = {
    400: "not understood",
    401: "sign in first",
    403: "refused",
    404: "nothing there",
    405: "not served",
    409: "refused",
    422: "not written",
    429: "wait",
    500: "an error of the page",
    503: "not established",
}
UNREADABLE: Final = Problem(
    where="",
    what="The register can't be read, so nothing can be told from it.",
    fix="Nothing here says whether a paper is current. Telephone the planner.",
)


class KeptPages:
    """Pages as they were drawn for who isn't signed in; drawing takes longer than looking up."""

    def __init__(self) -> None:
        self._held: dict[Paper, tuple[RecordLook, str, bytes]] = {}

    def find(self, paper: Paper, look: RecordLook, at: str) -> bytes | None:
        """The page of this very look, of this minute ``at``."""
        held = self._held.get(paper)
        return held[2] if held is not None and held[0] is look and held[1] == at else None

    def keep(self, paper: Paper, look: RecordLook, at: str, body: bytes) -> None:
        """Keeps it, and forgets all where there are too many; ``at``: its minute, ``body``: the page."""
        if len(self._held) >= MOST_PAGES:
            self._held.clear()
        self._held[paper] = (look, at, body)


@dataclass(frozen=True, kw_only=True)
class Desk:
    """What all routes share."""

    room: ReadingRoom
    now: Callable[[], datetime]
    base: str
    """Path under which it is reached, without a closing slash: that of the site's record address."""
    sessions: Sessions
    gate: Gatekeeper
    kept: KeptPages

    @property
    def secure(self) -> bool:
        return self.room.settings.secure

    @property
    def cookie(self) -> str:
        """Name of the cookie of a session; with this prefix a browser takes it from no other host."""
        return "__Host-jamnut" if self.secure else "jamnut"

    def users(self) -> tuple[User, ...]:
        """Who may sign in, as the file says now. Raises InputError if it can't be read."""
        file = self.room.settings.users
        return pipeline.users_of(file) if file is not None else ()

    def page(
        self, template: str, /, *, status: int = 200, user: User | None = None, **values: object
    ) -> Response:
        """The page of a template, with what every page has."""
        site = self.room.site
        local = self.now().astimezone(self.room.zone)
        frame: dict[str, object] = {
            "base": self.base,
            "plant": site.plant if site else "",
            "mark": site.signatures.note if site else "",
            "telephone": site.planner_telephone if site else "",
            "emergency": site.emergency_telephone if site else "",
            "at": f"{local:%Y-%m-%d %H:%M} {site.zone if site else 'UTC'}",
            "person": user.name if user else "",
            "role": user.role.value if user else "",
            "signing_in": self.room.settings.users is not None,
        }
        return HTMLResponse(pipeline.web_page(template, frame | values), status_code=status)

    def problem(self, status: int, *problems: Problem, user: User | None = None) -> Response:
        """A page that says why not."""
        heading = _HEADINGS.get(status, "refused")
        return self.page("problem", status=status, user=user, code=status, heading=heading, problems=problems)

    def unread(self, error: JamnutError) -> Response:
        """The register didn't answer: what is wrong with it is told to the log, not to the reader."""
        LOG.error("the register can't be read: %s", error)
        return self.problem(503, UNREADABLE)


class Visit:
    """One request, with who makes it."""

    def __init__(self, desk: Desk, request: Request) -> None:
        self.desk, self.request = desk, request
        self.token = self.cookie(desk.cookie)
        self.session: Session | None = desk.sessions.find(self.token) if self.token else None
        self.user: User | None = None
        if self.session is not None:
            # As the file says now: whoever was taken out, or got another password, is out at once.
            self.user = next((one for one in desk.users() if one == self.session.user), None)
        self._said = _form_of(request)

    def cookie(self, name: str) -> str:
        """What a cookie holds; empty without it."""
        return self.request.cookies.get(name, "")

    def said(self, name: str) -> str:
        """A field of the form, without blanks around it; empty without it."""
        return self._said.get(name, "").strip()

    @property
    def address(self) -> str:
        """Where the request comes from."""
        return self.request.client.host if self.request.client else ""

    def may(self, role: Role) -> bool:
        """Whether whoever asks is signed in as that, or more."""
        return self.user is not None and self.user.role.reaches(role)

    def local_path(self, wanted: str) -> str:
        """A path of this page and no other site's; the list of machines for anything else."""
        plain = wanted.isascii() and wanted.isprintable() and "\\" not in wanted
        if plain and wanted.startswith(f"{self.desk.base}/") and not wanted.startswith("//"):
            return wanted
        return f"{self.desk.base}/"

    def page(self, template: str, /, *, status: int = 200, **values: object) -> Response:
        """As of the desk, for whoever asks."""
        return self.desk.page(template, status=status, user=self.user, **values)

    def problem(self, status: int, *problems: Problem) -> Response:
        """As of the desk, for whoever asks."""
        return self.desk.problem(status, *problems, user=self.user)

    def form(self) -> str:
        """A token for a form on the page that is being made."""
        if self.session is None:
            raise RuntimeError("a form is shown to who is signed in")
        return self.desk.sessions.form(self.session)

    def set_cookie(self, answer: Response, name: str, text: str) -> None:
        """For this host and page, out of reach of scripts, and not sent along from other sites' forms."""
        answer.set_cookie(name, text, path="/", secure=self.desk.secure, httponly=True, samesite="lax")


def _form_of(request: Request) -> dict[str, str]:
    """The fields of a form. Raises InputError for what no form of ours sends."""
    body: bytes = request.scope.get(BODY, b"")
    try:
        pairs = parse_qsl(
            body.decode("ascii"),
            keep_blank_values=True,
            strict_parsing=bool(body),
            errors="strict",
            max_num_fields=MOST_FIELDS,
        )
    except ValueError:
        pairs = [("", "")] * 2
    if len({name for name, _ in pairs}) < len(pairs):
        raise InputError(
            Problem(where="the form", what="It isn't one of this page.", fix="Go back, and load it again.")
        )
    return dict(pairs)


def status_of(error: JamnutError) -> int:
    """The HTTP status of an error."""
    return _HTTP[error.status]


_BUG: Final = Problem(
    where="", what="This is a bug in jamnut.", fix="Please report it, with what the server printed."
)


def bug(desk: Desk, _: Request, __: Exception) -> Response:
    """The last gate: the reader gets no traceback; the error goes on to the server, which prints it."""
    return desk.problem(500, _BUG)
