"""What all commands share: arguments, the day and the time, and how they print."""

from __future__ import annotations

import io
import json
import sys
from contextlib import contextmanager
from datetime import UTC, date, datetime, timedelta
from pathlib import Path
from typing import TYPE_CHECKING

import click

from sheets.errors import ExitStatus, InputError, Problem

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator

    from sheets.pipeline import Json

MACHINE = click.argument("machine", type=click.Path(path_type=Path), metavar="MACHINE")
MACHINES = click.argument(
    "machines", type=click.Path(path_type=Path), metavar="MACHINE...", nargs=-1, required=True
)
SITE = click.option(
    "--site",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="Site file; without it, site.yaml beside the machine file, if there is one.",
)
AS_JSON = click.option(
    "--json", "as_json", is_flag=True, help="Print data with stable names instead of text."
)
TASK = click.option(
    "--task",
    type=click.Choice(["read", "set", "commission", "replace"]),
    default="set",
    show_default=True,
    help="Read only; read and set; set after commissioning; set one part after its replacement.",
)
PART = click.option("--part", metavar="ID", help="The part that was replaced, for --task replace.")
REGISTER = click.option(
    "--register",
    "register_at",
    metavar="FILE|URL",
    required=True,
    help="The register: a file, or a PostgreSQL database by URL; the first issue makes it.",
)
BY = click.option("--by", required=True, metavar="NAME", help="Who it is, by name.")
ON = click.option("--on", "on", metavar="DATE", help="The day, year first; today without it.")

ANCHORS = click.option(
    "--anchor", "anchors", multiple=True, metavar="TEXT", help="An anchor that was kept outside."
)


def today() -> date:
    """The only look at a calendar; it refuses answers from the future and dates new ones."""
    return date.today()


def now() -> datetime:
    """The only look at a clock, in UTC."""
    return datetime.now(UTC)


def day(where: str, text: str | None) -> date:
    """A day that somebody wrote, or today. Raises InputError; ``where`` names the option."""
    from sheets import pipeline

    return today() if text is None else pipeline.day_of(where, text)


def wrong(where: str, what: str, fix: str) -> InputError:
    return InputError(Problem(where=where, what=what, fix=fix))


def show(shown: Iterable[str] | dict[str, Json]) -> None:
    """Prints lines or data. A reader that leaves early changes nothing about the exit status."""
    lines = [json.dumps(shown, indent=2)] if isinstance(shown, dict) else shown
    try:
        for line in lines:
            click.echo(line)
    except BrokenPipeError:
        sys.stdout = io.StringIO()


def tell(doing: str) -> None:
    """Progress, for a person who waits at a terminal."""
    if sys.stderr.isatty():
        click.echo(f"… {doing}", err=True)


SEARCHING = "finding the state in which each adjuster can be set"
QUIET = timedelta(seconds=1)
"""Who waits no longer than this is told no more; then it is told as often."""


@contextmanager
def watching(doing: str) -> Iterator[Callable[[int, int], None]]:
    """Progress of counted work, in one line that is written anew, for a person who waits at a terminal."""
    tell(doing)
    told = now()
    shown = 0

    def watch(done: int, most: int) -> None:
        nonlocal told, shown
        if not sys.stderr.isatty() or now() - told < QUIET:
            return
        told = now()
        text = f"… {done} states solved, at most {most}"
        click.echo("\r" + text.ljust(shown), err=True, nl=False)
        shown = len(text)

    try:
        yield watch
    finally:
        if shown:
            click.echo(err=True)


def leave(status: ExitStatus) -> None:
    if status is not ExitStatus.GOOD:
        raise SystemExit(int(status))
