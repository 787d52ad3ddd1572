"""Routes that write: readings, deviations, tags; by the functions that the commands call, too."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import TYPE_CHECKING, Final

from starlette.responses import RedirectResponse, Response

from sheets import pipeline
from sheets.errors import InputError, JamnutError, Problem
from sheets.pipeline import Acceptance, Paper, Role, RowForm

if TYPE_CHECKING:
    from sheets.desk.showing import Visit
    from sheets.pipeline import RecordLook, SettingShown

NO_ROW: Final = Problem(
    where="", what="Nothing can be recorded there.", fix="Open the current revision, and choose a row of it."
)
NOT_APPROVER: Final = Problem(
    where="acceptance",
    what="Name and password aren't those of an approver.",
    fix="An approver who neither read nor turned gives both, and says why.",
)
NO_REASON: Final = Problem(where="acceptance", what="Nothing says why.", fix="Write why it may stay so.")
SLOW: Final = Problem(where="acceptance", what="Too many wrong passwords.", fix="Wait, or ask the planner.")
STATUSES: Final = {1: 409, 2: 422, 3: 503}


def ask_row(visit: Visit, /, *problems: Problem, status: int = 200) -> Response:
    """The form for one row of the record sheet."""
    found = _row(visit)
    if found is None:
        return visit.problem(404, NO_ROW)
    return _row_form(visit, *found, *problems, status=status)


def record_row(visit: Visit) -> Response:
    """Records a row, with the acceptance that it may need, or says why not."""
    found = _row(visit)
    if found is None:
        return visit.problem(409, NO_ROW)
    look, setting = found
    if visit.user is None or look.revision is None:
        raise RuntimeError("a form is taken from who is signed in")
    room = visit.desk.room
    now = visit.desk.now()
    form = RowForm(
        record_id=look.revision.record_id,
        row=setting.row.row,
        unit=setting.row.unit,
        job=visit.said("job"),
        why=visit.said("why"),
        found=visit.said("found"),
        reached=not visit.said("unreached"),
        left=visit.said("left"),
        gauge=visit.said("gauge"),
        oil=visit.said("oil"),
        seal=visit.said("seal"),
        seal_number=visit.said("seal_number"),
        at=visit.said("at"),
        people=visit.said("people"),
    )
    try:
        acceptance = _acceptance(visit)
        pipeline.record_row(
            form,
            register_at=room.settings.register_at,
            by=visit.user.name,
            on=pipeline.day_of("day", visit.said("on")),
            when=now,
            acceptance=acceptance,
        )
    except JamnutError as error:
        outside = pipeline.acceptable(setting.row, form.left)
        status = STATUSES[int(error.status)]
        return _row_form(visit, look, setting, *error.problems, status=status, outside=outside)
    return _back(visit, look)


def ask_deviation(visit: Visit, /, *problems: Problem, status: int = 200) -> Response:
    """The form for an open deviation of a record's machine."""
    found = _deviation(visit)
    if found is None:
        return visit.problem(404, NO_ROW)
    return _deviation_form(visit, *found, *problems, status=status)


def settle(visit: Visit) -> Response:
    """Ends a deviation: accepted by an approver, or put right."""
    found = _deviation(visit)
    if found is None or visit.user is None:
        return visit.problem(409, NO_ROW)
    look, number = found
    accepted, done = visit.said("accepted"), visit.said("done")
    if accepted and not visit.may(Role.APPROVER):
        return _deviation_form(visit, look, number, NOT_APPROVER, status=403)
    try:
        pipeline.settle(
            number,
            register_at=visit.desk.room.settings.register_at,
            accepted=accepted,
            done=done,
            by=visit.user.name,
            on=visit.desk.room.day(visit.desk.now()),
            when=visit.desk.now(),
        )
    except JamnutError as error:
        return _deviation_form(visit, look, number, *error.problems, status=STATUSES[int(error.status)])
    return _back(visit, look)


def ask_tag(visit: Visit, /, *problems: Problem, status: int = 200) -> Response:
    """The form that tells of a setting tag at the machine."""
    look = _current(visit)
    if look is None:
        return visit.problem(404, NO_ROW)
    return _tag_form(visit, look, *problems, status=status)


def post_tag(visit: Visit) -> Response:
    """A tag hangs at the machine."""
    look = _current(visit)
    if look is None or look.revision is None or visit.user is None:
        return visit.problem(409, NO_ROW)
    try:
        with visit.desk.gate.turn:  # the pack is made again, which takes a while and a core
            pipeline.post(
                look.revision.record_id,
                visit.said("adjuster"),
                register_at=visit.desk.room.settings.register_at,
                where=visit.said("where"),
                by=visit.user.name,
                on=visit.desk.room.day(visit.desk.now()),
                when=visit.desk.now(),
            )
    except JamnutError as error:
        return _tag_form(visit, look, *error.problems, status=STATUSES[int(error.status)])
    return _back(visit, look)


def tags(visit: Visit) -> Response:
    """The setting tags with what was left, to print."""
    look = _current(visit)
    if look is None or look.revision is None:
        return visit.problem(404, NO_ROW)
    with tempfile.TemporaryDirectory(prefix="jamnut-tags-") as folder, visit.desk.gate.turn:
        file = Path(folder) / "tags.pdf"
        try:
            pipeline.tags(look.revision.record_id, file, register_at=visit.desk.room.settings.register_at)
        except JamnutError as error:
            return visit.problem(STATUSES[int(error.status)], *error.problems)
        data = file.read_bytes()
    name = f"{look.revision.record_id}-tags.pdf"
    headers = {"Content-Disposition": f'inline; filename="{name}"'}
    return Response(data, media_type="application/pdf", headers=headers)


def _current(visit: Visit) -> RecordLook | None:
    paper = Paper(record_id=visit.request.path_params["record_id"])
    look = pipeline.look_at_record(visit.desk.room, paper, now=visit.desk.now())
    return look if look.good and look.settings else None


def _row(visit: Visit) -> tuple[RecordLook, SettingShown] | None:
    look = _current(visit)
    number = visit.request.path_params["row"]
    if look is None:
        return None
    return next(((look, one) for one in look.settings if one.row.row == number), None)


def _deviation(visit: Visit) -> tuple[RecordLook, int] | None:
    look = _current(visit)
    number = visit.request.path_params["number"]
    if look is None or number not in {one.number for one in look.open}:
        return None
    return look, number


def _acceptance(visit: Visit) -> Acceptance | None:
    """Who answers for it, by name and password at this very form. Raises InputError."""
    name = visit.said("accept_name")
    if not name:
        return None
    gate = visit.desk.gate
    if gate.addresses.take(visit.address) or gate.names.take(name):
        raise InputError(SLOW)
    with gate.turn:
        user = pipeline.user_named(visit.desk.users(), name, visit.said("accept_password"))
    if user is None or not user.role.reaches(Role.APPROVER):
        raise InputError(NOT_APPROVER)
    gate.names.forget(name)
    if not visit.said("accept_why"):
        raise InputError(
            Problem(where="acceptance", what="Nothing says why.", fix="Write why it may stay so.")
        )
    return Acceptance(by=user.name, why=visit.said("accept_why"))


def _row_form(
    visit: Visit,
    look: RecordLook,
    setting: SettingShown,
    *problems: Problem,
    status: int = 200,
    outside: bool = False,
) -> Response:
    """The form with what was filled in; ``outside``: with the fields of an acceptance."""
    fields = ("job", "why", "found", "unreached", "left", "gauge", "oil", "seal", "seal_number", "at")
    said = {name: visit.said(name) for name in fields}
    said["people"] = visit.said("people") or (visit.user.name if visit.user else "")
    said["on"] = visit.said("on") or visit.desk.room.day(visit.desk.now()).isoformat()
    said["accept_name"], said["accept_why"] = visit.said("accept_name"), visit.said("accept_why")
    return visit.page(
        "row",
        status=status,
        form=visit.form(),
        look=look,
        one=setting,
        said=said,
        problems=problems,
        outside=outside,
    )


def _deviation_form(
    visit: Visit, look: RecordLook, number: int, *problems: Problem, status: int = 200
) -> Response:
    one = next(one for one in look.open if one.number == number)
    return visit.page(
        "deviation",
        status=status,
        form=visit.form(),
        look=look,
        one=one,
        may_accept=visit.may(Role.APPROVER) and one.acceptable,
        said={name: visit.said(name) for name in ("accepted", "done")},
        problems=problems,
    )


def _tag_form(visit: Visit, look: RecordLook, *problems: Problem, status: int = 200) -> Response:
    said = {name: visit.said(name) for name in ("adjuster", "where")}
    return visit.page("tag", status=status, form=visit.form(), look=look, said=said, problems=problems)


def _back(visit: Visit, look: RecordLook) -> Response:
    return RedirectResponse(f"{visit.desk.base}/r/{look.key}", status_code=303)
