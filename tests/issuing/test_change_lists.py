"""Only changed content makes a revision, and what changed is printed, kept and told with its reason."""

from __future__ import annotations

import subprocess
from pathlib import Path

import pytest
from works import BRAM, Works

from sheets import pipeline
from sheets.errors import RefusedError
from sheets.machine.loading import Sources
from sheets.pages.compose.matter import Matter
from sheets.pages.document import Layout
from sheets.pipeline.changing import changes_since
from sheets.pipeline.keeping import kept_of, rows_of, sources_of
from sheets.pipeline.printing import whole_content
from sheets.register.opening import open_register
from sheets.register.rows import Outcome, judged


def edited(works: Works, old: str, new: str) -> Matter:
    text = works.machine.read_text(encoding="utf-8")
    assert text.count(old) == 1
    works.machine.write_text(text.replace(old, new), encoding="utf-8")
    return pipeline.steps(pipeline.check(works.machine))


def test_the_same_content_is_no_revision_whatever_else_differs(works: Works, job: Matter) -> None:
    works.issue(job)
    before = works.files()
    for other in ({}, {"layout": pipeline.layout_named("Letter")}, {"ink": True, "prepared": "Bo Ek"}):
        with pytest.raises(RefusedError, match="Nothing has changed since revision 2"):
            works.issue(job, **other)
    assert works.files() == before


def test_another_revision_says_why(works: Works, job: Matter) -> None:
    before = works.files()
    with pytest.raises(RefusedError, match="Revision 1 is current, and nothing says why"):
        works.issue(job, reason="")
    assert works.files() == before


def test_what_changed_is_printed_kept_and_judged_by_somebody(works: Works, job: Matter) -> None:
    works.issue(job, reason="the plate says so")
    issued = works.revisions()[1].issue
    assert issued is not None
    kept = issued.kept
    assert kept is not None
    assert (kept.reason, kept.reviewer) == ("the plate says so", BRAM)  # who checks it, unless said otherwise
    assert kept.changes == ("machine name: Kiln-car pusher power unit → Kiln-car pusher, power unit",)
    command = ["pdftotext", "-l", "1", "-layout", works.pack, "-"]
    text = subprocess.run(command, capture_output=True, text=True, check=True).stdout
    assert f"reason: the plate says so; reviewed by {BRAM}" in text
    assert "Kiln-car pusher power unit → Kiln-car pusher, power unit" in text
    first = works.revisions()[0].issue
    assert first is not None
    assert first.kept is not None
    assert (first.kept.reason, first.kept.changes) == ("", ())


def test_the_register_keeps_what_a_pack_can_be_made_of_again(works: Works, job: Matter) -> None:
    with open_register(works.register) as register:
        assert works.revisions()[0].issue is not None
        assert register is not None
    kept = works.revisions()[0].issue.kept  # type: ignore[union-attr]  # it is there
    assert kept is not None
    sources = sources_of(kept)
    assert isinstance(sources, Sources)
    assert sources.site == works.site.read_bytes()
    assert kept.content.encode() == whole_content(job).data.replace(
        b"Kiln-car pusher, power unit", b"Kiln-car pusher power unit"
    )
    assert kept.rows == rows_of(job)


def test_targets_parts_and_steps_are_told(works: Works, job: Matter) -> None:
    """A relief set 4 bar higher: its target, its part, and the steps that print the figure."""
    said = whole_content(job)
    kept = kept_of(job, Layout(), said.data)
    setting = next(line for line in works.machine.read_text().splitlines() if "setting:" in line)
    figure = setting.split("setting:")[1].split("bar")[0].strip()
    higher = str(int(figure) + 4)
    changed = edited(works, setting, setting.replace(f"{figure} bar", f"{higher} bar"))
    lines = changes_since(kept, changed, whole_content(changed).data)
    assert f"target RV1: {figure} bar → {higher} bar" in lines
    assert any(line.startswith("accept RV1: ") for line in lines)
    assert any(line.startswith("parts RV1") and f"{figure} bar → {higher} bar" in line for line in lines)
    assert any(line.startswith("step") and f"{higher} bar" in line for line in lines)
    assert not any(line.startswith(("target gone", "new target")) for line in lines)


def test_a_row_as_printed_judges_its_own_target_and_what_lies_past_its_limits(job: Matter) -> None:
    for row in rows_of(job):
        assert judged(row, row.target) is Outcome.WITHIN
        assert judged(row, row.low) is Outcome.WITHIN
        assert judged(row, row.high) is Outcome.WITHIN
        assert judged(row, str(int(float(row.never_exceed)) + 1)) is Outcome.RATING


@pytest.mark.parametrize("name", ["clay_mixer", "glaze_press", "kiln_pusher"])
def test_limits_of_a_row_lie_around_each_other(root: Path, name: str) -> None:
    matter = pipeline.steps(pipeline.check(root / "sample_machines" / f"{name}.yaml"))
    for row in rows_of(matter):
        low, high = float(row.low), float(row.high)
        assert float(row.ladder_low) <= low < float(row.target) < high <= float(row.ladder_high), row
        assert high < float(row.never_exceed), row
        assert float(row.drift_low) <= low, row
