"""Commands of what an auditor asks: inspections, the bundle, what would come out otherwise today."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

import click

from sheets.cli.common import ANCHORS, AS_JSON, REGISTER, day, leave, now, show, tell, today, wrong


@click.command()
@click.argument("document", metavar="DOCUMENT", required=False)
@REGISTER
@click.option("--on", metavar="DATE", help="Day of the inspection; without one, due dates as of this day.")
@click.option("--inspector", metavar="NAME", help="Tell of an inspection: who did it. No user of the sheets.")
@click.option("--with", "employees", multiple=True, metavar="NAME", help="One who was included.")
@click.option("--deviation", "deviations", multiple=True, metavar="TEXT", help="What was found otherwise.")
@click.option("--correction", "corrections", multiple=True, metavar="TEXT", help="Of the first --deviation.")
@click.option("--record", "record_id", metavar="RECORD", help="Of the sheets inspected, if not the current.")
@click.option("--by", metavar="NAME", help="Who tells the register, if not the inspector.")
@AS_JSON
def inspect(
    document: str | None,
    register_at: str,
    on: str | None,
    inspector: str | None,
    employees: tuple[str, ...],
    deviations: tuple[str, ...],
    corrections: tuple[str, ...],
    record_id: str | None,
    by: str | None,
    as_json: bool,
) -> None:
    """Show which yearly inspections are due and done; tell of one, by a person who doesn't use the procedure.

    DOCUMENT is a document number, a record id, or the tag of a machine.

    \b
    Example: jamnut inspect WI-0147 --register demonstration/register.db \\
        --inspector "Edda Fenn" --with "Ada Quarrow" --with "Bram Tolliver"
    """
    from sheets import pipeline

    if inspector is None:
        if employees or deviations or corrections or record_id or by:
            raise wrong("--inspector", "Who inspected isn't named.", "Add --inspector NAME.")
        found = pipeline.inspections_on(register_at, day=day("--on", on), document=document)
        show(pipeline.inspections_json(found) if as_json else pipeline.inspections_text(found))
        leave(found.status)
        return
    if document is None:
        raise wrong("DOCUMENT", "What was inspected isn't named.", "Give its document number.")
    made, left = pipeline.inspect(
        register_at,
        document=document,
        record_id=record_id,
        inspector=inspector,
        employees=employees,
        on=day("--on", on),
        deviations=deviations,
        corrections=corrections,
        by=by or inspector,
        today=today(),
        when=now(),
    )
    show(pipeline.inspected_text(made, left))


@click.command()
@click.argument("file", type=click.Path(path_type=Path), metavar="FILE")
@REGISTER
@ANCHORS
@click.option("--paper", type=click.Choice(["A4", "Letter"]), default="A4", show_default=True)
def audit(file: Path, register_at: str, anchors: tuple[str, ...], paper: Literal["A4", "Letter"]) -> None:
    """Write what the register says today: one PDF, and each of its lists as CSV beside it.

    Machines, revisions, inspections due and done, copies, deviations, instruments and people; each line
    names the event that it follows from.

    Example: jamnut audit demonstration/audit.pdf --register demonstration/register.db
    """
    from sheets import pipeline

    made = pipeline.audit(register_at, file, anchors=anchors, day=today(), paper=paper)
    show(pipeline.audit_text(made))


@click.command()
@click.argument("document", metavar="DOCUMENT", required=False)
@REGISTER
@AS_JSON
def reprove(document: str | None, register_at: str, as_json: bool) -> None:
    """Say which issued packs would come out otherwise today: makes each current one again, replaces nothing.

    Exit status 1 if one differs or would be refused. DOCUMENT as for inspect; without it, all.

    Example: jamnut reprove --register demonstration/register.db
    """
    from sheets import pipeline

    made = pipeline.reprove(
        register_at, given=document, telling=lambda one: tell(f"making {one} again by the present engine")
    )
    show(pipeline.reprove_json(made) if as_json else pipeline.reprove_text(made))
    leave(made.status)


COMMANDS = (inspect, audit, reprove)
