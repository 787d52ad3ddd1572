"""The command that serves the page: as README starts it, and what it refuses to serve."""

from __future__ import annotations

import re
import shlex
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from pathlib import Path

import pytest
from click.testing import CliRunner
from desk_bench import Bench, code_of

from sheets import cli, pipeline
from sheets.errors import InputError, RefusedError

COMMAND = [sys.executable, "-c", "from sheets.cli import entry; entry()"]


def free_port() -> int:
    with socket.socket() as found:
        found.bind(("127.0.0.1", 0))
        return int(found.getsockname()[1])


def example() -> list[str]:
    text = (cli.main.commands["serve"].help or "").replace("\\\n", " ")
    (found,) = re.findall(r"^ *Example: jamnut (.+)$", text, flags=re.MULTILINE)
    return shlex.split(found)


def test_help_shows_the_example_that_readme_has(root: Path) -> None:
    shown = CliRunner().invoke(cli.main, ["serve", "--help"], prog_name="jamnut")
    assert shlex.join(example()) in " ".join(shown.output.replace("\\\n", " ").split())
    assert shlex.join(example()) in (root / "README.md").read_text(encoding="utf-8")


def test_the_example_serves_the_page(bench: Bench, root: Path) -> None:
    issued = bench.issue()
    bench.folder.rename(bench.folder.parent / "demonstration")
    folder = bench.folder.parent / "demonstration"
    (folder / "plant.register").rename(folder / "register.db")
    port = free_port()
    server = subprocess.Popen(
        [*COMMAND, *example(), "--port", str(port)],
        cwd=folder.parent,
        env={"PYTHONPATH": str(root), "PATH": ""},
        stdout=subprocess.PIPE,
        stderr=subprocess.STDOUT,
        text=True,
    )
    try:
        answer = _asked(f"http://127.0.0.1:{port}{code_of(issued)}")
        assert '<h1 class="word">current</h1>' in answer
        with pytest.raises(urllib.error.HTTPError) as refused:
            urllib.request.urlopen(f"http://127.0.0.1:{port}/nothing")
        assert refused.value.code == 404
        assert "server" not in refused.value.headers
        refused.value.close()
    finally:
        server.terminate()
        told, _ = server.communicate(timeout=20)
    assert f"the record page: http://127.0.0.1:{port}/" in told
    assert "Traceback" not in told


def test_the_address_that_is_printed_answers(bench: Bench) -> None:
    """A record address with a path, as behind a proxy that serves more than this page."""
    bench.site.write_text(bench.site.read_text().replace(".example\n", ".example/oil\n", 1), encoding="utf-8")
    line = pipeline.serve(bench.settings(), host="127.0.0.1", port=8417).line
    assert line == "http://127.0.0.1:8417/oil/"
    client = bench.client()
    led = client.get("/")
    assert (led.status_code, led.headers["location"]) == (303, "/oil/")
    assert client.get("/oil/").status_code == 200


def test_a_port_in_use_says_so_before_any_address(bench: Bench, root: Path) -> None:
    with socket.create_server(("127.0.0.1", 0)) as taken:
        port = taken.getsockname()[1]
        words = ["serve", str(bench.folder), "--register", str(bench.register), "--port", str(port)]
        done = subprocess.run(
            [*COMMAND, *words],
            env={"PYTHONPATH": str(root), "PATH": ""},
            capture_output=True,
            text=True,
            check=False,
            timeout=60,
        )
    assert done.returncode == 2
    assert f"Something else listens at port {port} already" in done.stderr
    assert done.stdout == ""
    assert "Traceback" not in done.stderr


def _asked(address: str) -> str:
    for _ in range(150):
        try:
            with urllib.request.urlopen(address) as answer:
                return str(answer.read().decode())
        except OSError:
            time.sleep(0.1)
    pytest.fail("the page isn't served")


def test_names_and_passwords_never_go_in_the_clear(bench: Bench, tmp_path: Path) -> None:
    with pytest.raises(RefusedError, match="without TLS"):
        pipeline.serve(bench.settings(), host="0.0.0.0", port=8417)
    for file in ("page.pem", "page.key"):
        (tmp_path / file).touch()
    by_tls = pipeline.serve(
        bench.settings(),
        host="0.0.0.0",
        port=8417,
        certificate=tmp_path / "page.pem",
        key=tmp_path / "page.key",
    )
    assert by_tls.line == "https://0.0.0.0:8417/"
    assert pipeline.serve(bench.settings(), host="0.0.0.0", port=8417, proxies=("10.0.0.2",)).proxies
    assert pipeline.serve(bench.settings(), host="::1", port=8417).line == "http://[::1]:8417/"


@pytest.mark.parametrize(
    ("changed", "told"),
    [
        ({"host": "records.example"}, "isn't an IP address"),
        ({"proxies": ("the proxy",)}, "isn't an IP address"),
        ({"key": Path("page.key")}, "One of them is missing"),
        ({"key": Path("page.key"), "certificate": Path("page.pem")}, "no file there"),
    ],
)
def test_what_can_not_be_served(bench: Bench, changed: dict[str, object], told: str) -> None:
    given: dict[str, object] = {"host": "127.0.0.1", "port": 8417, **changed}
    with pytest.raises(InputError, match=told):
        pipeline.serve(bench.settings(), **given)  # type: ignore[arg-type]  # names of its options


def test_a_folder_or_register_that_is_not_there(bench: Bench) -> None:
    with pytest.raises(InputError, match="no folder there"):
        pipeline.serve(bench.settings(files=bench.folder / "none"), host="127.0.0.1", port=1)
    with pytest.raises(InputError, match="no register there"):
        pipeline.serve(bench.settings(register_at=bench.folder / "none"), host="127.0.0.1", port=1)


@pytest.mark.parametrize("library", ["uvicorn", "starlette", "argon2"])
def test_an_installation_without_the_extra_says_how_to_get_it(library: str, bench: Bench, root: Path) -> None:
    source = f"import sys; sys.modules[{library!r}] = None; from sheets.cli import entry; entry()"
    done = subprocess.run(
        [sys.executable, "-c", source, *example()],
        cwd=bench.folder,
        env={"PYTHONPATH": str(root), "PATH": ""},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 2
    assert "pip install '.[desk]'" in done.stderr
    assert "Traceback" not in done.stderr


def test_help_of_all_commands_needs_no_server(root: Path) -> None:
    source = (
        "import sys; from sheets import cli\n"
        "try: cli.main.main(['--help'])\n"
        "except SystemExit: pass\n"
        "print(sorted({name.split('.')[0] for name in sys.modules} & "
        "{'argon2', 'starlette', 'uvicorn', 'sqlalchemy'}))"
    )
    done = subprocess.run(
        [sys.executable, "-c", source],
        env={"PYTHONPATH": str(root)},
        capture_output=True,
        text=True,
        check=True,
    )
    assert done.stdout.splitlines()[-1] == "[]"
