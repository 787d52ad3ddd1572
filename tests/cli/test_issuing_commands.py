"""Commands of controlled documents, as a person types them; and an installation without their libraries."""

from __future__ import annotations

import json
import re
import shlex
import shutil
import subprocess
import sys
from collections.abc import Callable
from datetime import UTC, date, datetime
from pathlib import Path

import click
import pytest
from click.testing import CliRunner

from sheets import cli, pipeline
from sheets.cli import issuing
from sheets.pipeline import verifying
from sheets.pipeline.demonstrating import PASSPHRASE
from sheets.seal.signatures_report import Judgement

NOW = datetime(2026, 12, 1, 12, 0, tzinfo=UTC)
DEMONSTRATION = ("demonstration/PU-07.pdf", "--site", "demonstration/site.yaml", "--register")


def example(verb: str) -> list[str]:
    """Words of the example in a command's help, which a shell reads as one line."""
    text = (cli.main.commands[verb].help or "").replace("\\\n", " ")
    (found,) = re.findall(r"^ *Example: jamnut (.+)$", text, flags=re.MULTILINE)
    return shlex.split(found)


@pytest.fixture(scope="session")
def made(root: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A demonstration that no test changes."""
    folder = tmp_path_factory.mktemp("made") / "demonstration"
    sample = root / "sample_machines" / "clay_mixer.yaml"
    pipeline.demo(sample, folder, when=NOW, random_bytes=lambda length: bytes(range(length)))
    return folder


@pytest.fixture(autouse=True)
def _stage(root: Path, made: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """In a folder where the demonstration was made, at a fixed time, by somebody who knows the passphrase."""
    shutil.copytree(made, tmp_path / "demonstration")
    (tmp_path / "sample_machines").symlink_to(root / "sample_machines")
    monkeypatch.setattr(issuing, "now", lambda: NOW)
    monkeypatch.setattr(issuing, "today", lambda: date(2026, 12, 1))
    monkeypatch.setattr(click, "prompt", lambda *_, **__: PASSPHRASE)


def verified(run: Callable[..., object], file: str) -> object:
    return run("verify", file, *DEMONSTRATION[1:], "demonstration/register.db")


@pytest.mark.parametrize("verb", [command.name for command in issuing.COMMANDS])
def test_help_shows_an_example(verb: str) -> None:
    shown = CliRunner().invoke(cli.main, [verb, "--help"], prog_name="jamnut")
    words = " ".join(shown.output.replace("\\\n", " ").split()).replace('"', "'")
    assert f"Example: jamnut {shlex.join(example(verb))}" in words


def test_the_examples_run_one_after_the_other(run: Callable[..., object], tmp_path: Path) -> None:
    done = run(*example("keys"))
    assert (done.status, done.err) == (0, "")
    assert "dora-vell.p12" in done.out

    done = run(*example("verify"))
    assert (done.status, done.err) == (0, "")
    assert [line.strip() for line in done.out.splitlines() if line.endswith(": good")] == [
        "Signatures: good",
        "Content: good",
        "Currency: good",
    ]

    done = run(*example("issue"))
    assert (done.status, done.err) == (0, "")
    assert "PU-07.pdf: revision 1" in done.out
    assert "not issued yet; still to sign: checked, approved" in done.out
    assert verified(run, "PU-07.pdf").status == 3  # it stands in another register

    done = run(*example("sign"))
    assert (done.status, done.err) == (0, "")
    assert "still to sign: approved" in done.out

    done = run(*example("reject"))
    number = pipeline.check(tmp_path / "demonstration" / "clay_mixer.yaml").machine.document
    assert (done.status, done.out) == (0, f"revision 1 of {number} is rejected\n")
    done = run(*example("sign"))
    assert done.status == 1
    assert "It is rejected" in done.err


def test_a_demonstration_is_good_three_times(run: Callable[..., object], tmp_path: Path) -> None:
    """As README's first command makes it; the line that it prints verifies it."""
    shutil.rmtree(tmp_path / "demonstration")
    done = run(*example("demo"))
    assert (done.status, done.err) == (0, "")
    (line,) = re.findall(r"jamnut (verify .+)$", done.out, re.MULTILINE)
    assert run(*shlex.split(line)).status == 0
    done = run(*example("demo"))
    assert done.status == 2
    assert "It is there already" in done.err


def test_the_readme_s_first_command_is_the_example_of_demo(root: Path) -> None:
    text = (root / "README.md").read_text(encoding="utf-8")
    first = re.findall(r"^ {4}(\S.*)$", text, re.MULTILINE)[0]
    assert first.endswith("/jamnut " + shlex.join(example("demo")))
    assert "'.[site]'" in first


def test_the_readme_s_site_file_is_one(root: Path, tmp_path: Path) -> None:
    """The piece that it shows, behind what every site file holds."""
    text = (root / "README.md").read_text(encoding="utf-8")
    (piece,) = re.findall(r"```yaml\n( *record address.+?)```", text, re.DOTALL)
    lines = [line.removeprefix("   ") for line in piece.splitlines()]
    sample = (root / "sample_machines" / "site.yaml").read_text(encoding="utf-8")
    (tmp_path / "site.yaml").write_text(sample + "\n".join(lines) + "\n", encoding="utf-8")
    site = pipeline.check(root / "sample_machines" / "clay_mixer.yaml", tmp_path / "site.yaml").site
    assert site is not None
    assert site.zone == "Europe/Lisbon"
    assert site.signatures.time_server == "https://time.example"


def test_passphrases_from_a_folder(
    run: Callable[..., object], monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    def asked(*_: object, **__: object) -> str:
        raise AssertionError("nothing is asked for")

    monkeypatch.setattr(click, "prompt", asked)
    folder = tmp_path / "demonstration" / "keys"
    done = run(*example("issue"), "--passphrases", folder)
    assert (done.status, done.err) == (0, "")
    (folder / "bram-tolliver.txt").write_bytes(b"demonstration only\r\n")  # as some editors end a line
    done = run(*example("sign"), "--passphrases", folder)
    assert (done.status, done.err) == (0, "")
    (folder / "dora-vell.txt").write_text("valve plate end cap\n", encoding="utf-8")
    done = run(*example("keys"), "--passphrases", folder)
    assert (done.status, done.err) == (0, "")
    for name, text in (("una-lind", None), ("una-lind", b"\xff"), ("una-lind", b"short")):
        if text is not None:
            (folder / f"{name}.txt").write_bytes(text)
        done = run("keys", folder, "--person", "Una Lind", "--passphrases", folder)
        assert done.status == 2
        assert not (folder / "una-lind.p12").exists()


def test_of_several_files_the_gravest_status(
    run: Callable[..., object], monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    """What the words are is no matter here: making each pack again is left out, for its time."""
    made_again = verifying.ContentReport(judgement=Judgement.GOOD, reason="made_from_this", printed="X")
    monkeypatch.setattr(verifying, "judge_content", lambda *_, **__: made_again)
    (tmp_path / "broken.pdf").write_bytes(b"GIF89a")
    assert run("pack", "sample_machines/kiln_pusher.yaml", "-o", "draft.pdf").status == 0
    good, *given = (*DEMONSTRATION, "demonstration/register.db")
    assert run("verify", good, good, *given).status == 0
    assert run("verify", good, "draft.pdf", *given).status == 3
    done = run("verify", "broken.pdf", "draft.pdf", good, *given)
    assert done.status == 2
    assert "broken.pdf" in done.err
    assert "can't be read as a PDF" in done.err
    assert done.out.count("Currency: good") == 1

    done = run("verify", "broken.pdf", good, *given, "--json")
    assert (done.status, done.err) == (2, "")
    assert [one["status"] for one in json.loads(done.out)] == [2, 0]
    done = run("verify", good, *given, "--json")
    assert json.loads(done.out)["content"]["word"] == "good"

    assert run("verify", good, *given, "--code", "https://records.example/r/X?d=Y&v=1").status == 1
    done = run("verify", good, good, *given, "--code", "x")
    assert done.status == 2
    assert "belongs to one file" in done.err


def test_nobody_named_is_wrong_input(run: Callable[..., object]) -> None:
    done = run("issue", "demonstration/clay_mixer.yaml", "--register", "demonstration/register.db")
    assert done.status == 2
    assert "Nobody is named" in done.err


def test_issue_for_ink(run: Callable[..., object]) -> None:
    people = ("--prepared", "Ada Quarrow", "--checked", "Bram Tolliver", "--approved", "Cleo Harnett")
    command = ("issue", "demonstration/clay_mixer.yaml", *people, "--ink", "-o", "ink.pdf", "--register")
    done = run(*command, "demonstration/register.db", "--reason", "in ink")
    assert done.status == 1
    assert "Nothing has changed since revision 1" in done.err
    done = run(*command, "ink.db")
    assert (done.status, done.err) == (0, "")
    assert done.out.splitlines()[-1] == "issued"
    done = run("verify", "ink.pdf", *DEMONSTRATION[1:], "ink.db")
    assert done.status == 3
    assert "Signatures: not established" in done.out
    assert "Currency: good" in done.out


# --- without the extra -----------------------------------------------------------------------------------

WITHOUT = """
import sys
for name in {missing!r}:
    sys.modules[name] = None
from sheets.cli import entry
entry()
"""
"""An import of what stands there as None fails as that of a library that isn't installed."""
EXTRA = ("pyhanko", "cryptography", "asn1crypto", "sqlalchemy", "fontTools", "jsonschema", "referencing")


def run_without(
    folder: Path, root: Path, missing: tuple[str, ...], *arguments: str
) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", WITHOUT.format(missing=missing), *arguments],
        cwd=folder,
        env={"PYTHONPATH": str(root), "PATH": ""},
        capture_output=True,
        text=True,
        check=False,
    )


def test_what_needs_no_signature_runs_without_the_extra(root: Path, tmp_path: Path) -> None:
    sample = "sample_machines/kiln_pusher.yaml"
    for arguments in (("check", sample), ("steps", sample), ("pack", sample, "-o", "draft.pdf")):
        done = run_without(tmp_path, root, EXTRA, *arguments)
        assert done.returncode == 0, done.stderr
    assert (tmp_path / "draft.pdf").read_bytes().startswith(b"%PDF-")


@pytest.mark.parametrize("verb", [command.name for command in issuing.COMMANDS])
def test_what_needs_the_extra_says_how_to_install_it(verb: str, root: Path, tmp_path: Path) -> None:
    done = run_without(tmp_path, root, EXTRA, *example(verb))
    assert done.returncode == 2
    assert done.stdout == ""
    assert "this installation: It can print drafts; " in done.stderr
    assert "pip install '.[site]'" in done.stderr
    assert "Traceback" not in done.stderr


@pytest.mark.parametrize("library", EXTRA)
def test_each_library_of_the_extra_is_missed_by_name(library: str, root: Path, tmp_path: Path) -> None:
    """The archive form is judged when something is issued, the others are needed to read a pack, too."""
    done = run_without(tmp_path, root, (library,), *example("demo")[:2], "another")
    assert done.returncode == 2
    told = "pikepdf.pdfa" if library in ("fontTools", "jsonschema", "referencing") else library
    assert f"need the library {told}" in done.stderr or f"need the library {library}" in done.stderr


def test_another_missing_library_is_a_bug(root: Path, tmp_path: Path) -> None:
    done = run_without(tmp_path, root, ("reportlab",), *example("demo")[:2], "another")
    assert done.returncode == 70
