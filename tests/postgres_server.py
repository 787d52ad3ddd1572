"""A PostgreSQL server of the tests' own: on loopback, on a spare port, in a folder that is thrown away.

It never runs as root, which PostgreSQL refuses: then it runs as the user postgres, or as nobody.
"""

from __future__ import annotations

import os
import shutil
import signal
import socket
import subprocess
import tempfile
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path

FOLDERS = "/usr/lib/postgresql/*/bin"
"""Where Debian keeps the programs of a server, beside the path of commands."""


def program(name: str) -> Path | None:
    """A program of the newest server that is installed."""
    found = shutil.which(name)
    beside = sorted(Path("/").glob(f"{FOLDERS[1:]}/{name}"), key=lambda path: int(path.parts[-3]))
    return beside[-1] if beside else Path(found) if found else None


def user() -> str | None:
    """The user to run it as; None for oneself."""
    if os.geteuid() != 0:
        return None
    import pwd  # only where there are such users

    known = {one.pw_name for one in pwd.getpwall()}
    return "postgres" if "postgres" in known else "nobody"


def _group_of(name: str) -> int:
    import pwd

    return pwd.getpwnam(name).pw_gid


@dataclass(frozen=True)
class Server:
    """A server that runs."""

    port: int
    made: list[str] = field(default_factory=list)
    free: list[str] = field(default_factory=list)

    def url(self, database: str) -> str:
        return f"postgresql://jamnut@127.0.0.1:{self.port}/{database}"

    @contextmanager
    def fresh(self) -> Iterator[str]:
        """URL of an empty database; another test gets it afterwards, emptied."""
        if not self.free:
            self.made.append(f"register_{len(self.made) + 1}")
            self.run("postgres", f"CREATE DATABASE {self.made[-1]} TEMPLATE template0 ENCODING 'UTF8'")
            self.free.append(self.made[-1])
        name = self.free.pop()
        yield self.url(name)
        self.run(
            name,
            "SELECT pg_terminate_backend(pid) FROM pg_stat_activity"
            " WHERE datname = current_database() AND pid <> pg_backend_pid()",
        )
        self.run(name, "DROP SCHEMA IF EXISTS jamnut CASCADE")
        self.free.append(name)

    def run(self, database: str, statement: str) -> None:
        import psycopg

        with psycopg.connect(self.url(database), autocommit=True) as connection:
            connection.execute(statement)


@contextmanager
def running() -> Iterator[Server]:
    """A server while the block lasts. Raises LookupError by name where it, or its driver, isn't installed."""
    initdb, postgres = program("initdb"), program("postgres")
    if initdb is None or postgres is None:
        raise LookupError("PostgreSQL's server isn't installed")
    try:
        import psycopg
    except ImportError:
        raise LookupError("psycopg isn't installed") from None
    folder = Path(tempfile.mkdtemp(prefix="jamnut-postgres-"))
    who = user()
    if who is not None:
        shutil.chown(folder, who)
    as_user = {"user": who, "group": _group_of(who)} if who else {}
    data = folder / "data"
    quiet = {"stdout": subprocess.PIPE, "stderr": subprocess.STDOUT, "cwd": folder, "extra_groups": []}
    if who is None:
        quiet.pop("extra_groups")
    server = None
    try:
        subprocess.run(
            [initdb, "-D", data, "-U", "jamnut", "-A", "trust", "-E", "UTF8", "--locale=C"],
            check=True,
            timeout=120,
            **as_user,
            **quiet,
        )
        with socket.socket() as spare:
            spare.bind(("127.0.0.1", 0))
            port = spare.getsockname()[1]
        with (folder / "log").open("wb") as log:
            server = subprocess.Popen(
                [postgres, "-D", data, "-h", "127.0.0.1", "-p", str(port), "-k", folder],
                **as_user,
                **{**quiet, "stdout": log},
            )
        _wait(psycopg, Server(port), server, folder / "log")
        yield Server(port)
    finally:
        if server is not None:
            server.send_signal(signal.SIGQUIT)  # at once: nothing here is to be kept
            try:
                server.wait(timeout=30)
            except subprocess.TimeoutExpired:
                server.kill()
                server.wait()
        shutil.rmtree(folder, ignore_errors=True)


def _wait(psycopg: object, server: Server, process: subprocess.Popen[bytes], log: Path) -> None:
    for _ in range(300):
        if process.poll() is not None:
            break
        try:
            psycopg.connect(server.url("postgres"), connect_timeout=2).close()
        except psycopg.OperationalError:
            time.sleep(0.1)
        else:
            return
    raise RuntimeError(f"the server didn't start: {log.read_text(errors='replace')}")
