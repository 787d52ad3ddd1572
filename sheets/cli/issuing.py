"""Commands of controlled documents: keys, issue, sign, reject, verify, demo."""

from __future__ import annotations

import json
import secrets
from pathlib import Path
from typing import TYPE_CHECKING, Literal

import click

from sheets.cli.common import (
    AS_JSON,
    MACHINE,
    PART,
    REGISTER,
    SEARCHING,
    SITE,
    TASK,
    leave,
    now,
    show,
    tell,
    today,
    watching,
    wrong,
)
from sheets.errors import ExitStatus, JamnutError, gravest

if TYPE_CHECKING:
    from sheets.pipeline import Json

FILE = click.argument("file", type=click.Path(path_type=Path), metavar="FILE")
PASSPHRASES = click.option(
    "--passphrases",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Folder with NAME.txt for each key NAME.p12; without it, each is asked for.",
)


def _passphrase(folder: Path | None, key: Path) -> str:
    """The passphrase of a key file: from a file beside others, or asked for without showing it."""
    if folder is None:
        new = not key.exists()
        answer: str = click.prompt(
            f"passphrase {'for the new key' if new else 'of'} {key.name}",
            hide_input=True,
            confirmation_prompt=new,
            err=True,
        )
        return answer
    file = folder / f"{key.stem}.txt"
    try:
        return file.read_text(encoding="utf-8").rstrip("\r\n")
    except (OSError, UnicodeDecodeError) as error:
        why = error.strerror if isinstance(error, OSError) else "it isn't text in UTF-8"
        raise wrong(
            str(file),
            f"The passphrase can't be read: {why}.",
            "Write it there, or leave the option out.",
        ) from None


def _signer(meaning: str, given: str | None) -> tuple[str, str, Path | None] | None:
    """Meaning, name and key: what ends in .p12 is a key, anything else the name of who signs later."""
    if given is None:
        return None
    return (meaning, "", Path(given)) if given.endswith(".p12") else (meaning, given, None)


@click.command()
@click.argument("folder", type=click.Path(path_type=Path), metavar="FOLDER")
@click.option(
    "--authority", default="Site authority", show_default=True, help="Name of the site's own authority."
)
@click.option("--person", "persons", multiple=True, required=True, metavar="NAME", help="One who will sign.")
@PASSPHRASES
def keys(folder: Path, authority: str, persons: tuple[str, ...], passphrases: Path | None) -> None:
    """Make a site's own authority, once, and a key file for each person who signs.

    Example: jamnut keys demonstration/keys --person "Dora Vell"
    """
    from sheets import pipeline

    ring = pipeline.keys(
        folder,
        authority_name=authority,
        persons=persons,
        passphrase=lambda key: _passphrase(passphrases, key),
        when=now(),
        random_bytes=secrets.token_bytes,
    )
    show([f"{ring.certificate}: name it in the site file, under signatures, trust", *map(str, ring.signers)])


@click.command()
@MACHINE
@SITE
@TASK
@PART
@REGISTER
@PASSPHRASES
@click.option(
    "-o", "--output", type=click.Path(path_type=Path), metavar="FILE", help="PDF to write; else TAG.pdf here."
)
@click.option("--paper", type=click.Choice(["A4", "Letter"]), default="A4", show_default=True)
@click.option("--prepared", metavar="KEY|NAME", help="Key file (.p12) of who prepared it, or a name.")
@click.option("--checked", metavar="KEY|NAME", help="The same for who checked it; a name signs later.")
@click.option("--approved", metavar="KEY|NAME", help="The same for who approves it; a name signs later.")
@click.option("--ink", is_flag=True, help="No keys: boxes to sign on paper; code and digest all the same.")
@click.option("--reason", default="", metavar="TEXT", help="Why it takes the place of the current revision.")
@click.option("--reviewed", default="", metavar="NAME", help="Who judged what changed; else who checks it.")
def issue(
    machine: Path,
    site: Path | None,
    task: str,
    part: str | None,
    register_at: str,
    passphrases: Path | None,
    output: Path | None,
    paper: Literal["A4", "Letter"],
    prepared: str | None,
    checked: str | None,
    approved: str | None,
    ink: bool,
    reason: str,
    reviewed: str,
) -> None:
    """Issue a pack: reserve a revision, print, sign, write, commit.

    With the keys of a demonstration the passphrase is: demonstration only

    \b
    Example: jamnut issue demonstration/clay_mixer.yaml --register first.db \\
        --prepared demonstration/keys/ada-quarrow.p12 --checked "Bram Tolliver" --approved "Cleo Harnett"
    """
    from sheets import pipeline

    given = (("prepared", prepared), ("checked", checked), ("approved", approved))
    people = [one for meaning, text in given if (one := _signer(meaning, text)) is not None]
    if not people:
        raise wrong("--prepared", "Nobody is named.", "Name who prepared, checked and approves the pack.")
    described = pipeline.check(machine, site, today())
    wanted = pipeline.task_of(described, task, part)
    with watching(SEARCHING) as watch:
        matter = pipeline.steps(described, wanted, watch)
    tell("placing, drawing and signing the pages")
    issued = pipeline.issue(
        matter,
        output or Path(f"{described.machine.tag}.pdf"),
        signings=[pipeline.Signing(meaning=meaning, name=name, key=key) for meaning, name, key in people],
        passphrase=lambda key: _passphrase(passphrases, key),
        register_at=register_at,
        site_folder=(site or machine).parent,
        when=now(),
        random_bytes=secrets.token_bytes,
        layout=pipeline.layout_named(paper),
        ink=ink,
        reason=reason,
        reviewer=reviewed,
    )
    show(pipeline.issued_text(issued))


@click.command()
@FILE
@click.option("--as", "meaning", type=click.Choice(["prepared", "checked", "approved"]), required=True)
@click.option("--key", type=click.Path(path_type=Path), required=True, metavar="KEY.p12")
@click.option("--site", type=click.Path(path_type=Path), required=True, metavar="FILE", help="Site file.")
@REGISTER
@PASSPHRASES
def sign(file: Path, meaning: str, key: Path, site: Path, register_at: str, passphrases: Path | None) -> None:
    """Sign an issued pack for the next of the persons named on it; the last signature commits it.

    \b
    Example: jamnut sign PU-07.pdf --as checked --key demonstration/keys/bram-tolliver.p12 \\
        --site demonstration/site.yaml --register first.db
    """
    from sheets import pipeline

    issued = pipeline.sign(
        file,
        pipeline.Signing(meaning=meaning, key=key),
        site_file=site,
        passphrase=lambda one: _passphrase(passphrases, one),
        register_at=register_at,
        when=now(),
    )
    show(pipeline.issued_text(issued))


@click.command()
@FILE
@REGISTER
@click.option("--by", required=True, metavar="NAME", help="Who rejects it.")
@click.option("--reason", required=True, metavar="TEXT")
def reject(file: Path, register_at: str, by: str, reason: str) -> None:
    """Reject a pack between its signatures, with a reason; its revision ends there.

    \b
    Example: jamnut reject PU-07.pdf --register first.db \\
        --by "Bram Tolliver" --reason "wrong plate"
    """
    from sheets import pipeline

    ended = pipeline.reject(file, register_at=register_at, by=by, reason=reason, when=now())
    show([f"revision {ended.number} of {ended.document} is {ended.state.value}"])


@click.command()
@click.argument("files", type=click.Path(path_type=Path), metavar="FILE...", nargs=-1, required=True)
@SITE
@click.option(
    "--register",
    "register_at",
    metavar="FILE|URL",
    help="The register, if within reach.",
)
@click.option("--code", metavar="TEXT", help="What a reader found in the code of a page: is it this file's?")
@AS_JSON
def verify(
    files: tuple[Path, ...], site: Path | None, register_at: str | None, code: str | None, as_json: bool
) -> None:
    """Judge packs three ways apart: signatures, content, and whether they are current.

    \b
    Example: jamnut verify demonstration/PU-07.pdf \\
        --site demonstration/site.yaml --register demonstration/register.db
    """
    from sheets import pipeline

    if code is not None and len(files) > 1:
        raise wrong("--code", "It belongs to one file.", "Name one file.")
    statuses: list[ExitStatus] = []
    found: list[Json] = []
    for file in files:
        tell(f"making {file} again from what travels in it")
        try:
            one = pipeline.verify(file, site_file=site, register_at=register_at, now=now(), code=code)
        except JamnutError as error:  # one file that can't be read keeps nothing from the others
            statuses.append(error.status)
            found.append(pipeline.verify_failed_json(file, error))
            if not as_json:
                click.echo(f"{file}\n{error}", err=True)
            continue
        statuses.append(one.status)
        found.append(pipeline.verify_json(one))
        if not as_json:
            show(pipeline.verify_text(one))
    if as_json:
        show([json.dumps(found if len(files) > 1 else found[0], indent=2)])
    leave(gravest(statuses))


@click.command()
@MACHINE
@click.argument("folder", type=click.Path(path_type=Path), metavar="FOLDER")
def demo(machine: Path, folder: Path) -> None:
    """Make a demonstration site with keys in a new folder, and issue a signed pack there, marked as such.

    Example: jamnut demo sample_machines/clay_mixer.yaml demonstration
    """
    from sheets import pipeline

    tell("making keys, answering the walk-down, issuing")
    show(pipeline.demo_text(pipeline.demo(machine, folder, when=now(), random_bytes=secrets.token_bytes)))


COMMANDS = (keys, issue, sign, reject, verify, demo)
