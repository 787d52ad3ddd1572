"""Commands of the register itself: history, withdraw, copies, export, backup, restore, check, migrate."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

import click

from sheets.cli.common import BY, ON, REGISTER, day, leave, now, show, wrong

ANCHORS = click.option(
    "--anchor",
    "anchors",
    multiple=True,
    metavar="TEXT",
    help="An anchor that was kept outside.",
)


@click.command()
@click.argument("what", required=False, default="", metavar="[DOCUMENT|MACHINE|RECORD]")
@REGISTER
@click.option("--changes", is_flag=True, help="With what each revision changed, why, and who judged it.")
def history(what: str, register_at: str, changes: bool) -> None:
    """Print every event of a document, a machine or a record id, each with its number; or of all.

    Example: jamnut history WI-0147 --register demonstration/register.db
    """
    from sheets import pipeline

    show(pipeline.history(what, register_at=register_at, changes=changes))


@click.command()
@click.argument("record", metavar="RECORD")
@REGISTER
@BY
@click.option("--reason", required=True, metavar="TEXT")
def withdraw(record: str, register_at: str, by: str, reason: str) -> None:
    """Take back the current revision, by its record id; then none is current.

    \b
    Example: jamnut withdraw 0123456789 --register demonstration/register.db \\
        --by "Cleo Harnett" --reason "pump replaced by another make"
    """
    from sheets import pipeline

    ended = pipeline.withdraw(record, register_at=register_at, reason=reason, by=by, when=now())
    show([f"revision {ended.number} of {ended.document} is {ended.state.value}"])


@click.command()
@click.argument("document", metavar="DOCUMENT")
@REGISTER
@click.option("--hang", metavar="PLACE", help="A copy of the current revision hangs there.")
@click.option("--down", type=click.IntRange(min=1), metavar="N", help="Copy N was taken down.")
@click.option("--by", metavar="NAME", help="Who hung it or took it down.")
@ON
def copies(
    document: str, register_at: str, hang: str | None, down: int | None, by: str | None, on: str | None
) -> None:
    """List the numbered copies of a document; hang one, or take one down. Old ones stay open until then.

    Example: jamnut copies WI-0147 --register demonstration/register.db
    """
    from sheets import pipeline

    if hang is None and down is None:
        show(pipeline.copies_text(pipeline.copies(document, register_at=register_at)))
        return
    if hang is not None and down is not None:
        raise wrong("--hang, --down", "Both are named.", "Take one down, then hang the other.")
    if by is None:
        raise wrong("--by", "Nobody is named who did it.", "Add --by NAME.")
    if hang is not None:
        told = pipeline.hang(
            document, register_at=register_at, where=hang, by=by, on=day("--on", on), when=now()
        )
    else:
        told = pipeline.take_down(
            document, down or 0, register_at=register_at, by=by, on=day("--on", on), when=now()
        )
    show([told])


@click.command()
@REGISTER
@click.option("--as", "form", type=click.Choice(["jsonl", "csv"]), default="jsonl", show_default=True)
def export(register_at: str, form: Literal["jsonl", "csv"]) -> None:
    """Print the whole register, one event a line, as JSON Lines or CSV.

    Example: jamnut export --register demonstration/register.db
    """
    from sheets import pipeline

    for line in pipeline.export(form, register_at=register_at):
        click.echo(line, nl=False)


@click.command()
@click.argument("file", type=click.Path(path_type=Path), metavar="FILE")
@REGISTER
def backup(file: Path, register_at: str) -> None:
    """Write the whole register into a new file, checked, and print the anchor to keep with it.

    Example: jamnut backup monday.jsonl --register demonstration/register.db
    """
    from sheets import pipeline

    anchor = pipeline.backup(file, register_at=register_at)
    show([f"{file}: written", f"anchor to keep outside: {anchor}"])


@click.command()
@click.argument("file", type=click.Path(path_type=Path), metavar="FILE")
@REGISTER
@ANCHORS
def restore(file: Path, register_at: str, anchors: tuple[str, ...]) -> None:
    """Make a new register of a backup: a file, or a PostgreSQL database, whichever it came from.

    Example: jamnut restore monday.jsonl --register restored.db
    """
    from sheets import pipeline

    anchor = pipeline.restore(file, register_at=register_at, anchors=anchors)
    show(pipeline.restored_text(anchor, anchored=bool(anchors)))


@click.command("check-register")
@REGISTER
@ANCHORS
def check_register(register_at: str, anchors: tuple[str, ...]) -> None:
    """Check every event of the register, and the anchors that were kept outside of it.

    Example: jamnut check-register --register demonstration/register.db
    """
    from sheets import pipeline

    check = pipeline.check_register(register_at, anchors)
    show(pipeline.check_register_text(check))
    leave(check.status)


@click.command()
@REGISTER
@BY
def migrate(register_at: str, by: str) -> None:
    """Bring a register of an older format forward. No event is changed; keep a copy before.

    Example: jamnut migrate --register demonstration/register.db --by "Ada Quarrow"
    """
    from sheets import pipeline

    show([pipeline.migrate(register_at, by=by, when=now())])


COMMANDS = (history, withdraw, copies, export, backup, restore, check_register, migrate)
