"""Records one row from the record page: told by who signed in, outside its window only with an acceptance."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date, datetime
from typing import Any

from sheets.errors import InputError, Problem
from sheets.pipeline.recording import Acceptance, JobRecorded, record_answers
from sheets.register.opening import Place
from sheets.register.rows import Outcome, Row, judged


@dataclass(frozen=True, kw_only=True)
class RowForm:
    """One row as somebody filled it in; figures are digits in the unit that is printed in the row."""

    record_id: str
    row: int
    unit: str
    job: str = ""
    """Number of an open job; empty to open one."""
    why: str = ""
    found: str = ""
    reached: bool = True
    left: str = ""
    gauge: str = ""
    oil: str = ""
    seal: str = ""
    seal_number: str = ""
    at: str = ""
    people: str = ""
    """Names with commas between them."""


def acceptable(row: Row, left: str) -> bool:
    """Whether ``left``, digits as read, lies where an approver may accept it."""
    try:
        return judged(row, left) is Outcome.OUTSIDE
    except InputError:
        return False


def record_row(
    form: RowForm,
    *,
    register_at: Place,
    by: str,
    on: date,
    when: datetime,
    acceptance: Acceptance | None = None,
) -> JobRecorded:
    """Records a row, all of it or nothing; ``by`` is who signed in, ``on`` the day of the work.

    Raises RefusedError where it was left outside its window and nobody accepts that, or nobody may;
    InputError for what isn't on the sheet.
    """
    reading: dict[str, Any] = {
        "row": str(form.row),
        "as found": f"{form.found} {form.unit}" if form.found else "",
        "reached": "yes" if form.reached else "no",
        "as left": f"{form.left} {form.unit}" if form.left else "",
        "gauge": form.gauge,
        "oil": f"{form.oil} °C" if form.oil else "",
        "seal": form.seal,
        "seal number": form.seal_number,
        "at": form.at,
    }
    people = [name.strip() for name in form.people.split(",") if name.strip()]
    if not people:
        raise InputError(
            Problem(where="people", what="Nobody is named who did it.", fix="Name who read and who turned.")
        )
    answers: dict[str, Any] = {
        "format": "1",
        "record": form.record_id,
        "job": form.job,
        "why": "" if form.job else form.why,
        "day": on.isoformat(),
        "people": people,
        "from paper": "no",
        "readings": [{name: text for name, text in reading.items() if text}],
    }
    return record_answers(
        {name: said for name, said in answers.items() if said},
        register_at=register_at,
        by=by,
        when=when,
        acceptance=acceptance,
        hold_windows=True,
    )
