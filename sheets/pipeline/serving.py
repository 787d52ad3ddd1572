"""What a record page may be served as: on this computer alone, by TLS, or behind a proxy that does TLS."""

from __future__ import annotations

from dataclasses import dataclass
from ipaddress import ip_address
from pathlib import Path

from sheets.errors import InputError, Problem, RefusedError, quoted
from sheets.pipeline.reading_room import DeskSettings, ReadingRoom


@dataclass(frozen=True, kw_only=True)
class Serving:
    """How a server is to be started."""

    settings: DeskSettings
    host: str
    """Address that it listens at."""
    port: int
    certificate: Path | None
    key: Path | None
    proxies: tuple[str, ...]
    """Addresses of proxies whose word about the caller is believed."""
    base: str
    """Path under which the page is reached, without a closing slash."""

    @property
    def line(self) -> str:
        """Where it is reached from this computer."""
        kind = "https" if self.certificate else "http"
        host = f"[{self.host}]" if ":" in self.host else self.host
        return f"{kind}://{host}:{self.port}{self.base}/"


def serve(
    settings: DeskSettings,
    *,
    host: str,
    port: int,
    certificate: Path | None = None,
    key: Path | None = None,
    proxies: tuple[str, ...] = (),
) -> Serving:
    """Judges how a record page is to be served, and that it can be.

    ``host`` and ``port`` to listen at; ``certificate`` and ``key``: files for TLS; ``proxies``: addresses of
    proxies in front of it. Raises RefusedError where names and passwords would go over a network in the
    clear, and InputError for files, a site or a register that can't be used.
    """
    try:
        loopback = host == "localhost" or ip_address(host).is_loopback
        for proxy in proxies:
            ip_address(proxy)
    except ValueError:
        raise InputError(
            Problem(
                where="--host, --proxy",
                what=f"{quoted(' '.join((host, *proxies)))} isn't an IP address.",
                fix="Write an IP address, such as 127.0.0.1, or 0.0.0.0 for all of this computer's.",
            )
        ) from None
    if (certificate is None) != (key is None):
        raise InputError(
            Problem(
                where="--certificate, --key", what="One of them is missing.", fix="Name both files, or none."
            )
        )
    for file in (certificate, key):
        if file is not None and not file.is_file():
            raise InputError(
                Problem(where=str(file), what="There is no file there.", fix="Name the PEM files for TLS.")
            )
    if settings.files is not None and not settings.files.is_dir():
        raise InputError(
            Problem(
                where=str(settings.files),
                what="There is no folder there.",
                fix="Name the folder in which issued files are kept.",
            )
        )
    if not loopback and certificate is None and not proxies:
        raise RefusedError(
            Problem(
                where="--host",
                what="Others would reach the page without TLS, and read along or change what it says.",
                fix="Name --certificate and --key, or --proxy with the address of a proxy that does TLS.",
            )
        )
    room = ReadingRoom(settings)
    room.close()
    return Serving(
        settings=settings,
        host=host,
        port=port,
        certificate=certificate,
        key=key,
        proxies=proxies,
        base=room.base,
    )
