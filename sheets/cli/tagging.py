"""The command of setting tags: printed with what was left, and told where they hang."""

from __future__ import annotations

from pathlib import Path

import click

from sheets.cli.common import ON, REGISTER, day, now, show, wrong


@click.command()
@click.argument("record", metavar="RECORD")
@REGISTER
@click.option("-o", "--output", type=click.Path(path_type=Path), metavar="FILE", help="PDF to write.")
@click.option("--post", metavar="ADJUSTER", help="The tag of this adjuster hangs now, instead of printing.")
@click.option("--where", metavar="PLACE", help="With --post: where.")
@click.option("--by", metavar="NAME", help="With --post: who hung it.")
@ON
def tags(
    record: str,
    register_at: str,
    output: Path | None,
    post: str | None,
    where: str | None,
    by: str | None,
    on: str | None,
) -> None:
    """Print the setting tags of the current revision with the values as left; tell that one hangs.

    Example: jamnut tags 0123456789 -o tags.pdf --register demonstration/register.db
    """
    from sheets import pipeline

    if post is None:
        if output is None:
            raise wrong("-o", "No file is named to write to.", "Name one with -o FILE.")
        lines = pipeline.tags(record, output, register_at=register_at)
        show([f"{output}: written", *(f"  {line}" for line in lines)])
        return
    if where is None or by is None:
        raise wrong("--where, --by", "A tag hangs somewhere, by somebody.", "Give both.")
    told = pipeline.post(
        record, post, register_at=register_at, where=where, by=by, on=day("--on", on), when=now()
    )
    show([told])


COMMANDS = (tags,)
