"""Signing in and out."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from starlette.responses import RedirectResponse

from sheets import pipeline
from sheets.errors import Problem

if TYPE_CHECKING:
    from starlette.responses import Response

    from sheets.desk.showing import Visit

FORM_COOKIE: Final = "jamnut-form"
WRONG: Final = Problem(
    where="",
    what="Name and password don't belong together.",
    fix="Write the name as it stands on the sheets.",
)
STALE: Final = Problem(
    where="", what="This form has been sent before, or is too old.", fix="Fill in the fresh one below."
)


def show_form(
    visit: Visit, *problems: Problem, status: int = 200, name: str = "", wait_s: int = 0
) -> Response:
    """The form; ``wait_s``: seconds to wait before it is of use."""
    cookie, form = visit.desk.gate.form()
    answer = visit.page(
        "sign_in",
        status=status,
        form=form,
        to=visit.local_path(visit.said("to") or visit.request.query_params.get("to", "")),
        name=name,
        problems=problems,
    )
    visit.set_cookie(answer, FORM_COOKIE, cookie)
    if wait_s:
        answer.headers["Retry-After"] = str(wait_s)
    return answer


def ask(visit: Visit) -> Response:
    """The page to sign in."""
    return show_form(visit)


def sign_in(visit: Visit) -> Response:
    """Judges name and password, and begins a session with a new token."""
    gate = visit.desk.gate
    name, password = visit.said("name"), visit.said("password")
    if not gate.ours(visit.cookie(FORM_COOKIE), visit.said("form")):
        return show_form(visit, STALE, status=403, name=name)
    if wait_s := gate.addresses.take(visit.address) or gate.names.take(name):
        minutes = -(-wait_s // 60)
        late = Problem(
            where="", what="Too many wrong passwords.", fix=f"Wait {minutes} minutes, or ask the planner."
        )
        return show_form(visit, late, status=429, name=name, wait_s=wait_s)
    with gate.turn:
        user = pipeline.user_named(visit.desk.users(), name, password)
    if user is None:
        return show_form(visit, WRONG, status=403, name=name)
    gate.names.forget(name)
    visit.desk.sessions.end(visit.token)
    answer = RedirectResponse(visit.local_path(visit.said("to")), status_code=303)
    visit.set_cookie(answer, visit.desk.cookie, visit.desk.sessions.begin(user))
    return answer


def ask_out(visit: Visit, /, *problems: Problem, status: int = 200) -> Response:
    """The page to sign out: a link alone must not do it."""
    return visit.page("sign_out", status=status, form=visit.form(), problems=problems)


def sign_out(visit: Visit) -> Response:
    """Ends the session."""
    visit.desk.sessions.end(visit.token)
    answer = RedirectResponse(f"{visit.desk.base}/", status_code=303)
    answer.delete_cookie(visit.desk.cookie, path="/", secure=visit.desk.secure, httponly=True, samesite="lax")
    return answer
