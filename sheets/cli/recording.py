"""Commands of the work at a machine: record, settle, end, strike."""

from __future__ import annotations

from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from sheets.cli.common import BY, ON, REGISTER, day, now, show, today, wrong

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

SEALS = ("whole", "broken", "none", "new")


@click.command()
@click.argument("file", type=click.Path(path_type=Path), required=False, metavar="[FILE]")
@REGISTER
@click.option("--record", "record_id", metavar="RECORD", help="Without a file: the record id on the sheet.")
@click.option("--by", required=True, metavar="NAME", help="Who tells the register.")
def record(file: Path | None, register_at: str, record_id: str | None, by: str) -> None:
    """Record a job: readings as found and as left, locks, zeros, powered windows, who was told.

    From a record file, which README describes; without one, it asks row by row. What a row comes to is
    printed, with what stays open. A refused line leaves nothing of the others.

    \b
    Example: jamnut record --record 0123456789 --by "Ada Quarrow" --register demonstration/register.db
    """
    from sheets import pipeline

    if file is not None:
        if record_id is not None:
            raise wrong("--record", "The file names its record id.", "Leave one of them out.")
        recorded = pipeline.record(file, register_at=register_at, by=by, when=now())
    elif record_id is not None:
        answers = _ask(record_id, pipeline.record_rows(record_id, register_at=register_at))
        recorded = pipeline.record_answers(answers, register_at=register_at, by=by, when=now())
    else:
        raise wrong("FILE, --record", "Nothing is named.", "Give a record file, or --record RECORD.")
    show(pipeline.recorded_text(recorded))


def _with_unit(unit: str, said: str) -> str:
    """An amount as a record file holds it, whether or not its unit was typed."""
    return f"{said.removesuffix(unit).strip()} {unit}"


def _ask(record_id: str, rows: Sequence[tuple[str, str, str]]) -> dict[str, Any]:
    """The answers, with the keys of a record file."""

    from sheets import pipeline

    def asked(
        what: str,
        key: str,
        default: str = "",
        *,
        reading: bool = False,
        form: Callable[[str], Any] = str,
    ) -> Any:
        """An answer in its form, asked until it is one that a record file may hold."""
        while True:
            said: str = click.prompt(what, default=default, show_default=bool(default), err=True)
            if not said.strip() and "or nothing" in what:
                return ""
            answer = form(said.strip())
            problems = pipeline.wrong_answer(record_id, key, answer, reading=reading)
            if not problems:
                return answer
            click.echo("\n".join(f"    {one.what} {one.fix}" for one in problems), err=True)

    answers: dict[str, Any] = {"format": "1", "record": record_id}
    job = asked("number of the open job, or nothing to open one", "job")
    answers |= {"job": job} if job else {"why": asked("why the work is done", "why")}
    answers["day"] = asked("day of the work", "day", today().isoformat())
    answers["people"] = asked(
        "who worked, with commas between",
        "people",
        form=lambda said: [name.strip() for name in said.split(",")],
    )
    answers["from paper"] = asked(
        "copied from a sheet that was filled in by hand, yes or no", "from paper", "no"
    )
    readings: list[dict[str, str]] = []
    for number, called, unit in rows:
        one = {"row": number}
        for key in ("as found", "as left"):
            said = asked(
                f"row {number}, {called}, {key} in {unit}, or nothing",
                key,
                reading=True,
                form=partial(_with_unit, unit),
            )
            if said:
                one[key] = said
        if len(one) == 1:
            continue
        one["gauge"] = asked("    gauge, serial number or the works' own", "gauge", reading=True)
        oil = asked(
            "    oil temperature in °C, or nothing",
            "oil",
            reading=True,
            form=partial(_with_unit, "°C"),
        )
        if oil:
            one["oil"] = oil
        one["seal"] = click.prompt("    seal", type=click.Choice(SEALS), err=True)
        readings.append(one)
    answers["readings"] = readings
    return answers


@click.command()
@click.argument("number", type=click.IntRange(min=1), metavar="DEVIATION")
@REGISTER
@BY
@click.option("--accept", "accepted", default="", metavar="TEXT", help="Leave it so, for this reason.")
@click.option("--done", default="", metavar="TEXT", help="What put it right; a setting needs a reading.")
@ON
def settle(number: int, register_at: str, by: str, accepted: str, done: str, on: str | None) -> None:
    """End a deviation by its number: somebody named accepts it, or it was put right.

    Outside the order of limits, or above what must never be exceeded, nobody can accept it.

    \b
    Example: jamnut settle 57 --accept "scale ends there; reviewed" --by "Cleo Harnett" \\
        --register demonstration/register.db
    """
    from sheets import pipeline

    told = pipeline.settle(
        number,
        register_at=register_at,
        accepted=accepted,
        done=done,
        by=by,
        on=day("--on", on),
        when=now(),
    )
    show([told])


@click.command()
@click.argument("number", type=click.IntRange(min=1), metavar="JOB")
@REGISTER
@BY
@click.option(
    "--as",
    "ending",
    type=click.Choice(["done", "out of service", "not begun", "in service"]),
    required=True,
    help="In service: the machine of an ended job is used again.",
)
@click.option("--remark", default="", metavar="TEXT")
@ON
def end(number: int, register_at: str, by: str, ending: str, remark: str, on: str | None) -> None:
    """End a job by its number; it isn't done while a deviation, a lock or a powered window is open.

    Example: jamnut end 41 --as done --by "Ada Quarrow" --register demonstration/register.db
    """
    from sheets import pipeline

    told = pipeline.end(
        number,
        register_at=register_at,
        ending=ending,
        remark=remark,
        by=by,
        on=day("--on", on),
        when=now(),
    )
    show([told])


@click.command()
@click.argument("reading", type=click.IntRange(min=1), metavar="READING")
@REGISTER
@BY
@click.option("--reason", required=True, metavar="TEXT")
@ON
def strike(reading: int, register_at: str, by: str, reason: str, on: str | None) -> None:
    """Strike through a reading that was told wrongly, by its number: it stays, and doesn't count.

    \b
    Example: jamnut strike 44 --reason "read in the wrong row" --by "Ada Quarrow" \\
        --register demonstration/register.db
    """
    from sheets import pipeline

    told = pipeline.strike(
        reading, register_at=register_at, why=reason, by=by, on=day("--on", on), when=now()
    )
    show([told])


COMMANDS = (record, settle, end, strike)
