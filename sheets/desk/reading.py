"""Routes that only read."""

from __future__ import annotations

from typing import TYPE_CHECKING
from urllib.parse import urlencode

from starlette.responses import RedirectResponse, Response

from sheets import pipeline
from sheets.errors import Problem
from sheets.pipeline import Paper

if TYPE_CHECKING:
    from starlette.requests import Request

    from sheets.desk.showing import Desk

NO_FILE = Problem(
    where="",
    what="The signed file of this record isn't kept here.",
    fix="Only the file of a current revision is handed out. Ask the planner.",
)


def record(desk: Desk, request: Request) -> Response:
    """How a paper stands: /r/<id>?d=<digest>&v=<revision>."""
    paper = Paper(
        record_id=request.path_params["record_id"],
        digest=request.query_params.get("d", ""),
        revision=request.query_params.get("v", ""),
    )
    look = pipeline.look_at_record(desk.room, paper, now=desk.now())
    status = {"unknown": 404, "not_established": 503}.get(look.shown.value, 200)
    return desk.page("record", status=status, look=look)


def file(desk: Desk, request: Request) -> Response:
    """The signed file of a current record."""
    found = pipeline.look_at_file(desk.room, request.path_params["record_id"], now=desk.now())
    if found is None:
        return desk.problem(404, NO_FILE)
    name, data = found
    headers = {"Content-Disposition": f'inline; filename="{name}"'}
    return Response(data, media_type="application/pdf", headers=headers)


def find(desk: Desk, request: Request) -> Response:
    """A record by what somebody typed off the paper."""
    key = pipeline.as_printed(request.query_params.get("id", "")[:40])
    if not key:
        return desk.page("find")
    if not (key.isascii() and key.isalnum()):
        look = pipeline.look_at_record(desk.room, Paper(record_id=key), now=desk.now())
        return desk.page("record", status=404, look=look)
    typed = {name: request.query_params.get(name, "").strip()[:40] for name in ("d", "v")}
    query = urlencode({name: text for name, text in typed.items() if text})
    return RedirectResponse(f"{desk.base}/r/{key}{'?' if query else ''}{query}", status_code=303)


def look_css(_: Desk, __: Request) -> Response:
    """The style sheet; a page that was never cached may keep it a while."""
    return Response(pipeline.web_style(), media_type="text/css")
