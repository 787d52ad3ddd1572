"""What travels in a pack: every file that it was made from, the job and layout, and its content as data.

The names are fixed: taken out into one folder, the files are found beside each other as any machine's are, so
the pack can be made again from itself. A file of another name gives the same bytes.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any, Final

from sheets.errors import InputError, Problem
from sheets.machine.files import SITE_FILE, WALKDOWN_ENDING
from sheets.pages.attached import Attachment
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout, SheetKind
from sheets.seal.canonical import canonical_bytes

MACHINE_NAME: Final = "machine.yaml"
SITE_NAME: Final = SITE_FILE
WALKDOWN_NAME: Final = f"machine{WALKDOWN_ENDING}"
JOB_NAME: Final = "job.json"
CONTENT_NAME: Final = "content.json"
ISSUE_NAME: Final = "issue.json"

YAML_TYPE: Final = "application/yaml"
"""RFC 9512."""
JSON_TYPE: Final = "application/json"
"""RFC 8259."""
FORMAT: Final = 1


@dataclass(frozen=True, kw_only=True)
class Job:
    """What shaped a pack beside its files: the words of a command line, and who computed it."""

    format: int
    engine: str
    task: str
    part: str
    paper: str
    documents: tuple[str, ...]


def attachments_of(
    matter: Matter, layout: Layout, content: bytes, issue: IssueContext | None = None
) -> tuple[Attachment, ...]:
    """Attachments of a pack; ``content`` is its canonical form. An issued one carries its issue too."""
    task = matter.procedure.task
    job = Job(
        format=FORMAT,
        engine=matter.engine,
        task=task.kind.value,
        part=task.part,
        paper=layout.paper,
        documents=tuple(kind.value for kind in layout.kinds),
    )
    files = (
        (MACHINE_NAME, matter.sources.machine, "machine file"),
        (SITE_NAME, matter.sources.site, "site file"),
        (WALKDOWN_NAME, matter.sources.walkdown, "walk-down of the machine"),
    )
    return (
        *(
            Attachment(
                name=name, media_type=YAML_TYPE, data=data, relationship="Source", description=description
            )
            for name, data, description in files
            if data is not None
        ),
        Attachment(
            name=JOB_NAME,
            media_type=JSON_TYPE,
            data=canonical_bytes(job),
            relationship="Source",
            description="task and layout",
        ),
        Attachment(
            name=CONTENT_NAME,
            media_type=JSON_TYPE,
            data=content,
            relationship="Data",
            description="what the sheets say, as the digest is taken from it",
        ),
        *(
            (
                Attachment(
                    name=ISSUE_NAME,
                    media_type=JSON_TYPE,
                    data=canonical_bytes(issue),
                    relationship="Data",
                    description="revision, date and signers",
                ),
            )
            if issue is not None
            else ()
        ),
    )


def layout_of(job: Mapping[str, Any]) -> Layout:
    """The layout that a pack was printed with, from its job. Raises as reading a wrong one does."""
    return Layout(paper=job["paper"], kinds=tuple(SheetKind(name) for name in job["documents"]))


def issue_in(held: Mapping[str, bytes]) -> IssueContext | None:
    """The issue that travels in a pack; None in a draft. Raises InputError if it can't be read as one."""
    if ISSUE_NAME not in held:
        return None
    try:
        return _issue_of(held[ISSUE_NAME])
    except (AttributeError, KeyError, TypeError, ValueError, RecursionError):
        raise InputError(
            Problem(
                where=ISSUE_NAME,
                what="The issue that travels in the file isn't of the form of one.",
                fix="Give the pack as it was written.",
            )
        ) from None


def _issue_of(text: bytes) -> IssueContext:
    """Raises whatever reading another form raises, and ValueError for one that reads but isn't ours."""
    known = {name: value for name, value in json.loads(text).items() if name != "is"}
    for name in ("signers", "as_left"):
        known[name] = tuple((left, right) for left, right in known[name])
    known["changes"] = tuple(known["changes"])
    issue = IssueContext(**known)
    if not _all_text(vars(issue).values()) or canonical_bytes(issue) != text:
        raise ValueError("another form")
    return issue


def _all_text(values: Iterable[object]) -> bool:
    return all(isinstance(value, str) or (isinstance(value, tuple) and _all_text(value)) for value in values)
