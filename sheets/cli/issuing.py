"""Commands of controlled documents: keys, issue, sign, reject, verify, demo."""

from __future__ import annotations

import secrets
from pathlib import Path
from typing import Literal

import click

from sheets.cli.common import AS_JSON, MACHINE, PART, SITE, TASK, leave, now, show, tell, today, wrong
from sheets.errors import gravest

FILE = click.argument("file", type=click.Path(path_type=Path), metavar="FILE")
REGISTER = click.option(
    "--register",
    "register_file",
    type=click.Path(path_type=Path),
    metavar="FILE",
    required=True,
    help="The register; the first issue makes it.",
)
PASSPHRASES = click.option(
    "--passphrases",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Folder with NAME.txt for each key NAME.p12; without it, each is asked for.",
)


def _passphrase(folder: Path | None, key: Path) -> str:
    """The passphrase of a key file: from a file beside others, or asked for without showing it."""
    if folder is None:
        answer: str = click.prompt(f"passphrase of {key.name}", hide_input=True, err=True)
        return answer
    file = folder / f"{key.stem}.txt"
    try:
        return file.read_text(encoding="utf-8").rstrip("\n")
    except OSError as error:
        raise wrong(
            str(file),
            f"The passphrase can't be read: {error.strerror}.",
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
@click.option(
    "--passphrase-file", type=click.Path(path_type=Path), metavar="FILE", help="Else it is asked for."
)
def keys(folder: Path, authority: str, persons: tuple[str, ...], passphrase_file: Path | None) -> None:
    """Make a site's own authority, once, and a key file for each person who signs.

    Example: jamnut keys keys --person "Ada Quarrow" --person "Bram Tolliver"
    """
    from sheets import pipeline

    if not folder.is_dir():
        raise wrong(
            str(folder), "There is no such folder.", "Make the folder first; keys are not for everyone."
        )
    if passphrase_file is not None:
        passphrase = _passphrase(passphrase_file.parent, passphrase_file)
    else:
        passphrase = click.prompt(
            "passphrase for these keys", hide_input=True, confirmation_prompt=True, err=True
        )
    ring = pipeline.keys(
        folder,
        authority_name=authority,
        persons=persons,
        passphrase=passphrase,
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
def issue(
    machine: Path,
    site: Path | None,
    task: str,
    part: str | None,
    register_file: Path,
    passphrases: Path | None,
    output: Path | None,
    paper: Literal["A4", "Letter"],
    prepared: str | None,
    checked: str | None,
    approved: str | None,
    ink: bool,
) -> None:
    """Issue a pack: reserve a revision, print, sign, write, commit.

    Example: jamnut issue PU-07.yaml --register register.db --prepared ada.p12 --approved "Cleo Harnett"
    """
    from sheets import pipeline

    given = (("prepared", prepared), ("checked", checked), ("approved", approved))
    people = [one for meaning, text in given if (one := _signer(meaning, text)) is not None]
    if not people:
        raise wrong("--prepared", "Nobody is named.", "Name who prepared, checked and approves the pack.")
    described = pipeline.check(machine, site, today())
    wanted = pipeline.task_of(described, task, part)
    tell("finding the state in which each adjuster can be set")
    matter = pipeline.steps(described, wanted)
    tell("placing, drawing and signing the pages")
    issued = pipeline.issue(
        matter,
        output or Path(f"{described.machine.tag}.pdf"),
        signings=[pipeline.Signing(meaning=meaning, name=name, key=key) for meaning, name, key in people],
        passphrase=lambda key: _passphrase(passphrases, key),
        register_file=register_file,
        when=now(),
        random_bytes=secrets.token_bytes,
        layout=pipeline.layout_named(paper),
        ink=ink,
    )
    show(pipeline.issued_text(issued))


@click.command()
@FILE
@click.option("--as", "meaning", type=click.Choice(["prepared", "checked", "approved"]), required=True)
@click.option("--key", type=click.Path(path_type=Path), required=True, metavar="KEY.p12")
@click.option("--site", type=click.Path(path_type=Path), required=True, metavar="FILE", help="Site file.")
@REGISTER
@PASSPHRASES
def sign(
    file: Path, meaning: str, key: Path, site: Path, register_file: Path, passphrases: Path | None
) -> None:
    """Sign an issued pack for the next of the persons named on it; the last signature commits it.

    Example: jamnut sign PU-07.pdf --as checked --key bram.p12 --site site.yaml --register register.db
    """
    from sheets import pipeline

    issued = pipeline.sign_pack(
        file,
        pipeline.Signing(meaning=meaning, key=key),
        site_file=site,
        passphrase=lambda one: _passphrase(passphrases, one),
        register_file=register_file,
        when=now(),
    )
    show(pipeline.issued_text(issued))


@click.command()
@FILE
@REGISTER
@click.option("--by", required=True, metavar="NAME", help="Who rejects it.")
@click.option("--reason", required=True, metavar="TEXT")
def reject(file: Path, register_file: Path, by: str, reason: str) -> None:
    """Reject a pack between its signatures, with a reason; its revision ends there.

    Example: jamnut reject PU-07.pdf --register register.db --by "Bram Tolliver" --reason "wrong plate"
    """
    from sheets import pipeline

    ended = pipeline.reject_issue(file, register_file=register_file, by=by, reason=reason, when=now())
    show([f"revision {ended.number} of {ended.document} is {ended.state.value}"])


@click.command()
@click.argument("files", type=click.Path(path_type=Path), metavar="FILE...", nargs=-1, required=True)
@SITE
@click.option(
    "--register",
    "register_file",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="The register, if within reach.",
)
@AS_JSON
def verify(files: tuple[Path, ...], site: Path | None, register_file: Path | None, as_json: bool) -> None:
    """Judge packs three ways apart: signatures, content, and whether they are current.

    Example: jamnut verify PU-07.pdf --site site.yaml --register register.db
    """
    from sheets import pipeline

    statuses = []
    for file in files:
        tell(f"making {file} again from what travels in it")
        one = pipeline.verify(file, site_file=site, register_file=register_file, now=now())
        show(pipeline.verify_json(one) if as_json else pipeline.verify_text(one))
        statuses.append(one.status)
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
