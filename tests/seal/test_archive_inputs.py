"""A pack holds what it was made from, and can be made again from it."""

from __future__ import annotations

import io
import json
import shutil
from pathlib import Path

import pikepdf
import pytest

from sheets import pipeline
from sheets.pages.compose.matter import Matter
from sheets.pages.document import Layout
from sheets.seal.canonical import digest


def attached(data: bytes) -> dict[str, tuple[str, bytes]]:
    """Relationship and bytes of each attachment by name."""
    with pikepdf.open(io.BytesIO(data)) as pdf:
        return {str(file.UF): (str(file.AFRelationship)[1:], file.EF.F.read_bytes()) for file in pdf.Root.AF}


def test_the_files_are_attached_as_they_were_read(kiln_pusher: Matter, root: Path) -> None:
    found = attached(pipeline.pack(kiln_pusher, Layout()))
    samples = root / "sample_machines"
    assert found["machine.yaml"] == ("Source", (samples / "kiln_pusher.yaml").read_bytes())
    assert found["site.yaml"] == ("Source", (samples / "site.yaml").read_bytes())
    assert sorted(found) == ["content.json", "job.json", "machine.yaml", "site.yaml"]


def test_the_printed_digest_is_that_of_the_attached_content(any_sample: Matter) -> None:
    relationship, data = attached(pipeline.pack(any_sample, Layout()))["content.json"]
    document, printed = pipeline.content(any_sample)
    assert relationship == "Data"
    assert digest(data) == printed
    assert json.loads(data)["number"] == document.number


def test_the_job_is_attached(kiln_pusher: Matter) -> None:
    job = json.loads(attached(pipeline.pack(kiln_pusher, Layout(paper="Letter")))["job.json"][1])
    assert (job["task"], job["part"], job["paper"]) == ("set", "", "Letter")
    assert job["documents"] == ["cover", "instruction", "lockout", "tags", "record", "engineer"]
    assert (job["format"], job["engine"]) == (1, kiln_pusher.engine)


@pytest.mark.parametrize("walked", [False, True])
def test_a_pack_is_made_again_from_itself(walked: bool, root: Path, tmp_path: Path) -> None:
    """Taken out into a folder, the files give the same bytes again, whatever their names were before."""
    first, second = tmp_path / "first", tmp_path / "second"
    first.mkdir()
    file, site = first / "pusher of line 2.yaml", first / "elsewhere.yaml"
    shutil.copy(root / "sample_machines" / "kiln_pusher.yaml", file)
    shutil.copy(root / "sample_machines" / "site.yaml", site)
    if walked:
        file.with_suffix(".walkdown.yaml").write_text("format: 1\nmachine: PU-03\n", encoding="utf-8")
    made = pipeline.pack(pipeline.steps(pipeline.check(file, site)), Layout())

    second.mkdir()
    for name, (_, data) in attached(made).items():
        (second / name).write_bytes(data)
    again = pipeline.pack(pipeline.steps(pipeline.check(second / "machine.yaml")), Layout())

    assert ("machine.walkdown.yaml" in attached(made)) is walked
    assert again == made


def test_a_remark_changes_the_file_and_not_what_the_sheets_say(
    kiln_pusher: Matter, root: Path, tmp_path: Path
) -> None:
    shutil.copy(root / "sample_machines" / "site.yaml", tmp_path)
    text = (root / "sample_machines" / "kiln_pusher.yaml").read_bytes()
    (tmp_path / "kiln_pusher.yaml").write_bytes(text + b"\n# a remark\n")
    remarked = pipeline.steps(pipeline.check(tmp_path / "kiln_pusher.yaml"))

    assert pipeline.content(remarked) == pipeline.content(kiln_pusher)
    before, after = (attached(pipeline.pack(matter, Layout())) for matter in (kiln_pusher, remarked))
    assert {name for name in before if before[name] != after[name]} == {"machine.yaml"}
