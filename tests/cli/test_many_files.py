"""Several machine files and folders at once, starters and differences from the command line."""

from __future__ import annotations

import json
import re
import shutil
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from sheets.pipeline import many

BEYOND = "    where: after the pump manifold, beyond RV1 and TP1\n"


@pytest.fixture
def folder(root: Path, tmp_path: Path) -> Path:
    """Two good machines, one that can't be set, one that can't be read, and what is no machine file."""
    found = tmp_path / "machines"
    found.mkdir()
    for name in ("glaze_press.yaml", "kiln_pusher.yaml", "site.yaml"):
        shutil.copy(root / "sample_machines" / name, found)
    text = (found / "kiln_pusher.yaml").read_text(encoding="utf-8")
    low = text.replace(f"{BEYOND}    rating: 315 bar", f"{BEYOND}    rating: 100 bar")
    assert low != text
    (found / "low.yaml").write_text(low.replace("PU-03", "PU-04"), encoding="utf-8")
    (found / "bad.yaml").write_text(text.replace("volume: 120 L", "volume: 120 bar"), encoding="utf-8")
    (found / "glaze_press.walkdown.yaml").write_text("format: 1\nmachine: PU-12\n", encoding="utf-8")
    (found / ".hidden.yaml").write_text("x", encoding="utf-8")
    (found / "notes.txt").write_text("x", encoding="utf-8")
    return found


def rows(out: str) -> dict[str, list[str]]:
    """Columns of each row by the file's name."""
    cells = [re.split(r" {2,}", line) for line in out.splitlines()[1:]]
    return {Path(row[0]).name: row[1:] for row in cells}


def test_a_folder_is_a_table_with_the_gravest_status(run: Callable[..., object], folder: Path) -> None:
    done = run("steps", folder)

    assert done.status == 2
    assert done.err == ""
    found = rows(done.out)
    assert list(found) == ["bad.yaml", "glaze_press.yaml", "kiln_pusher.yaml", "low.yaml"]
    assert found["bad.yaml"][0] == "wrong input"
    assert "bad.yaml, line 24, TK1, volume" in found["bad.yaml"][1]
    assert found["kiln_pusher.yaml"] == ["PU-03", "good", "1 of 1"]
    assert found["glaze_press.yaml"][:3] == ["PU-12", "good", "2 of 3"]
    assert found["low.yaml"][:2] == ["PU-04", "refused"]


@pytest.mark.parametrize(("left_out", "status"), [((), 2), (("bad.yaml",), 1), (("bad.yaml", "low.yaml"), 0)])
@pytest.mark.parametrize("verb", ["targets", "steps", "pack"])
def test_gravest_status(
    run: Callable[..., object],
    folder: Path,
    verb: str,
    left_out: tuple[str, ...],
    status: int,
) -> None:
    for name in left_out:
        (folder / name).unlink()

    assert run(verb, folder).status == status


def test_files_named_twice_and_files_that_are_not_there(run: Callable[..., object], folder: Path) -> None:
    done = run(
        "check", folder / "kiln_pusher.yaml", folder / ".." / "machines" / "kiln_pusher.yaml", "no.yaml"
    )

    found = rows(done.out)
    assert list(found) == ["kiln_pusher.yaml", "no.yaml"]
    assert found["no.yaml"][0] == "wrong input"
    assert done.status == 2


def test_data_is_a_list(run: Callable[..., object], folder: Path) -> None:
    data = json.loads(run("targets", folder, "--json").out)

    assert [one["status"] for one in data] == [2, 0, 0, 1]
    for one in data:
        assert set(one) == {"file", "tag", "status", "verdict", "problems", "result"}
    assert data[0]["result"] is None
    assert data[0]["problems"][0]["fix"]
    alone = json.loads(run("targets", folder / "kiln_pusher.yaml", "--json").out)
    assert data[2]["result"] == alone


def test_packs_go_into_a_folder(run: Callable[..., object], folder: Path, tmp_path: Path) -> None:
    target = tmp_path / "out"
    target.mkdir()

    done = run("pack", folder, "-o", target)

    assert done.status == 2
    assert sorted(file.name for file in target.iterdir()) == ["PU-03-draft.pdf", "PU-12-draft.pdf"]
    run("pack", folder / "kiln_pusher.yaml", "-o", tmp_path / "alone.pdf")
    assert (target / "PU-03-draft.pdf").read_bytes() == (tmp_path / "alone.pdf").read_bytes()


def test_two_machines_of_one_tag_do_not_overwrite_each_other(
    run: Callable[..., object], root: Path, tmp_path: Path
) -> None:
    for name in ("one.yaml", "two.yaml"):
        shutil.copy(root / "sample_machines" / "kiln_pusher.yaml", tmp_path / name)

    done = run("pack", "one.yaml", "two.yaml")

    assert done.status == 2
    assert rows(done.out)["one.yaml"][1] == "good"
    assert rows(done.out)["two.yaml"][:2] == ["PU-03", "wrong input"]


def test_no_folder_to_write_into(run: Callable[..., object], folder: Path, tmp_path: Path) -> None:
    done = run("pack", folder / "kiln_pusher.yaml", folder / "glaze_press.yaml", "-o", tmp_path / "none")

    assert done.status == 2
    assert {row[1] for row in rows(done.out).values()} == {"wrong input"}
    assert not (tmp_path / "none").exists()


def test_a_folder_without_machines(run: Callable[..., object], tmp_path: Path) -> None:
    done = run("check", tmp_path)

    assert done.status == 2
    assert "There is no machine file in this folder" in done.err


@pytest.mark.parametrize("terminal", [True, False])
def test_progress_is_for_a_terminal(
    run: Callable[..., object], folder: Path, monkeypatch: pytest.MonkeyPatch, terminal: bool
) -> None:
    monkeypatch.setattr(sys.stderr, "isatty", lambda: terminal, raising=False)

    assert ("2 of 4: " in run("check", folder).err) is terminal


def test_a_bug_at_one_file_keeps_the_others(
    run: Callable[..., object], folder: Path, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    whole = many.check

    def fail(file: Path, *others: object) -> object:
        if file.name == "glaze_press.yaml":
            raise RuntimeError("a wheel came off")
        return whole(file, *others)  # type: ignore[arg-type]  # handed through

    monkeypatch.setattr(many, "check", fail)
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))

    done = run("check", folder)

    assert done.status == 70
    assert rows(done.out)["kiln_pusher.yaml"][1] == "good"
    (kept,) = tmp_path.glob("jamnut-bug-*.txt")
    assert str(kept) in " ".join(rows(done.out)["glaze_press.yaml"])
    assert "a wheel came off" in kept.read_text(encoding="utf-8")


def test_the_task_holds_for_every_file(run: Callable[..., object], folder: Path) -> None:
    (folder / "bad.yaml").unlink()
    (folder / "low.yaml").unlink()

    data = json.loads(run("steps", folder, "--task", "read", "--json").out)

    assert len(data) == 2
    for one in data:
        assert "set" not in [stage["kind"] for stage in one["result"]["stages"]]
    assert run("steps", folder, "--why", "RV1").status == 2
    assert run("steps", folder, "--skew").status == 2


# --- new and diff ----------------------------------------------------------------------------------------


def test_new_lists_writes_and_refuses(run: Callable[..., object], tmp_path: Path) -> None:
    listed = run("new")
    assert listed.status == 0
    kinds = [line.split()[0] for line in listed.out.splitlines()]
    assert kinds == ["compensated", "fixed-pump", "load-sensing"]
    assert all(line.endswith(".") for line in listed.out.splitlines())

    for kind in kinds:
        assert run("new", kind, f"{kind}.yaml").status == 0
        done = run("check", f"{kind}.yaml")
        assert done.status == 2
        assert done.err.startswith(f"{kind}.yaml, line 11, tag: The machine's own tag, such as PU-07.")
        before = (tmp_path / f"{kind}.yaml").read_bytes()
        assert run("new", kind, f"{kind}.yaml").status == 2
        assert (tmp_path / f"{kind}.yaml").read_bytes() == before
    assert run("new", "fixed-pump").status == 2
    assert "Did you mean fixed-pump" in run("new", "fixedpump", "a.yaml").err


def test_diff_gives_data_and_the_gravest_status(run: Callable[..., object], folder: Path) -> None:
    good, low, bad = (folder / f"{name}.yaml" for name in ("kiln_pusher", "low", "bad"))

    same = run("diff", good, good, "--json")
    assert same.status == 0
    assert json.loads(same.out)["changes"] == []
    differing = run("diff", good, low, "--json")
    assert differing.status == 1
    data = json.loads(differing.out)
    assert set(data) == {"format", "old", "new", "changes"}
    assert (data["old"]["status"], data["new"]["status"]) == (0, 1)
    assert {
        "section": "parts",
        "place": ["HV2", "rating"],
        "old": "315 bar",
        "new": "100 bar",
    } in data["changes"]
    unread = run("diff", bad, folder / "no.yaml")
    assert unread.status == 2
    assert "OLD bad.yaml, line 24, TK1, volume" in unread.err
    assert "NEW no.yaml: The file can't be read" in unread.err
