"""Making pages: the values that every page has, and one gate for every error."""

from __future__ import annotations

import logging
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from starlette.responses import HTMLResponse

from sheets import pipeline
from sheets.errors import ExitStatus, JamnutError, Problem

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime

    from starlette.requests import Request
    from starlette.responses import Response

    from sheets.pipeline import ReadingRoom

LOG: Final = logging.getLogger("jamnut.desk")
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
_UNREADABLE: Final = Problem(
    where="",
    what="The register can't be read, so nothing can be told from it.",
    fix="Nothing here says whether a paper is current. Telephone the planner.",
)


@dataclass(frozen=True, kw_only=True)
class Desk:
    """What all routes share."""

    room: ReadingRoom
    now: Callable[[], datetime]
    base: str
    """Path under which it is reached, without a closing slash: that of the site's record address."""

    def page(self, name: str, *, status: int = 200, person: str = "", **values: object) -> Response:
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
            "person": person,
            "signing_in": self.room.settings.users is not None,
        }
        return HTMLResponse(pipeline.web_page(name, frame | values), status_code=status)

    def problem(self, status: int, *problems: Problem, person: str = "") -> Response:
        """A page that says why not."""
        return self.page(
            "problem",
            status=status,
            code=status,
            person=person,
            heading=_HEADINGS.get(status, "refused"),
            problems=problems,
        )

    def unread(self, error: JamnutError) -> Response:
        """The register didn't answer: what is wrong with it is told to the log, not to the reader."""
        LOG.error("the register can't be read: %s", error)
        return self.problem(503, _UNREADABLE)


def status_of(error: JamnutError) -> int:
    """The HTTP status of an error."""
    return _HTTP[error.status]


_BUG: Final = Problem(
    where="", what="This is a bug in jamnut.", fix="Please report it, with what the server printed."
)


def bug(desk: Desk, _: Request, __: Exception) -> Response:
    """The last gate: the reader gets no traceback; the error goes on to the server, which prints it."""
    return desk.problem(500, _BUG)
