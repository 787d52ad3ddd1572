"""What travels in a pack: every file that it was made from, the job and layout, and its content as data.

The names are fixed: taken out into one folder, the files are found beside each other as any machine's are, so
the pack can be made again from itself. A file of another name gives the same bytes.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

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
    """The layout that a pack was printed with, from its job."""
    return Layout(paper=job["paper"], kinds=tuple(SheetKind(name) for name in job["documents"]))


def issue_of(data: Mapping[str, Any]) -> IssueContext:
    """The issue of a pack, from its attachment."""
    known = {name: value for name, value in data.items() if name != "is"}
    for name in ("signers", "as_left"):
        known[name] = tuple((left, right) for left, right in known[name])
    known["changes"] = tuple(known["changes"])
    return IssueContext(**known)
