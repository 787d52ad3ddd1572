"""Commands: thin, one call each into the pipeline."""

from __future__ import annotations

import io
import json
import sys
import tempfile
import traceback
from pathlib import Path
from typing import TYPE_CHECKING, Literal

import click

from sheets import __version__
from sheets.errors import ExitStatus, JamnutError

if TYPE_CHECKING:
    from collections.abc import Iterable

MACHINE = click.argument("machine", type=click.Path(path_type=Path), metavar="MACHINE")
SITE = click.option(
    "--site",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="Site file; without it, site.yaml beside the machine file, if there is one.",
)
AS_JSON = click.option(
    "--json", "as_json", is_flag=True, help="Print data with stable names instead of text."
)
KINDS = ("cover", "instruction", "lockout", "record", "tags", "engineer")


@click.group(context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="jamnut")
def main() -> None:
    """Setting procedures and lockout sheets for hydraulic power units, from one machine file.

    Every sheet is a draft for competent persons. The maker's documents, the site's lockout programme and
    local law come first.
    """


@main.command()
@MACHINE
@SITE
@AS_JSON
def check(machine: Path, site: Path | None, as_json: bool) -> None:
    """Read a machine file and say what is wrong in it.

    Example: jamnut check sample_machines/clay_mixer.yaml
    """
    from sheets import pipeline

    described = pipeline.check(machine, site)
    _print(pipeline.check_json(described) if as_json else pipeline.check_text(described))


@main.command()
@MACHINE
@SITE
@AS_JSON
def targets(machine: Path, site: Path | None, as_json: bool) -> None:
    """Compute every setting, with its window and where each figure comes from.

    Example: jamnut targets sample_machines/clay_mixer.yaml
    """
    from sheets import pipeline

    described = pipeline.check(machine, site)
    found = pipeline.targets(described)
    _print(pipeline.targets_json(described, found) if as_json else pipeline.targets_text(described, found))
    _leave(pipeline.status_of(found))


@main.command()
@MACHINE
@SITE
@AS_JSON
def steps(machine: Path, site: Path | None, as_json: bool) -> None:
    """Find the states, derive the order and print every step.

    Example: jamnut steps sample_machines/clay_mixer.yaml
    """
    from sheets import pipeline

    described = pipeline.check(machine, site)
    _tell("finding the state in which each adjuster can be set")
    matter = pipeline.steps(described)
    _print(pipeline.steps_json(matter) if as_json else pipeline.steps_text(matter))
    _leave(pipeline.status_of(matter.targets, matter.procedure))


@main.command()
@MACHINE
@SITE
@click.option(
    "-o",
    "--output",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="PDF to write; else TAG-draft.pdf here.",
)
@click.option("--paper", type=click.Choice(["A4", "Letter"]), default="A4", show_default=True)
@click.option(
    "--only",
    type=click.Choice(KINDS),
    multiple=True,
    help="Print this document of the pack only; may be named several times.",
)
def pack(
    machine: Path,
    site: Path | None,
    output: Path | None,
    paper: Literal["A4", "Letter"],
    only: tuple[str, ...],
) -> None:
    """Print a draft pack: cover, lockout sheets, work instruction, record, tags, engineer's page.

    Example: jamnut pack sample_machines/clay_mixer.yaml -o clay_mixer.pdf
    """
    from sheets import pipeline

    described = pipeline.check(machine, site)
    _tell("finding the state in which each adjuster can be set")
    matter = pipeline.steps(described)
    _tell("placing and drawing the pages")
    target = output or Path(f"{described.machine.tag}-draft.pdf")
    written = pipeline.write_pack(matter, target, paper=paper, only=only)
    _print([f"{target}: {written.pages} pages, draft, content {written.digest}"])


def _print(shown: Iterable[str] | dict[str, object]) -> None:
    """Prints lines or data. A reader that leaves early changes nothing about the exit status."""
    lines = [json.dumps(shown, indent=2)] if isinstance(shown, dict) else shown
    try:
        for line in lines:
            click.echo(line)
    except BrokenPipeError:
        sys.stdout = io.StringIO()


def _tell(doing: str) -> None:
    """Progress, for a person who waits at a terminal."""
    if sys.stderr.isatty():
        click.echo(f"… {doing}", err=True)


def _leave(status: ExitStatus) -> None:
    if status is not ExitStatus.GOOD:
        raise SystemExit(int(status))


def entry() -> None:
    """The command's gate: every known error becomes its exit status; a bug keeps its traceback in a file."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            # A terminal that can't show a sign gets its code; it is no reason to fail.
            stream.reconfigure(errors="backslashreplace")
    try:
        main.main(prog_name="jamnut", standalone_mode=False)
    except JamnutError as error:
        click.echo(str(error), err=True)
        sys.exit(int(error.status))
    except click.exceptions.Exit as leaving:
        sys.exit(leaving.exit_code)
    except click.ClickException as error:
        error.show()
        sys.exit(int(ExitStatus.WRONG_INPUT))
    except (click.Abort, KeyboardInterrupt):
        click.echo("stopped; nothing was written", err=True)
        sys.exit(130)
    except Exception:  # noqa: BLE001 -- the last gate: whatever reaches it is a bug, and its traceback is kept
        with tempfile.NamedTemporaryFile(
            "w", prefix="jamnut-bug-", suffix=".txt", delete=False, encoding="utf-8"
        ) as kept:
            traceback.print_exc(file=kept)
        click.echo(f"This is a bug in jamnut, not in your file. Please report it with {kept.name}", err=True)
        sys.exit(int(ExitStatus.BUG))
