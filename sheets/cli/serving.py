"""The command that starts the record page. The server gets the desk by name: commands don't know it."""

from __future__ import annotations

import errno
import socket
from contextlib import suppress
from pathlib import Path

import click

from sheets.cli.common import show, wrong

DESK = "sheets.desk.app:create"
EXTRA = ("argon2", "starlette", "uvicorn")
"""Libraries of the extra named desk."""
AT_ONCE = 64
"""Connections that are served at the same time; the next ones are told to wait."""
IDLE_S = 5


@click.command()
@click.argument("folder", type=click.Path(path_type=Path), metavar="FOLDER")
@click.option(
    "--register", "register_at", required=True, metavar="FILE|URL", help="The register that it shows."
)
@click.option("--site", type=click.Path(path_type=Path), metavar="FILE", help="Site file.")
@click.option(
    "--users",
    "users_file",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="Who may sign in, from jamnut users; without it the page is read only.",
)
@click.option("--anchor", "anchors", multiple=True, metavar="TEXT", help="An anchor that was kept elsewhere.")
@click.option("--host", default="127.0.0.1", show_default=True, metavar="ADDRESS", help="Where it listens.")
@click.option("--port", type=click.IntRange(1, 65535), default=8417, show_default=True)
@click.option("--certificate", type=click.Path(path_type=Path), metavar="PEM", help="For TLS, with --key.")
@click.option("--key", type=click.Path(path_type=Path), metavar="PEM", help="Private key of it.")
@click.option(
    "--proxy", "proxies", multiple=True, metavar="ADDRESS", help="A proxy in front of it, which does TLS."
)
@click.option(
    "--name", "names", multiple=True, metavar="HOST", help="A host name beside that of the record address."
)
def serve(
    folder: Path,
    register_at: str,
    site: Path | None,
    users_file: Path | None,
    anchors: tuple[str, ...],
    host: str,
    port: int,
    certificate: Path | None,
    key: Path | None,
    proxies: tuple[str, ...],
    names: tuple[str, ...],
) -> None:
    """Serve the record page: scan a sheet, and see whether it is current.

    FOLDER holds the issued files; each is offered only if it is, to the byte, what the register knows.

    \b
    Example: jamnut serve demonstration --register demonstration/register.db \\
        --site demonstration/site.yaml
    """
    try:
        import uvicorn
        from uvicorn.importer import import_from_string

        create = import_from_string(DESK)
    except ImportError as error:
        name = error.name or str(error)
        if not any(library in name for library in EXTRA):
            raise
        raise wrong(
            "this installation",
            f"The record page needs a library that isn't there: {name}.",
            "Install it with the extra named desk: python -m pip install '.[desk]'",
        ) from None
    from sheets import pipeline

    serving = pipeline.serve(
        pipeline.DeskSettings(
            register_at=register_at,
            site_file=site,
            files=folder,
            users=users_file,
            anchors=anchors,
            secure=certificate is not None or bool(proxies),
            hosts=(host, *names),
        ),
        host=host,
        port=port,
        certificate=certificate,
        key=key,
        proxies=proxies,
    )
    config = uvicorn.Config(
        create(serving.settings),
        host=serving.host,
        port=serving.port,
        ssl_certfile=serving.certificate,
        ssl_keyfile=serving.key,
        proxy_headers=bool(serving.proxies),
        forwarded_allow_ips=list(serving.proxies),
        server_header=False,
        access_log=False,
        log_level="warning",
        limit_concurrency=AT_ONCE,
        timeout_keep_alive=IDLE_S,
    )
    with _listening(serving.host, serving.port) as listening, suppress(KeyboardInterrupt):
        show([f"the record page: {serving.line} (Ctrl+C stops it)"])
        uvicorn.Server(config).run(sockets=[listening])


def _listening(host: str, port: int) -> socket.socket:
    """A socket that listens there. Raises InputError where none can."""
    try:
        return socket.create_server((host, port), family=socket.AF_INET6 if ":" in host else socket.AF_INET)
    except OSError as error:
        used = error.errno == errno.EADDRINUSE
        raise wrong(
            "--port" if used else "--host, --port",
            f"Something else listens at port {port} already."
            if used
            else f"Nothing can listen at {host}, port {port}: {error.strerror}.",
            "Name another port with --port, or stop what listens there."
            if used
            else "Name an address of this computer, and a port above 1023.",
        ) from None


@click.command()
@click.argument("file", type=click.Path(path_type=Path), metavar="FILE")
@click.option("--person", metavar="NAME", help="One who may sign in, named as on the sheets.")
@click.option(
    "--role",
    type=click.Choice(["reader", "technician", "approver"]),
    default="reader",
    show_default=True,
    help="May read a closed page; record; accept what lies outside a window.",
)
@click.option("--remove", metavar="NAME", help="One who may no longer sign in.")
def users(file: Path, person: str | None, role: str, remove: str | None) -> None:
    """Say who may sign in at the record page; without options, list them. Asks for a password.

    Example: jamnut users users.json --person "Dora Vell" --role technician
    """
    from sheets import pipeline

    if person is not None and remove is not None:
        raise wrong("--person, --remove", "One at a time.", "Name one of them.")
    if person is not None:
        password: str = click.prompt(
            f"password of {person}", hide_input=True, confirmation_prompt=True, err=True
        )
        show([pipeline.set_user(file, name=person, role=role, password=password)])
    elif remove is not None:
        show([pipeline.remove_user(file, name=remove)])
    else:
        show(pipeline.users(file))


COMMANDS = (serve, users)
