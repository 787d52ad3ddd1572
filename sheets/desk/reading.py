"""Routes that only read."""

from __future__ import annotations

from typing import TYPE_CHECKING
from urllib.parse import urlencode

from starlette.responses import HTMLResponse, RedirectResponse, Response

from sheets import pipeline
from sheets.desk.showing import UNREADABLE
from sheets.errors import Problem
from sheets.pipeline import Paper, Role

if TYPE_CHECKING:
    from sheets.desk.showing import Visit

LONGEST_TAG = 200
NO_MACHINE = Problem(
    where="", what="Nothing can be told of such a machine.", fix="Choose one from the list of machines."
)
NO_FILE = Problem(
    where="",
    what="The signed file of this record isn't kept here.",
    fix="Only the file of a current revision is handed out. Ask the planner.",
)


def record(visit: Visit) -> Response:
    """How a paper stands: /r/<id>?d=<digest>&v=<revision>."""
    paper = Paper(
        record_id=visit.request.path_params["record_id"],
        digest=visit.request.query_params.get("d", ""),
        revision=visit.request.query_params.get("v", ""),
    )
    look = pipeline.look_at_record(visit.desk.room, paper, now=visit.desk.now())
    status = {"unknown": 404, "not_established": 503}.get(look.shown.value, 200)
    file = bool(look.file_digest) and visit.desk.room.files.holds(look.file_digest)
    if visit.user is not None:
        may = visit.may(Role.TECHNICIAN)
        return visit.page("record", status=status, look=look, may_record=may, file=file)
    kept = visit.desk.kept
    at = f"{visit.desk.now():%Y-%m-%d %H:%M} {file}"
    # The look was judged just now; what is kept is only its drawing, and only for this very look.
    body = kept.find(paper, look, at)
    if body is None:
        body = bytes(visit.page("record", status=status, look=look, may_record=False, file=file).body)
        kept.keep(paper, look, at, body)
    return HTMLResponse(body, status_code=status)


def file(visit: Visit) -> Response:
    """The signed file of a current record."""
    found = pipeline.look_at_file(
        visit.desk.room, visit.request.path_params["record_id"], now=visit.desk.now()
    )
    if found is None:
        return visit.problem(404, NO_FILE)
    name, data = found
    headers = {"Content-Disposition": f'inline; filename="{name}"'}
    return Response(data, media_type="application/pdf", headers=headers)


def find(visit: Visit) -> Response:
    """A record by what somebody typed off the paper."""
    key = pipeline.as_printed(visit.request.query_params.get("id", "")[:40])
    if not key:
        return visit.page("find")
    if not (key.isascii() and key.isalnum()):
        look = pipeline.look_at_record(visit.desk.room, Paper(record_id=key), now=visit.desk.now())
        return visit.page("record", status=404, look=look, may_record=False, file=False)
    typed = {name: visit.request.query_params.get(name, "").strip()[:40] for name in ("d", "v")}
    query = urlencode({name: text for name, text in typed.items() if text})
    return RedirectResponse(f"{visit.desk.base}/r/{key}{'?' if query else ''}{query}", status_code=303)


def machines(visit: Visit) -> Response:
    """All machines, a plain list."""
    lists = pipeline.look_at_lists(visit.desk.room, now=visit.desk.now())
    return visit.page("machines", lists=lists) if lists.whole else visit.problem(503, UNREADABLE)


def dates(visit: Visit) -> Response:
    """What is due when, a plain list."""
    lists = pipeline.look_at_lists(visit.desk.room, now=visit.desk.now())
    return visit.page("dates", lists=lists) if lists.whole else visit.problem(503, UNREADABLE)


def machine(visit: Visit) -> Response:
    """One machine: revisions, and each setting over time."""
    tag = visit.request.query_params.get("tag", "")[:LONGEST_TAG]
    look = pipeline.look_at_machine(visit.desk.room, tag, now=visit.desk.now())
    return visit.page("machine", look=look) if look is not None else visit.problem(404, NO_MACHINE)


def look_css(_: Visit) -> Response:
    """The style sheet; a page that was never cached may keep it a while."""
    return Response(pipeline.web_style(), media_type="text/css")


def no_icon(_: Visit) -> Response:
    """Browsers ask for a picture without being told to; there is none."""
    return Response(status_code=204)
