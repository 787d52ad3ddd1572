"""Commands that tell the register of people, instruments and inspections, and ask it, as typed."""

from __future__ import annotations

import json
import re
import shlex
from collections.abc import Callable
from datetime import UTC, date, datetime
from pathlib import Path

import pytest

from sheets import cli
from sheets.cli import auditing, common, people
from sheets.register.acts import WindowOpened
from sheets.register.issuing import commit, reserve
from sheets.register.opening import create_register, open_register
from sheets.register.revisions import Signer
from sheets.register.saying import tell

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
    for module in (people, auditing):
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
        ("inspect", "WI-0147"),
        ("inspect", "--inspector", "Edda Fenn"),
        ("inspect", "WI-0147", "--with", "Ada Quarrow"),
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


@pytest.fixture
def issued(tmp_path: Path) -> str:
    """An issued revision of the demonstration's document; gives its record id."""
    with open_register(tmp_path / "demonstration" / "register.db") as register:
        held = reserve(
            register,
            document="WI-0147",
            machine="PU-07",
            by="Ada Quarrow",
            when=NOW,
            random_bytes=lambda length: bytes(range(length)),
        )
        commit(
            register,
            held.record_id,
            content_digest="0123456789ABCDEF",
            file_digest="ab" * 32,
            machine_digest="FEDCBA9876543210",
            engine=1,
            signers=[Signer(meaning="prepared", name="Ada Quarrow")],
            by="Ada Quarrow",
            when=NOW,
            ink=True,
        )
    return held.record_id


def test_the_last_inspection_and_whether_it_was_independent(
    run: Callable[..., object], issued: str, tmp_path: Path
) -> None:
    done = run("inspect", *REGISTER)
    assert done.status == 0
    assert done.out.splitlines()[-1].split()[:5] == ["WI-0147", "PU-07", "1", "never", "2027-12-01"]
    assert run("inspect", *REGISTER, "--on", "2027-12-02").status == 1
    assert "OVERDUE by 1 day" in run("inspect", *REGISTER, "--on", "2027-12-02").out

    refused = run(*example("inspect"))
    assert refused.status == 1
    assert "doesn't know them as authorised" in refused.err
    lockout = ("--authorise", "lockout", "--since", "2026-01-12", "--by", "Gita Stoll")
    assert run("people", "Edda Fenn", *REGISTER, *lockout).status == 0
    done = run(*example("inspect"), "--deviation", "tag of Q1 unreadable")
    assert done.err == ""
    assert done.out.splitlines() == [
        "event 5: revision 1 of WI-0147 inspected",
        "open: 1 deviation, 6",
    ]
    shown = run("inspect", "PU-07", *REGISTER)
    assert shown.status == 0
    assert "    inspector: Edda Fenn, not a user of it" in shown.out.splitlines()
    assert "    included: Ada Quarrow, Bram Tolliver" in shown.out.splitlines()
    assert "    deviation 6, open: tag of Q1 unreadable" in shown.out.splitlines()

    # a sheet that is transcribed afterwards shows that the inspector used the procedure
    with open_register(tmp_path / "demonstration" / "register.db") as register, register.writing() as writer:
        used = WindowOpened(
            job=1, people=("Edda Fenn",), where="at the lever", minutes=5, by="Edda Fenn", on=NOW.date()
        )
        told = {"machine": "PU-07", "document": "WI-0147", "record_id": issued}
        tell(writer, used, who="Ada Quarrow", when=NOW, **told)
    shown = run("inspect", issued, *REGISTER)
    assert shown.status == 1
    assert "    inspector: Edda Fenn, NOT INDEPENDENT: used it in events 7" in shown.out.splitlines()
    (clock,) = json.loads(run("inspect", *REGISTER, "--json").out)["clocks"]
    assert (clock["last"]["independent"], clock["last"]["against"], clock["due"]) == (
        False,
        [7],
        "2027-12-01",
    )


@pytest.mark.usefixtures("issued")
def test_the_bundle(run: Callable[..., object], tmp_path: Path) -> None:
    done = run(*example("audit"))
    assert (done.status, done.err) == (0, "")
    first, *lists, anchor = done.out.splitlines()
    assert first.startswith("demonstration/audit.pdf: written, content ")
    assert "demonstration/audit-machines.csv: 1 line" in lists
    assert (tmp_path / "demonstration" / "audit.pdf").read_bytes().startswith(b"%PDF-")
    given = ("--anchor", anchor.removeprefix("anchor to keep outside: "))
    assert run(*example("audit"), *given).status == 0
    wrong = run(*example("audit"), "--anchor", given[1][:-1] + ("0" if given[1][-1] != "0" else "1"))
    assert wrong.status == 3


def test_a_paper_in_hand(run: Callable[..., object], issued: str) -> None:
    assert issued in example("current")
    done = run(*example("current"))
    assert (done.status, done.err) == (0, "")
    assert done.out.startswith("current: revision 1 of WI-0147, machine PU-07\n")
    assert run("current", "0000000000", *REGISTER).status == 3
    done = run(*example("used"))
    assert (done.status, done.err) == (0, "")
    assert done.out.splitlines()[1] == "nothing was told to be used that day"
    done = run(*example("deviations"))
    assert (done.status, done.out, done.err) == (0, "0 deviations\n", "")


def test_what_nothing_was_kept_of_is_not_established(run: Callable[..., object], issued: str) -> None:
    done = run(*example("reprove"))
    assert (done.status, done.err) == (3, "")
    assert f"record {issued}, engine 1: NOTHING WAS KEPT OF IT" in done.out
    (pack,) = json.loads(run(*example("reprove"), "--json").out)["packs"]
    assert (pack["reproof"], pack["content_now"]) == ("nothing was kept of it", None)
    done = run(*example("zeros"))
    assert (done.status, done.out) == (2, "")
    assert "No revision of it is current with what its sheets say" in done.err


def test_nothing_issued_is_nothing_to_make_again(run: Callable[..., object]) -> None:
    done = run(*example("reprove"))
    assert done.status == 0
    assert done.out.endswith(": 0 current packs\n")
