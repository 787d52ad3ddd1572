"""Walking a machine down from the command line, and what of it reaches targets, steps and pack."""

from __future__ import annotations

import io
import json
import sys
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from datetime import date
from pathlib import Path

import pypdfium2
import pytest
import yaml

from sheets import cli, pipeline
from sheets.errors import InputError
from sheets.machine.holding import held
from sheets.pipeline import walking

COMPUTED = ("      setting: 180 bar\n      given by: machine manual, sheet 2\n", "")
"""Without its two lines the setting of RV1 is computed."""
DAY = ("--on", "2026-11-13")


@pytest.fixture
def file(variant: Callable[..., Path]) -> Path:
    return variant(COMPUTED)


@pytest.fixture(autouse=True)
def _late_enough(monkeypatch: pytest.MonkeyPatch) -> None:
    """The samples are dated in November 2026; the clock stands a little later."""
    monkeypatch.setattr(cli, "today", lambda: date(2026, 12, 1))


def answers_in(file: Path) -> dict[str, dict[str, dict[str, str]]]:
    text = file.with_name("machine.walkdown.yaml").read_text(encoding="utf-8")
    found: dict[str, dict[str, dict[str, str]]] = yaml.load(text, Loader=yaml.BaseLoader)  # texts only
    return found


def first_page(pdf: Path) -> str:
    document = pypdfium2.PdfDocument(pdf)
    try:
        return " ".join(document[0].get_textpage().get_text_range().split())
    finally:
        document.close()


def test_from_nothing_to_issuable_and_void_again(
    run: Callable[..., object], file: Path, tmp_path: Path
) -> None:
    pdf = tmp_path / "pack.pdf"
    done = run("pack", file, "-o", pdf)
    assert done.status == 0
    assert "Nobody has compared the machine file" in done.err
    assert 'accepts it: jamnut walkdown MACHINE --by NAME --accept "RV1"' in done.err
    assert "Nobody has yet compared this file with the machine." in first_page(pdf)
    assert "RV1, proposal" in first_page(pdf)
    assert "computed, proposal" in run("targets", file).out
    content = done.out.split(": ")[-1]

    assert run("walkdown", file, "--by", "A. Person", "--all", "--accept", "RV1", *DAY).status == 0

    done = run("pack", file, "-o", pdf)
    assert (done.status, done.err) == (0, "")
    assert done.out.split(": ")[-1] == content  # names and dates are no part of the content
    assert "Compared with the machine by A. Person on 2026-11-13." in first_page(pdf)
    assert "proposal" not in first_page(pdf)
    assert "computed, accepted by A. Person on 2026-11-13" in run("targets", file).out
    assert "before issue" not in run("steps", file).out

    file.write_text(file.read_text().replace("highest: 210 bar", "highest: 211 bar"))

    done = run("steps", file)
    assert done.status == 0
    assert "walk-down is void (1): RV1." in done.out
    assert "The acceptance for RV1" in done.out
    assert "changed since: RV1" in done.out
    run("pack", file, "-o", pdf)
    assert "Entries changed since: 1. Their comparison is void." in first_page(pdf)
    assert "RV1, proposal" in first_page(pdf)
    data = json.loads(run("targets", file, "--json").out)
    assert [one["acceptance"] for one in data["settings"]] == ["proposal"]


def test_a_changed_policy_voids_an_acceptance(run: Callable[..., object], file: Path, tmp_path: Path) -> None:
    run("walkdown", file, "--by", "A", "--all", "--accept", "RV1", *DAY)
    site = tmp_path / "other.yaml"
    site.write_text(
        "format: 1\nplant: Brackwater Tileworks\nplanner telephone: 1\nemergency telephone: 2\n"
        "policies: {gap: 6 bar}\n"
    )

    done = run("steps", file, "--site", site)

    assert "the machine file or the policy figures changed since" in done.out
    assert "walk-down is void" not in done.out


def test_asked_entry_by_entry(
    run: Callable[..., object], file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    run("walkdown", file, "--by", "A", "--agree", "M1", *DAY)
    monkeypatch.setattr(sys, "stdin", io.StringIO("y\nn\nthe plate says 10 bar\nskip\nwhat\ny\nstop\n"))

    done = run("walkdown", file, "--by", "B", *DAY)

    assert done.status == 0
    assert "entries agree; 1 differ, 0 changed since" in done.out
    parts = answers_in(file)["parts"]
    assert {id_: (one["by"], one["answer"]) for id_, one in parts.items()} == {
        "TK1": ("B", "agrees"),
        "M1": ("A", "agrees"),  # not asked again
        "HV1": ("B", "differs"),
        "RV1": ("B", "agrees"),  # PU1 was skipped
    }
    assert parts["HV1"]["note"] == "the plate says 10 bar"


def test_answers_that_end_early_write_nothing(
    run: Callable[..., object], file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(sys, "stdin", io.StringIO("y\ny\n"))

    assert run("walkdown", file, "--by", "B", *DAY).status == 2
    assert [one.name for one in file.parent.iterdir()] == ["machine.yaml"]


@pytest.mark.parametrize(
    ("options", "said"),
    [
        (("--all",), "Nobody is named"),
        (("--on", "2026-11-13"), "Nobody is named"),
        (("--by", "A", "--agree", "RV9"), "Did you mean RV1"),
        (("--by", "A", "--differ", "RV1"), "needs one --note"),
        (("--by", "A", "--differ", "RV1", "--note", " "), "The note is empty"),
        (("--by", " ", "--all"), "The name is empty"),
        (("--by", "\x1b[31m", "--all"), "can't be printed"),
        (("--by", "A", "--all", "--on", "2026-12-02"), "lies in the future"),
        (("--by", "A", "--all", "--on", "2026-11-11"), "is before 2026-11-12"),
        (("--by", "A", "--all", "--on", "yesterday"), "isn't a date"),
        (("--by", "A", "--accept", "RV2"), "Did you mean RV1"),
        (("--by", "A", "--differ", "RV1", "--note", "a", "--agree", "RV1"), "to agree and to differ"),
    ],
)
def test_answers_that_are_refused_write_nothing(
    run: Callable[..., object], file: Path, options: tuple[str, ...], said: str
) -> None:
    done = run("walkdown", file, *options)

    assert done.status == 2
    assert said in done.err
    assert [one.name for one in file.parent.iterdir()] == ["machine.yaml"]


def test_a_given_setting_needs_no_acceptance(
    run: Callable[..., object], variant: Callable[..., Path]
) -> None:
    file = variant()

    done = run("walkdown", file, "--by", "A", "--accept", "RV1", *DAY)

    assert done.status == 2
    assert "given, by machine manual, sheet 2" in done.err
    assert "computed" not in run("targets", file).out.split("\n\n")[0]


@pytest.mark.parametrize("verb", ["check", "targets", "steps", "pack", "walkdown"])
def test_a_walk_down_that_can_not_be_read_stops_every_command(
    run: Callable[..., object], file: Path, verb: str
) -> None:
    file.with_name("machine.walkdown.yaml").write_text("format: 1\nmachine: PU-09\n")

    done = run(verb, file)

    assert done.status == 2
    assert done.err.startswith("machine.walkdown.yaml, line 2, machine: This is the walk-down of PU-09")


def test_an_answer_from_the_future_is_refused(run: Callable[..., object], file: Path) -> None:
    run("walkdown", file, "--by", "A", "--agree", "RV1", *DAY)
    beside = file.with_name("machine.walkdown.yaml")
    beside.write_text(beside.read_text().replace("2026-11-13", "2027-01-01"))

    done = run("pack", file)

    assert done.status == 2
    assert "RV1, day: 2027-01-01 lies in the future" in done.err


def test_data_of_the_list(run: Callable[..., object], file: Path) -> None:
    run("walkdown", file, "--by", "A", "--differ", "RV1", "--note", "a", *DAY)

    data = json.loads(run("walkdown", file, "--json").out)

    assert set(data) == {"format", "tag", "dated", "complete", "entries", "settings"}
    (entry,) = [one for one in data["entries"] if one["id"] == "RV1"]
    assert set(entry) == {"section", "id", "state", "by", "on", "note", "reads"}
    assert (entry["state"], entry["by"], entry["on"], entry["note"]) == ("differs", "A", "2026-11-13", "a")
    (setting,) = data["settings"]
    assert set(setting) == {"adjuster", "state", "computed_bar", "accepted_bar", "by", "on"}
    assert (setting["state"], setting["accepted_bar"]) == ("proposal", None)


def test_answers_of_several_at_once_are_all_kept(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Each reads, adds its own and writes back; begun together, none may write over another's."""
    read = walking.walkdown_beside

    def read_slowly(*given: object) -> object:
        found = read(*given)
        time.sleep(0.2)  # long enough that every other has read meanwhile, if nothing keeps it
        return found

    monkeypatch.setattr(walking, "walkdown_beside", read_slowly)
    described = pipeline.check(file)
    entries = ("M1", "HV1", "PU1", "TP1")

    def answer(id_: str) -> None:
        day = date(2026, 11, 13)
        said = pipeline.Answers(by="A", on="", today=day, agree=(id_,))
        pipeline.write_walkdown(file, described, said)

    with ThreadPoolExecutor(len(entries)) as together:
        list(together.map(answer, entries))
    assert set(answers_in(file)["parts"]) == set(entries)


def test_a_file_that_another_command_holds_is_told(tmp_path: Path) -> None:
    target = tmp_path / "a.walkdown.yaml"
    with (
        held(target),
        pytest.raises(InputError, match="Another command is writing"),
        held(target, seconds=0.1),
    ):
        pass
    with held(target, seconds=0.1):
        assert not target.exists()
