"""Commands of the register and of the work at a machine, on a demonstration; their examples run."""

from __future__ import annotations

import csv
import io
import json
import re
import shlex
import shutil
import subprocess
from collections.abc import Callable
from datetime import date, timedelta
from pathlib import Path

import click
import pytest
from test_issuing_commands import NOW, example

from sheets import cli, pipeline
from sheets.cli import common, issuing, people, recording, registering, tagging
from sheets.machine.loading import parse_entry
from sheets.machine.record import RecordFile
from sheets.register.opening import open_register
from sheets.register.people import Authorised
from sheets.register.readings import readings
from sheets.register.rows import Row
from sheets.register.saying import tell

REGISTER = ("--register", "demonstration/register.db")
MODULES = (registering, recording, tagging)
GAUGE = (
    "instruments", "8831", "--number", "17", "--range", "250 bar", "--error", "0.2 bar", "--certificate",
    "C-204", "--due", "2027-03-01", "--by", "Ada Quarrow", *REGISTER,
)  # fmt: skip


@pytest.fixture(scope="session")
def made(root: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A demonstration that no test changes."""
    folder = tmp_path_factory.mktemp("recorded") / "demonstration"
    sample = root / "sample_machines" / "clay_mixer.yaml"
    day_before = NOW - timedelta(days=1)
    pipeline.demo(sample, folder, when=day_before, random_bytes=lambda length: bytes(range(length)))
    return folder


@pytest.fixture(autouse=True)
def _stage(made: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """In a folder where the demonstration was made, at a fixed time."""
    shutil.copytree(made, tmp_path / "demonstration")
    for module in (issuing, people, *MODULES):
        monkeypatch.setattr(module, "now", lambda: NOW, raising=False)
        monkeypatch.setattr(module, "today", lambda: date(2026, 12, 1), raising=False)
    monkeypatch.setattr(common, "today", lambda: date(2026, 12, 1))


@pytest.fixture
def record_id(tmp_path: Path) -> str:
    place = tmp_path / "demonstration" / "register.db"
    with open_register(place, read_only=True) as register, register.reading() as view:
        return next(view.events(kinds={"issued"})).record_id


@pytest.fixture
def rows(record_id: str) -> tuple[Row, ...]:
    from sheets.register.finding import revision_of

    with open_register("demonstration/register.db", read_only=True) as register:
        issue = revision_of(register, record_id).issue
    assert issue is not None
    assert issue.kept is not None
    return issue.kept.rows


def words_of(verb: str, record_id: str, **numbers: int) -> list[str]:
    """An example's words, with a record id and numbers that are there."""
    return [
        record_id if word == "0123456789" else str(numbers["number"]) if word.isdigit() else word
        for word in example(verb)
    ]


def printed(file: str) -> str:
    """The text of a PDF, blanks made single."""
    made = subprocess.run(["pdftotext", file, "-"], capture_output=True, text=True, check=True)
    return " ".join(made.stdout.split())


def record_file(tmp_path: Path, record_id: str, *lines: str) -> Path:
    file = tmp_path / "job.yaml"
    head = (
        "format: 1", f"record: {record_id}", "why: yearly check", "day: 2026-12-01",
        "people: [Ada Quarrow, Bram Tolliver]", "from paper: yes",
    )  # fmt: skip
    file.write_text("\n".join((*head, *lines)) + "\n", encoding="utf-8")
    return file


@pytest.mark.parametrize("verb", [command.name for module in MODULES for command in module.COMMANDS])
def test_help_shows_an_example(run: Callable[..., object], verb: str) -> None:
    shown = run(verb, "--help")
    words = " ".join(shown.out.replace("\\\n", " ").split()).replace('"', "'")
    assert f"Example: jamnut {shlex.join(example(verb))}" in words


def test_a_job_from_a_file_to_a_tag_with_what_was_left(
    run: Callable[..., object], tmp_path: Path, record_id: str, rows: tuple[Row, ...]
) -> None:
    assert run(*GAUGE).status == 0
    told = Authorised(name="Ada Quarrow", what="lockout", since=date(2026, 12, 1), by="Cleo Harnett")
    with open_register("demonstration/register.db") as register, register.writing() as writer:
        tell(writer, told, who="Cleo Harnett", when=NOW)
    first, second, *_ = rows
    file = record_file(
        tmp_path,
        record_id,
        "told:",
        "  - {when: before, people: [Eva Lund], at: '08:55'}",
        "locks:",
        "  - {where: Q1, lock: A-3, by: Ada Quarrow, on at: '09:05', off at: '10:40'}",
        "zeros:",
        "  - {where: TP1, value: 0 bar, gauge: '8831', moved: yes, by: Bram Tolliver}",
        "windows:",
        "  - {people: [Ada Quarrow], where: at the lever, minutes: 30}",
        "readings:",
        f"  - {{row: 1, as found: {first.low} bar, as left: {first.target} bar, gauge: '17', oil: 48 °C,"
        " seal: whole}",
        f"  - {{row: 2, as found: {second.target} bar, as left: {second.target} bar, gauge: '8831',"
        " seal: none}",
        "end: done",
    )
    done = run("record", file, "--by", "Cleo Harnett", *REGISTER)
    assert (done.status, done.err) == (0, "")
    assert re.search(rf"row 1  {first.called}  as left  {first.target} bar  within its window", done.out)
    assert done.out.startswith("job ")
    assert done.out.splitlines()[0].endswith(": done")
    assert done.out.endswith("  not known as authorised on 2026-12-01: Bram Tolliver\n")

    done = run(*words_of("tags", record_id))
    assert (done.status, done.err) == (0, "")
    assert f"{first.adjuster}: as left {first.target} bar · 2026-12-01 · gauge 8831" in done.out
    text = printed("tags.pdf")
    assert f"as left {first.target} bar · 2026-12-01 · gauge 8831" in text
    assert "DRAFT" not in text

    post = ("tags", record_id, "--post", first.adjuster, "--where", "on the valve", "--by", "Ada Quarrow")
    assert run(*post, *REGISTER).out.startswith(f"tag of {first.adjuster} hangs: as left {first.target} bar")
    done = run("instruments", "17", *REGISTER)
    assert "read with it: 5" in done.out  # two rows, found and left, and a zero


def test_outside_is_accepted_by_name_and_the_tag_waits_for_it(
    run: Callable[..., object], tmp_path: Path, record_id: str, rows: tuple[Row, ...]
) -> None:
    run(*GAUGE)
    row = rows[0]
    outside = str(int(row.high) + 1)
    assert float(outside) <= float(row.ladder_high)
    line = f"  - {{row: 1, as found: {row.target} bar, as left: {outside} bar, gauge: '17', seal: none}}"
    file = record_file(tmp_path, record_id, "readings:", line)
    done = run("record", file, "--by", "Ada Quarrow", *REGISTER)
    assert done.status == 0
    (job,) = re.findall(r"^job (\d+)", done.out)
    (number,) = re.findall(r"deviation (\d+) is open", done.out)
    assert f"set it again, or: jamnut settle {number} --accept" in done.out

    tag = f"left {outside} bar · dev. {number} OPEN"
    assert tag in run("tags", record_id, "-o", "tags.pdf", *REGISTER).out
    assert tag in printed("tags.pdf")
    hung = run("tags", record_id, "--post", row.adjuster, "--where", "here", "--by", "Ada Quarrow", *REGISTER)
    assert (hung.status, f"Deviation {number} about how it was left is open" in hung.err) == (1, True)
    end = ("end", job, "--as", "done", "--by", "Ada Quarrow", *REGISTER)
    assert run(*end).status == 1
    done = run(*words_of("settle", record_id, number=int(number)))
    assert done.out == f"deviation {number} is accepted by Cleo Harnett\n"
    assert run(*words_of("end", record_id, number=int(job))).out == f"job {job}: done\n"
    tag = f"left {outside} bar · dev. {number} accepted"
    assert tag in run("tags", record_id, "-o", "tags.pdf", *REGISTER).out
    assert tag in printed("tags.pdf")


def test_what_is_refused_leaves_nothing_of_the_rest(
    run: Callable[..., object], tmp_path: Path, record_id: str, rows: tuple[Row, ...]
) -> None:
    run(*GAUGE)
    good = f"  - {{row: 1, as found: {rows[0].target} bar, gauge: '17', seal: none}}"
    before = run(*example("check-register")).out
    for line, status, says in (
        ("  - {row: 2, as found: 190 psi, gauge: '17', seal: none}", 2, "the sheet has bar there"),
        ("  - {row: 9, as found: 190 bar, gauge: '17', seal: none}", 2, "no such row"),
        ("  - {row: 2, as found: 190 bar, gauge: '18', seal: none}", 1, "No gauge with this number"),
        ("  - {row: 2, as left: 190 bar, gauge: '17', seal: none}", 1, "without having been read as found"),
        ("  - {row: 2, as found: 190, gauge: '17', seal: none}", 2, "line 9, readings, item 2, as found"),
        ("  - {row: 1, as found: 190 bar, gauge: '17', seal: none}", 2, "Row 1 stands twice"),
        ("  - {row: 2, gauge: '17', seal: none}", 2, "neither a reading as found nor one as left"),
    ):
        file = record_file(tmp_path, record_id, "readings:", good, line)
        done = run("record", file, "--by", "Cleo Harnett", *REGISTER)
        assert (done.status, done.out) == (status, ""), line
        assert says in done.err, done.err
    assert run(*example("check-register")).out == before


def test_asked_row_by_row(
    run: Callable[..., object], monkeypatch: pytest.MonkeyPatch, record_id: str, rows: tuple[Row, ...]
) -> None:
    run(*GAUGE)
    said = {"why the work is done": "yearly check", "who worked": "Ada Quarrow, Bram Tolliver"}
    said |= {f"row 1, {rows[0].called}, as found": rows[0].target, "    gauge": "17", "    oil": "48.5"}
    said |= {"    seal": "whole"}

    def prompt(text: str, default: str = "", **_: object) -> str:
        return next((answer for begins, answer in said.items() if text.startswith(begins)), default)

    monkeypatch.setattr(click, "prompt", prompt)
    done = run(*words_of("record", record_id))
    assert (done.status, done.err) == (0, "")
    with open_register("demonstration/register.db", read_only=True) as register, register.reading() as view:
        (one,) = readings(view)
    assert (one.said.value, one.said.oil_c, one.said.people) == (
        rows[0].target,
        "48.5",
        ("Ada Quarrow", "Bram Tolliver"),
    )
    done = run(*words_of("strike", record_id, number=one.told.sequence))
    assert done.out == f"reading {one.told.sequence} is struck through\n"


def test_a_wrong_answer_is_asked_again_at_once(
    run: Callable[..., object], monkeypatch: pytest.MonkeyPatch, record_id: str, rows: tuple[Row, ...]
) -> None:
    run(*GAUGE)
    said = {
        "number of the open job": ["fourty", ""],
        "why the work is done": ["", "yearly check"],
        "day of": ["yesterday", "2026-12-01"],
        "who worked": ["", "Ada Quarrow"],
        "copied from": ["perhaps", "no"],
        f"row 1, {rows[0].called}, as found": ["much", rows[0].target],
        "    gauge": ["", "17"],
        "    oil": ["warm", "48.5"],
        "    seal": ["whole"],
    }

    def prompt(text: str, default: str = "", **_: object) -> str:
        left = next((answers for begins, answers in said.items() if text.startswith(begins)), None)
        return default if left is None else left.pop(0)

    monkeypatch.setattr(click, "prompt", prompt)
    done = run(*words_of("record", record_id))
    assert done.status == 0, done.err
    assert not any(said.values())
    assert "'perhaps' is neither yes nor no" in done.err
    assert f"row 1  {rows[0].called}  as found" in done.out


def test_answers_that_end_early_are_wrong_input(
    run: Callable[..., object], monkeypatch: pytest.MonkeyPatch, record_id: str
) -> None:
    monkeypatch.setattr("sys.stdin", io.StringIO("\n"))
    done = run(*words_of("record", record_id))
    assert done.status == 2
    assert "The answers end before the questions do" in done.err


def test_copies_from_hanging_to_taking_down(run: Callable[..., object], record_id: str) -> None:
    document = example("copies")[1]
    assert run(*example("copies")).out == "no copies\n"
    hang = run("copies", document, "--hang", "by the press", "--by", "Ada Quarrow", *REGISTER)
    assert hang.out == "copy 1 of revision 1 hangs: by the press\n"
    assert run(*words_of("withdraw", record_id)).out == f"revision 1 of {document} is withdrawn\n"
    assert "TAKE DOWN: revision 1 is no longer current" in run(*example("copies")).out
    assert run("copies", document, "--hang", "there", "--by", "Ada Quarrow", *REGISTER).status == 1
    down = ("copies", document, "--down", "1", "--by", "Bram Tolliver", *REGISTER)
    assert run(*down).out == "copy 1 is down\n"
    assert run(*down).status == 2
    assert "taken down 2026-12-01 by Bram Tolliver" in run(*example("copies")).out


def test_history_export_backup_restore_and_check(run: Callable[..., object], tmp_path: Path) -> None:
    done = run(*example("history"))
    assert done.out.split()[0] == "2"
    assert "  issued  " in done.out
    assert run("history", "nothing", *REGISTER).status == 2

    lines = run(*example("export")).out.splitlines()
    assert [json.loads(line)["sequence"] for line in lines] == list(range(1, len(lines) + 1))
    table = list(csv.DictReader(io.StringIO(run("export", "--as", "csv", *REGISTER).out)))
    assert [row["hash"] for row in table] == [json.loads(line)["hash"] for line in lines]

    kept = run(*example("backup"))
    (anchor,) = re.findall(r"anchor to keep outside: (\S+)", kept.out)
    assert run(*example("backup")).status == 2  # nothing is written over
    restored = run(*example("restore"), "--anchor", anchor)
    assert anchor in restored.out
    assert "No anchor" not in restored.out
    short = "".join(f"{line}\n" for line in lines[:-2])
    (tmp_path / "short.jsonl").write_text(short, encoding="utf-8")
    cut = run("restore", "short.jsonl", "--register", "cut.db")
    assert (cut.status, "No anchor was given: an end that was cut off" in cut.out) == (0, True)
    checked = run("check-register", "--register", "restored.db", "--anchor", anchor)
    assert (checked.status, "No anchor" in checked.out) == (0, False)
    assert run("export", "--register", "restored.db").out.splitlines() == lines
    assert run(*example("check-register")).out.startswith(f"whole: {len(lines)} events")
    wrong = f"{len(lines)}:{'0' * 64}"
    for arguments in (("check-register", *REGISTER), ("restore", "monday.jsonl", "--register", "other.db")):
        assert run(*arguments, "--anchor", wrong).status in (1, 2)
    damaged = (tmp_path / "monday.jsonl").read_text(encoding="utf-8").replace('"who":"Ada', '"who":"Eda', 1)
    (tmp_path / "monday.jsonl").write_text(damaged, encoding="utf-8")
    assert "damaged or was changed" in run("restore", "monday.jsonl", "--register", "other.db").err
    assert not (tmp_path / "other.db").exists()
    assert run(*example("migrate")).out == "format 2\n"


def test_a_register_that_is_not_there(run: Callable[..., object], record_id: str) -> None:
    for verb in ("history", "copies", "export", "check-register", "migrate"):
        done = run(*[word.replace("register.db", "nothing.db") for word in words_of(verb, record_id)])
        assert done.status == 2, verb
        assert "There is no register there" in done.err
    assert list(cli.main.commands)


def test_the_readme_s_record_file_is_one(root: Path) -> None:
    text = (root / "README.md").read_text(encoding="utf-8")
    (piece,) = re.findall(r"```yaml\n( *format: 1\n *record: .+?)```", text, re.DOTALL)
    lines = [line.removeprefix("   ") for line in piece.splitlines()]
    said = parse_entry("\n".join(lines).encode(), "README", RecordFile)
    assert (said.record, said.from_paper, said.end) == ("0123456789", True, "done")
    assert [len(part) for part in (said.told, said.locks, said.zeros, said.windows, said.readings)] == [1] * 5
