"""Joins the stages: a table of contents, one function a verb.

Each name below stands in the module behind it, which is imported when the name is first asked for: reading a
machine file must not wait for what draws pages or signs them.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any, Final

from sheets.errors import InputError, Problem

if TYPE_CHECKING:
    from sheets.crockford import as_printed as as_printed
    from sheets.machine.answering import Answers as Answers
    from sheets.machine.files import machine_files as machine_files
    from sheets.machine.walking import WalkdownState as WalkdownState
    from sheets.pipeline.admitting import Role as Role
    from sheets.pipeline.admitting import User as User
    from sheets.pipeline.admitting import remove_user as remove_user
    from sheets.pipeline.admitting import set_user as set_user
    from sheets.pipeline.admitting import user_named as user_named
    from sheets.pipeline.admitting import users as users
    from sheets.pipeline.admitting import users_of as users_of
    from sheets.pipeline.asking import current as current
    from sheets.pipeline.asking import current_text as current_text
    from sheets.pipeline.asking import deviations as deviations
    from sheets.pipeline.asking import deviations_text as deviations_text
    from sheets.pipeline.asking import used as used
    from sheets.pipeline.asking import used_text as used_text
    from sheets.pipeline.auditing import audit as audit
    from sheets.pipeline.auditing import audit_text as audit_text
    from sheets.pipeline.authorising import authorise as authorise
    from sheets.pipeline.authorising import end_authorisation as end_authorisation
    from sheets.pipeline.authorising import people as people
    from sheets.pipeline.authorising import people_json as people_json
    from sheets.pipeline.authorising import people_text as people_text
    from sheets.pipeline.authorising import train as train
    from sheets.pipeline.comparing import diff as diff
    from sheets.pipeline.comparing import diff_json as diff_json
    from sheets.pipeline.comparing import diff_text as diff_text
    from sheets.pipeline.computing import issuable as issuable
    from sheets.pipeline.computing import issuable_text as issuable_text
    from sheets.pipeline.computing import skew as skew
    from sheets.pipeline.computing import skew_json as skew_json
    from sheets.pipeline.computing import skew_status as skew_status
    from sheets.pipeline.computing import skew_text as skew_text
    from sheets.pipeline.computing import status_of as status_of
    from sheets.pipeline.computing import steps as steps
    from sheets.pipeline.computing import steps_json as steps_json
    from sheets.pipeline.computing import steps_text as steps_text
    from sheets.pipeline.computing import targets as targets
    from sheets.pipeline.computing import targets_json as targets_json
    from sheets.pipeline.computing import targets_text as targets_text
    from sheets.pipeline.computing import task_of as task_of
    from sheets.pipeline.computing import why_json as why_json
    from sheets.pipeline.computing import why_text as why_text
    from sheets.pipeline.demonstrating import demo as demo
    from sheets.pipeline.demonstrating import demo_text as demo_text
    from sheets.pipeline.describing import Described as Described
    from sheets.pipeline.describing import check as check
    from sheets.pipeline.describing import check_json as check_json
    from sheets.pipeline.describing import check_text as check_text
    from sheets.pipeline.gauging import gauge_found_bad as gauge_found_bad
    from sheets.pipeline.gauging import instruments as instruments
    from sheets.pipeline.gauging import instruments_json as instruments_json
    from sheets.pipeline.gauging import instruments_text as instruments_text
    from sheets.pipeline.gauging import list_gauge as list_gauge
    from sheets.pipeline.inspecting import inspect as inspect
    from sheets.pipeline.inspecting import inspected_text as inspected_text
    from sheets.pipeline.inspecting import inspections_json as inspections_json
    from sheets.pipeline.inspecting import inspections_on as inspections_on
    from sheets.pipeline.inspecting import inspections_text as inspections_text
    from sheets.pipeline.issuing import issue as issue
    from sheets.pipeline.issuing import issued_text as issued_text
    from sheets.pipeline.keying import keys as keys
    from sheets.pipeline.lists_shown import look_at_lists as look_at_lists
    from sheets.pipeline.lists_shown import look_at_machine as look_at_machine
    from sheets.pipeline.looking import Paper as Paper
    from sheets.pipeline.looking import RecordLook as RecordLook
    from sheets.pipeline.looking import look_at_file as look_at_file
    from sheets.pipeline.looking import look_at_record as look_at_record
    from sheets.pipeline.many import Writing as Writing
    from sheets.pipeline.many import outcome_of_check as outcome_of_check
    from sheets.pipeline.many import outcome_of_pack as outcome_of_pack
    from sheets.pipeline.many import outcome_of_steps as outcome_of_steps
    from sheets.pipeline.many import outcome_of_targets as outcome_of_targets
    from sheets.pipeline.page_recording import RowForm as RowForm
    from sheets.pipeline.page_recording import acceptable as acceptable
    from sheets.pipeline.page_recording import record_row as record_row
    from sheets.pipeline.persons import Signing as Signing
    from sheets.pipeline.printing import content as content
    from sheets.pipeline.printing import draft_name as draft_name
    from sheets.pipeline.printing import layout_named as layout_named
    from sheets.pipeline.printing import pack as pack
    from sheets.pipeline.printing import write_pack as write_pack
    from sheets.pipeline.reading_room import DeskSettings as DeskSettings
    from sheets.pipeline.reading_room import ReadingRoom as ReadingRoom
    from sheets.pipeline.recording import Acceptance as Acceptance
    from sheets.pipeline.recording import end as end
    from sheets.pipeline.recording import record as record
    from sheets.pipeline.recording import record_answers as record_answers
    from sheets.pipeline.recording import record_rows as record_rows
    from sheets.pipeline.recording import recorded_text as recorded_text
    from sheets.pipeline.recording import settle as settle
    from sheets.pipeline.recording import strike as strike
    from sheets.pipeline.recording import wrong_answer as wrong_answer
    from sheets.pipeline.registering import backup as backup
    from sheets.pipeline.registering import check_register as check_register
    from sheets.pipeline.registering import check_register_text as check_register_text
    from sheets.pipeline.registering import copies as copies
    from sheets.pipeline.registering import copies_text as copies_text
    from sheets.pipeline.registering import export as export
    from sheets.pipeline.registering import hang as hang
    from sheets.pipeline.registering import history as history
    from sheets.pipeline.registering import migrate as migrate
    from sheets.pipeline.registering import restore as restore
    from sheets.pipeline.registering import restored_text as restored_text
    from sheets.pipeline.registering import take_down as take_down
    from sheets.pipeline.registering import withdraw as withdraw
    from sheets.pipeline.reproving import reprove as reprove
    from sheets.pipeline.reproving import reprove_json as reprove_json
    from sheets.pipeline.reproving import reprove_text as reprove_text
    from sheets.pipeline.serving import serve as serve
    from sheets.pipeline.settings_shown import SettingShown as SettingShown
    from sheets.pipeline.signing import reject as reject
    from sheets.pipeline.signing import sign as sign
    from sheets.pipeline.starting import new as new
    from sheets.pipeline.starting import starter_kinds as starter_kinds
    from sheets.pipeline.tagging import post as post
    from sheets.pipeline.tagging import tags as tags
    from sheets.pipeline.verifying import verify as verify
    from sheets.pipeline.verifying import verify_failed_json as verify_failed_json
    from sheets.pipeline.verifying import verify_json as verify_json
    from sheets.pipeline.verifying import verify_text as verify_text
    from sheets.pipeline.walking import walkdown as walkdown
    from sheets.pipeline.walking import walkdown_json as walkdown_json
    from sheets.pipeline.walking import walkdown_questions as walkdown_questions
    from sheets.pipeline.walking import walkdown_standing as walkdown_standing
    from sheets.pipeline.walking import walkdown_text_lines as walkdown_text_lines
    from sheets.pipeline.walking import write_walkdown as write_walkdown
    from sheets.pipeline.zeroing import zeros as zeros
    from sheets.pipeline.zeroing import zeros_text as zeros_text
    from sheets.register.saying import day_of as day_of
    from sheets.wording.plain import Json as Json
    from sheets.wording.summary import Outcome as Outcome
    from sheets.wording.summary import broken as broken
    from sheets.wording.summary import summary_json as summary_json
    from sheets.wording.summary import summary_lines as summary_lines
    from sheets.wording.web import web_page as web_page
    from sheets.wording.web import web_style as web_style

_CONTENTS: Final[dict[str, str]] = {
    # read a machine
    "Described": "pipeline.describing",
    "check": "pipeline.describing",
    "check_json": "pipeline.describing",
    "check_text": "pipeline.describing",
    # begin one
    "new": "pipeline.starting",
    "starter_kinds": "pipeline.starting",
    # compare it with the machine itself
    "Answers": "machine.answering",
    "WalkdownState": "machine.walking",
    "walkdown": "pipeline.walking",
    "walkdown_json": "pipeline.walking",
    "walkdown_questions": "pipeline.walking",
    "walkdown_standing": "pipeline.walking",
    "walkdown_text_lines": "pipeline.walking",
    "write_walkdown": "pipeline.walking",
    # compute settings and the job
    "targets": "pipeline.computing",
    "targets_json": "pipeline.computing",
    "targets_text": "pipeline.computing",
    "task_of": "pipeline.computing",
    "steps": "pipeline.computing",
    "steps_json": "pipeline.computing",
    "steps_text": "pipeline.computing",
    "skew_json": "pipeline.computing",
    "why_json": "pipeline.computing",
    "why_text": "pipeline.computing",
    "skew": "pipeline.computing",
    "skew_status": "pipeline.computing",
    "skew_text": "pipeline.computing",
    "status_of": "pipeline.computing",
    "issuable": "pipeline.computing",
    "issuable_text": "pipeline.computing",
    # print it
    "content": "pipeline.printing",
    "draft_name": "pipeline.printing",
    "pack": "pipeline.printing",
    "write_pack": "pipeline.printing",
    # compare two machines
    "diff": "pipeline.comparing",
    "diff_json": "pipeline.comparing",
    "diff_text": "pipeline.comparing",
    # stand behind it
    "keys": "pipeline.keying",
    "Signing": "pipeline.persons",
    "issue": "pipeline.issuing",
    "issued_text": "pipeline.issuing",
    "sign": "pipeline.signing",
    "reject": "pipeline.signing",
    "layout_named": "pipeline.printing",
    "demo": "pipeline.demonstrating",
    "demo_text": "pipeline.demonstrating",
    # judge it
    "verify": "pipeline.verifying",
    "verify_failed_json": "pipeline.verifying",
    "verify_json": "pipeline.verifying",
    "verify_text": "pipeline.verifying",
    # who works with what
    "day_of": "register.saying",
    "people": "pipeline.authorising",
    "people_json": "pipeline.authorising",
    "people_text": "pipeline.authorising",
    "authorise": "pipeline.authorising",
    "end_authorisation": "pipeline.authorising",
    "train": "pipeline.authorising",
    "instruments": "pipeline.gauging",
    "instruments_json": "pipeline.gauging",
    "instruments_text": "pipeline.gauging",
    "list_gauge": "pipeline.gauging",
    "gauge_found_bad": "pipeline.gauging",
    # what an auditor asks
    "audit": "pipeline.auditing",
    "audit_text": "pipeline.auditing",
    "current": "pipeline.asking",
    "current_text": "pipeline.asking",
    "deviations": "pipeline.asking",
    "deviations_text": "pipeline.asking",
    "zeros": "pipeline.zeroing",
    "zeros_text": "pipeline.zeroing",
    "used": "pipeline.asking",
    "used_text": "pipeline.asking",
    "reprove": "pipeline.reproving",
    "reprove_json": "pipeline.reproving",
    "reprove_text": "pipeline.reproving",
    "inspect": "pipeline.inspecting",
    "inspected_text": "pipeline.inspecting",
    "inspections_json": "pipeline.inspecting",
    "inspections_on": "pipeline.inspecting",
    "inspections_text": "pipeline.inspecting",
    # show it on a screen
    "look_at_machine": "pipeline.lists_shown",
    "look_at_lists": "pipeline.lists_shown",
    "SettingShown": "pipeline.settings_shown",
    "Acceptance": "pipeline.recording",
    "acceptable": "pipeline.page_recording",
    "RowForm": "pipeline.page_recording",
    "record_row": "pipeline.page_recording",
    "Role": "pipeline.admitting",
    "User": "pipeline.admitting",
    "users": "pipeline.admitting",
    "users_of": "pipeline.admitting",
    "user_named": "pipeline.admitting",
    "set_user": "pipeline.admitting",
    "remove_user": "pipeline.admitting",
    "as_printed": "crockford",
    "DeskSettings": "pipeline.reading_room",
    "serve": "pipeline.serving",
    "ReadingRoom": "pipeline.reading_room",
    "Paper": "pipeline.looking",
    "RecordLook": "pipeline.looking",
    "look_at_record": "pipeline.looking",
    "look_at_file": "pipeline.looking",
    "web_page": "wording.web",
    "web_style": "wording.web",
    # ask the register
    "backup": "pipeline.registering",
    "check_register": "pipeline.registering",
    "check_register_text": "pipeline.registering",
    "copies": "pipeline.registering",
    "copies_text": "pipeline.registering",
    "export": "pipeline.registering",
    "hang": "pipeline.registering",
    "history": "pipeline.registering",
    "migrate": "pipeline.registering",
    "restore": "pipeline.registering",
    "restored_text": "pipeline.registering",
    "take_down": "pipeline.registering",
    "withdraw": "pipeline.registering",
    # record what was found and left, with what, and what hangs
    "end": "pipeline.recording",
    "record": "pipeline.recording",
    "record_answers": "pipeline.recording",
    "record_rows": "pipeline.recording",
    "wrong_answer": "pipeline.recording",
    "recorded_text": "pipeline.recording",
    "settle": "pipeline.recording",
    "strike": "pipeline.recording",
    "post": "pipeline.tagging",
    "tags": "pipeline.tagging",
    # many machines at once
    "machine_files": "machine.files",
    "Writing": "pipeline.many",
    "Outcome": "wording.summary",
    "broken": "wording.summary",
    "outcome_of_check": "pipeline.many",
    "outcome_of_pack": "pipeline.many",
    "outcome_of_steps": "pipeline.many",
    "outcome_of_targets": "pipeline.many",
    "summary_json": "wording.summary",
    "summary_lines": "wording.summary",
}
"""Every name of this package to the module, below ``sheets``, that it stands in."""


_EXTRA: Final = (
    "asn1crypto",
    "cryptography",
    "fontTools",
    "jsonschema",
    "pikepdf.pdfa",
    "pyhanko",
    "referencing",
    "sqlalchemy",
)
"""Libraries of the extra named site: what stands behind a sheet needs them, a draft doesn't."""
_PASSWORDS: Final = "argon2"
"""The library of the extra named desk that isn't a server's."""


def __getattr__(name: str) -> Any:  # whatever the module behind it holds
    if name not in _CONTENTS:
        raise AttributeError(f"{__name__} has no {name}")
    try:
        return getattr(import_module(f"sheets.{_CONTENTS[name]}"), name)
    except ImportError as error:
        missing = error.name or str(error)  # one of them tells the name in words only
        if missing.startswith(_PASSWORDS):
            raise InputError(
                Problem(
                    where="this installation",
                    what=f"Signing in at the record page needs the library {_PASSWORDS}.",
                    fix="Install it with the extra named desk: python -m pip install '.[desk]'",
                )
            ) from None
        library = next((one for one in _EXTRA if missing.startswith(one)), None)
        if library is None:
            raise
        raise InputError(
            Problem(
                where="this installation",
                what=f"It can print drafts; keys, signatures and the register need the library {library}.",
                fix="Install it with the extra named site: python -m pip install '.[site]'",
            )
        ) from None
