"""Commands: thin, one call each into the pipeline."""

from __future__ import annotations

import errno
import functools
import io
import json
import sys
import tempfile
import traceback
from pathlib import Path
from typing import TYPE_CHECKING, Literal, NoReturn

import click

from sheets import __version__
from sheets.cli import asking, auditing, issuing, people, recording, registering, serving, tagging
from sheets.cli.common import (
    AS_JSON,
    MACHINE,
    MACHINES,
    PART,
    SEARCHING,
    SITE,
    TASK,
    leave,
    show,
    tell,
    today,
    watching,
    wrong,
)
from sheets.errors import ExitStatus, JamnutError, gravest

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets.pipeline import Described, Outcome, WalkdownState

_FULL = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG, errno.EIO)
"""What an output says that takes no more."""
KINDS = ("cover", "instruction", "lockout", "record", "tags", "engineer")


@click.group(context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="jamnut")
def main() -> None:
    """Setting procedures and lockout sheets for hydraulic power units, from one machine file.

    Every sheet is a draft for competent persons. The maker's documents, the site's lockout programme and
    local law come first.
    """


@main.command()
@MACHINES
@SITE
@AS_JSON
def check(machines: tuple[Path, ...], site: Path | None, as_json: bool) -> None:
    """Read machine files and say what is wrong in them. A folder stands for all its machine files.

    Example: jamnut check sample_machines/clay_mixer.yaml
    """
    from sheets import pipeline

    if _many(machines):
        leave(_each(machines, functools.partial(pipeline.outcome_of_check, site, today()), as_json))
        return
    described = pipeline.check(machines[0], site, today())
    show(pipeline.check_json(described) if as_json else pipeline.check_text(described))


@main.command()
@MACHINES
@SITE
@AS_JSON
def targets(machines: tuple[Path, ...], site: Path | None, as_json: bool) -> None:
    """Compute every setting, with its window and where each figure comes from.

    Example: jamnut targets sample_machines/clay_mixer.yaml
    """
    from sheets import pipeline

    if _many(machines):
        leave(_each(machines, functools.partial(pipeline.outcome_of_targets, site, today()), as_json))
        return
    described = pipeline.check(machines[0], site, today())
    found = pipeline.targets(described)
    show(pipeline.targets_json(described, found) if as_json else pipeline.targets_text(described, found))
    leave(pipeline.status_of(found))


@main.command()
@MACHINES
@SITE
@AS_JSON
@TASK
@PART
@click.option("--why", metavar="ADJUSTER", help="Explain one adjuster: its state, and the nearest others.")
@click.option("--skew", is_flag=True, help="Name plate values that change order or states if a tenth out.")
def steps(
    machines: tuple[Path, ...],
    site: Path | None,
    as_json: bool,
    task: str,
    part: str | None,
    why: str | None,
    skew: bool,
) -> None:
    """Find the states, derive the order and print every step.

    Example: jamnut steps sample_machines/clay_mixer.yaml
    """
    from sheets import pipeline

    if _many(machines):
        if why is not None or skew:
            raise wrong("--why, --skew", "They belong to one machine.", "Name one machine file.")
        doing = functools.partial(pipeline.outcome_of_steps, site, today(), task, part)
        leave(_each(machines, doing, as_json))
        return
    described = pipeline.check(machines[0], site, today())
    wanted = pipeline.task_of(described, task, part)
    if why is not None and skew:
        raise wrong("--why, --skew", "They are two questions.", "Ask one of them.")
    if skew:
        with watching("looking at plate values a tenth out") as watch:
            found = pipeline.skew(described, watch)
        show(pipeline.skew_json(described, found) if as_json else pipeline.skew_text(described, found))
        leave(pipeline.skew_status(found))
        return
    with watching(SEARCHING) as watch:
        matter = pipeline.steps(described, wanted, watch)
    if why is not None:
        show(pipeline.why_json(matter, why) if as_json else pipeline.why_text(matter, why))
        leave(pipeline.status_of(matter.targets, matter.procedure, matter.replay))
        return
    show(pipeline.steps_json(matter) if as_json else pipeline.steps_text(matter))
    leave(pipeline.status_of(matter.targets, matter.procedure, matter.replay))


@main.command()
@MACHINES
@SITE
@click.option(
    "-o",
    "--output",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="PDF to write; else TAG-draft.pdf here. With several machines: the folder to write into.",
)
@click.option("--paper", type=click.Choice(["A4", "Letter"]), default="A4", show_default=True)
@click.option(
    "--only",
    type=click.Choice(KINDS),
    multiple=True,
    help="Print this document of the pack only; may be named several times.",
)
@TASK
@PART
def pack(
    machines: tuple[Path, ...],
    site: Path | None,
    task: str,
    part: str | None,
    output: Path | None,
    paper: Literal["A4", "Letter"],
    only: tuple[str, ...],
) -> None:
    """Print a draft pack: cover, lockout sheets, work instruction, record, tags, engineer's page.

    Example: jamnut pack sample_machines/clay_mixer.yaml -o clay_mixer.pdf
    """
    from sheets import pipeline

    if _many(machines):
        writing = pipeline.Writing(folder=output or Path(), paper=paper, only=only)
        doing = functools.partial(pipeline.outcome_of_pack, site, today(), task, part, writing)
        leave(_each(machines, doing, as_json=False))
        return
    described = pipeline.check(machines[0], site, today())
    wanted = pipeline.task_of(described, task, part)
    with watching(SEARCHING) as watch:
        matter = pipeline.steps(described, wanted, watch)
    tell("placing and drawing the pages")
    target = output or Path(pipeline.draft_name(described.machine))
    written = pipeline.write_pack(matter, target, paper=paper, only=only)
    show([f"{target}: {written.pages} pages, draft, content {written.digest}"])
    for line in pipeline.issuable_text(matter):
        click.echo(line, err=True)


@main.command()
@MACHINE
@SITE
@AS_JSON
@click.option("--by", metavar="NAME", help="Who compared: asks entry by entry, and writes the answers.")
@click.option("--on", "on", metavar="DATE", help="Day of the comparison, year first; today without it.")
@click.option("--agree", multiple=True, metavar="ID", help="This entry agrees with the machine.")
@click.option("--differ", multiple=True, metavar="ID", help="This entry differs; needs its --note.")
@click.option("--note", multiple=True, metavar="TEXT", help="What is at the machine, for each --differ.")
@click.option("--all", "rest_agrees", is_flag=True, help="Every entry not named under --differ agrees.")
@click.option("--accept", multiple=True, metavar="ADJUSTER", help="Take on this computed setting.")
def walkdown(
    machine: Path,
    site: Path | None,
    as_json: bool,
    by: str | None,
    on: str | None,
    agree: tuple[str, ...],
    differ: tuple[str, ...],
    note: tuple[str, ...],
    rest_agrees: bool,
    accept: tuple[str, ...],
) -> None:
    """Print the list for comparing a machine file with its machine, and take the answers.

    Answers stand in NAME.walkdown.yaml beside the machine file.

    Example: jamnut walkdown sample_machines/clay_mixer.yaml
    """
    from sheets import pipeline

    described = pipeline.check(machine, site, today())
    state = pipeline.walkdown(described)
    given = bool(agree or differ or rest_agrees or accept)
    if len(note) != len(differ):
        raise wrong("--note", "Each --differ needs one --note, in the same order.", "Say what is there.")
    if len(set(differ)) != len(differ):
        raise wrong("--differ", "An entry is named twice.", "Name it once, with one note.")
    if by is None:
        if given or on:
            raise wrong("--by", "Nobody is named who compared or accepted.", "Add --by NAME.")
        shown = pipeline.walkdown_json(described, state)
        show(shown if as_json else pipeline.walkdown_text_lines(described, state))
        return
    said = dict(zip(differ, note, strict=True))
    if not given:
        agree, said = _ask(described, state)
    answers = pipeline.Answers(
        by=by, on=on or "", today=today(), agree=agree, differ=said, rest_agrees=rest_agrees, accept=accept
    )
    state = pipeline.write_walkdown(machine, described, answers)
    show(
        pipeline.walkdown_json(described, state)
        if as_json
        else [pipeline.walkdown_standing(described, state)]
    )


def _ask(described: Described, state: WalkdownState) -> tuple[tuple[str, ...], dict[str, str]]:
    """Asks about every entry that doesn't agree yet: which agree, and which differ with their notes."""
    from sheets import pipeline

    agree: list[str] = []
    differ: dict[str, str] = {}
    for named, lines in pipeline.walkdown_questions(described, state):
        click.echo("\n".join(lines), err=True)
        word = click.prompt(
            "Is it so? y(es), n(o), skip, stop", type=click.Choice(["y", "n", "skip", "stop"]), err=True
        )
        if word == "stop":
            break
        if word == "y":
            agree.append(named)
        elif word == "n":
            differ[named] = click.prompt("What is there", err=True)
    return tuple(agree), differ


@main.command()
@click.argument("kind", required=False)
@click.argument("file", type=click.Path(path_type=Path), required=False)
def new(kind: str | None, file: Path | None) -> None:
    """Write a machine file to begin with; without arguments, list the circuit families.

    Example: jamnut new fixed-pump pusher.yaml
    """
    from sheets import pipeline

    if kind is None:
        show(pipeline.starter_kinds())
        return
    if file is None:
        raise wrong("FILE", "No file is named to write to.", f"Write jamnut new {kind} FILE.")
    pipeline.new(kind, file)
    click.echo(f"{file}: written; fill it in, and ask jamnut check what is still blank")


@main.command()
@click.argument("old", type=click.Path(path_type=Path))
@click.argument("new_file", type=click.Path(path_type=Path), metavar="NEW")
@SITE
@AS_JSON
def diff(old: Path, new_file: Path, site: Path | None, as_json: bool) -> None:
    """Say what changes between two machine files, from plate values to steps and readings.

    Example: jamnut diff sample_machines/clay_mixer.yaml sample_machines/clay_mixer.yaml
    """
    from sheets import pipeline

    differing = pipeline.diff(old, new_file, site)
    show(pipeline.diff_json(differing) if as_json else pipeline.diff_text(differing))
    leave(differing.status)


def _many(machines: tuple[Path, ...]) -> bool:
    """Whether a table is wanted: for several arguments, and for a folder whatever it holds."""
    return len(machines) > 1 or machines[0].is_dir()


def _each(machines: tuple[Path, ...], doing: Callable[[Path], Outcome], as_json: bool) -> ExitStatus:
    """Does it for every file, prints the table, and gives the gravest status."""
    from sheets import pipeline

    files = pipeline.machine_files(machines)
    outcomes: list[Outcome] = []
    for number, file in enumerate(files, start=1):
        tell(f"{number} of {len(files)}: {file}")
        try:
            outcomes.append(doing(file))
        except Exception:  # noqa: BLE001 -- a bug at one file is told in its row; the others get theirs
            outcomes.append(pipeline.broken(str(file), f"please report it with {_keep_traceback()}"))
    if as_json:
        show([json.dumps(pipeline.summary_json(outcomes), indent=2)])
    else:
        show(pipeline.summary_lines(outcomes))
    return gravest(outcome.status for outcome in outcomes)


def _keep_traceback() -> str:
    """Writes the traceback of the exception at hand into a file, and gives its name."""
    with tempfile.NamedTemporaryFile(
        "w", prefix="jamnut-bug-", suffix=".txt", delete=False, encoding="utf-8"
    ) as kept:
        traceback.print_exc(file=kept)
    return kept.name


for module in (issuing, registering, recording, tagging, people, auditing, asking, serving):
    for command in module.COMMANDS:
        main.add_command(command)


def entry() -> None:
    """The command's gate: every known error becomes its exit status; a bug keeps its traceback in a file."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            # A terminal that can't show a sign gets its code; it is no reason to fail.
            stream.reconfigure(errors="backslashreplace")
    try:
        main.main(prog_name="jamnut", standalone_mode=False)
    except JamnutError as error:
        click.echo("\n".join([str(error), *_notes(error)]), err=True)
        sys.exit(int(error.status))
    except click.exceptions.Exit as leaving:
        sys.exit(leaving.exit_code)
    except click.ClickException as error:
        error.show()
        sys.exit(int(ExitStatus.WRONG_INPUT))
    except (click.Abort, KeyboardInterrupt) as error:
        if isinstance(error.__cause__ or error.__context__, EOFError):
            click.echo("\nThe answers end before the questions do. Nothing was written.", err=True)
            sys.exit(int(ExitStatus.WRONG_INPUT))
        notes = _notes(error) or ["what was being made is not written"]
        click.echo("\n".join(["stopped", *notes]), err=True)
        sys.exit(130)
    except OSError as error:
        if error.filename is not None or error.errno not in _FULL:
            _bug()
        sys.stdout = io.StringIO()  # nothing more goes there, not at the end of the process either
        click.echo(f"The output can't be written: {error.strerror}. Write it elsewhere.", err=True)
        sys.exit(int(ExitStatus.WRONG_INPUT))
    except Exception:  # noqa: BLE001 -- the last gate: whatever reaches it is a bug, and its traceback is kept
        _bug()


def _bug() -> NoReturn:
    """Keeps the traceback of the exception at hand, and leaves."""
    kept = _keep_traceback()
    click.echo(f"This is a bug in jamnut, not in your file. Please report it with {kept}", err=True)
    sys.exit(int(ExitStatus.BUG))


def _notes(error: BaseException) -> list[str]:
    """What was noted on an error, or on the one that it came from, for the person who sees it."""
    behind = error.__cause__
    return [*getattr(error, "__notes__", ()), *(getattr(behind, "__notes__", ()) if behind else ())]
