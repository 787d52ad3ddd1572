"""Commands of what somebody asks with a paper in hand: is it current, what was used, what is open."""

from __future__ import annotations

import click

from sheets.cli.common import ANCHORS, REGISTER, day, leave, show

WHAT = click.argument("what", metavar="DOCUMENT")


@click.command()
@click.argument("key", metavar="RECORD")
@REGISTER
@ANCHORS
def current(key: str, register_at: str, anchors: tuple[str, ...]) -> None:
    """Say whether a paper is the current one, by its record id, its content digest, or the text of its code.

    Example: jamnut current 000G40R40M --register demonstration/register.db
    """
    from sheets import pipeline

    found = pipeline.current(register_at, key, anchors=anchors)
    show(pipeline.current_text(found))
    leave(found.status)


@click.command()
@WHAT
@REGISTER
@click.option("--on", required=True, metavar="DATE", help="Which day, year first.")
def used(what: str, register_at: str, on: str) -> None:
    """Say which sheets were used on a day, by whom, with which digest. DOCUMENT as for inspect.

    Example: jamnut used WI-0147 --on 2026-12-01 --register demonstration/register.db
    """
    from sheets import pipeline

    show(pipeline.used_text(pipeline.used(register_at, what, on=day("--on", on))))


@click.command()
@click.argument("what", metavar="DOCUMENT", required=False)
@REGISTER
@click.option("--only", "number", type=click.IntRange(min=1), metavar="NUMBER", help="This deviation.")
@click.option("--open", "only_open", is_flag=True, help="Leave out what has ended.")
def deviations(what: str | None, register_at: str, number: int | None, only_open: bool) -> None:
    """List deviations with who accepted or corrected each, when and how; exit status 1 while one is open.

    Example: jamnut deviations WI-0147 --register demonstration/register.db
    """
    from sheets import pipeline

    found = pipeline.deviations(register_at, given=what, number=number, only_open=only_open)
    show(pipeline.deviations_text(found))
    leave(found.status)


@click.command()
@WHAT
@REGISTER
def zeros(what: str, register_at: str) -> None:
    """Say where each zero is shown: by the current sheets, line by line, and every zero that was read.

    Example: jamnut zeros WI-0147 --register demonstration/register.db
    """
    from sheets import pipeline

    show(pipeline.zeros_text(pipeline.zeros(register_at, what)))


COMMANDS = (current, used, deviations, zeros)
