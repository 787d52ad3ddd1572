"""Commands that tell the register of people and instruments, and ask it, as a person types them."""

from __future__ import annotations

import json
import re
import shlex
from collections.abc import Callable
from datetime import UTC, date, datetime
from pathlib import Path

import pytest

from sheets import cli
from sheets.cli import common, people
from sheets.register.opening import create_register

NOW = datetime(2026, 12, 1, 12, 0, tzinfo=UTC)
REGISTER = ("--register", "demonstration/register.db")


def example(verb: str) -> list[str]:
    """Words of the example in a command's help, which a shell reads as one line."""
    text = (cli.main.commands[verb].help or "").replace("\\\n", " ")
    (found,) = re.findall(r"^ *Example: jamnut (.+)$", text, flags=re.MULTILINE)
    return shlex.split(found)


@pytest.fixture(autouse=True)
def _stage(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """In a folder with a register, at a fixed time."""
    (tmp_path / "demonstration").mkdir()
    create_register(tmp_path / "demonstration" / "register.db", by="Edda Fenn", when=NOW).close()
    monkeypatch.setattr(common, "today", lambda: date(2026, 12, 1))
    for module in (people,):
        monkeypatch.setattr(module, "now", lambda: NOW)
        monkeypatch.setattr(module, "today", lambda: date(2026, 12, 1))


def test_was_this_person_authorised_that_day(run: Callable[..., object]) -> None:
    done = run(*example("people"))
    assert (done.status, done.out, done.err) == (0, "event 2\n", "")

    asked = ("people", "ada quarrow", *REGISTER, "--may", "lockout", "--on")
    done = run(*asked, "2026-06-30")
    assert (done.status, done.err) == (0, "")
    first, _, _, row = done.out.splitlines()
    assert first == "Ada Quarrow was authorised for 'lockout' on 2026-06-30"
    assert row.split()[:2] == ["2", "Ada"]  # the event that it follows from

    done = run(*asked, "2026-01-11")
    assert done.status == 1
    assert "Ada Quarrow was not authorised for 'lockout' on 2026-01-11" in done.out

    ended = ("--end", "lockout", "--last", "2026-08-31", "--reason", "changed works", "--by", "Edda Fenn")
    assert run("people", "Ada Quarrow", *REGISTER, *ended).out == "event 3\n"
    assert [run(*asked, day).status for day in ("2026-08-31", "2026-09-01")] == [0, 1]


def test_people_as_data(run: Callable[..., object]) -> None:
    run(*example("people"))
    trained = ("--trained", "lockout", "--on", "2026-02-02", "--by", "Edda Fenn")
    assert run("people", "Ada Quarrow", *REGISTER, *trained).status == 0
    (one,) = json.loads(run("people", *REGISTER, "--json").out)["people"]
    assert one == {
        "name": "Ada Quarrow",
        "may": None,
        "authorised": [
            {"event": 2, "for": "lockout", "since": "2026-01-12", "until": None, "by": "Edda Fenn"}
        ],
        "trained": [{"event": 3, "in": "lockout", "on": "2026-02-02", "until": None, "by": "Edda Fenn"}],
    }


@pytest.mark.parametrize(
    "words",
    [
        ("people", "Nobody Here"),
        ("people", "Ada Quarrow", "--authorise", "lockout"),  # who says so?
        ("people", "--authorise", "lockout", "--by", "Edda Fenn"),  # whom?
        ("people", "Ada Quarrow", "--authorise", "lockout", "--trained", "lockout", "--by", "Edda Fenn"),
        ("people", "Ada Quarrow", "--authorise", "lockout", "--since", "12.1.2026", "--by", "Edda Fenn"),
        ("people", "Ada Quarrow", "--trained", "lockout", "--on", "2026-12-02", "--by", "Edda Fenn"),
        ("instruments", "99"),
        ("instruments", "BT-1", "--certificate", "C-1", "--due", "2027-01-01", "--by", "Edda Fenn"),
        ("instruments", "BT-1", "--certificate", "C-1", "--bad", "sticks"),
        ("instruments", "BT-1", "--bad", "sticks", "--by", "Edda Fenn"),
    ],
)
def test_what_is_left_out_or_unknown_is_wrong_input(
    run: Callable[..., object], words: tuple[str, ...]
) -> None:
    done = run(*words, *REGISTER)
    assert (done.status, done.out) == (2, "")
    assert done.err


def test_a_gauge_and_what_hangs_on_it(run: Callable[..., object]) -> None:
    assert run("instruments", *REGISTER).out == "no gauge is listed\n"
    done = run(*example("instruments"))
    assert (done.status, done.out, done.err) == (0, "event 2\n", "")
    done = run("instruments", "17", *REGISTER)
    assert done.out.splitlines()[1].split()[:3] == ["2", "BT-4471", "17"]
    assert done.out.splitlines()[1].endswith("4 bar          C-2209       2027-05-31  usable")
    assert done.out.splitlines()[2] == "read with it: 0"
    assert "overdue" in run("instruments", *REGISTER, "--on", "2027-06-01").out

    bad = ("--bad", "sticks at 90 bar", "--good", "2026-05-31", "--by", "Edda Fenn")
    done = run("instruments", "17", *REGISTER, *bad)
    assert "found bad on 2026-12-01 by Edda Fenn: sticks at 90 bar (event 3)" in done.out
    assert run("instruments", "17", *REGISTER, *bad).status == 1
