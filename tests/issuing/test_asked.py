"""Questions about a pack that was really issued: where each zero is shown, what changed and who judged it."""

from __future__ import annotations

import pytest
from works import BRAM, DOCUMENT, LATER, Works

from sheets import pipeline
from sheets.errors import InputError
from sheets.pages.compose.matter import Matter
from sheets.register.acts import ZeroRead
from sheets.register.opening import open_register
from sheets.register.saying import tell


def test_where_each_zero_is_shown(works: Works, job: Matter) -> None:
    (revision,) = works.revisions()
    zero = ZeroRead(
        job=1, where="TP1", value="0", unit="bar", instrument="BT-4471", moved=True, by=BRAM, on=LATER.date()
    )
    with open_register(works.register) as register, register.writing() as writer:
        event = tell(
            writer,
            zero,
            who=BRAM,
            when=LATER,
            machine=revision.machine,
            document=revision.document,
            record_id=revision.record_id,
        )
    found = pipeline.zeros(works.register, "PU-03")
    head, *lines = found.lines
    assert head == ("line", "up to", "relieved by", "verified at")
    # each line says where it is verified, or that it is not
    points = {id_ for id_, part in job.machine.parts.items() if part.kind == "test point"}
    assert lines
    assert all(set(line[3].split(", ")) <= points or line[3] == job.text("not_verified") for line in lines)
    read = [order for _, order in found.verified if "It shows 0" in order]
    assert {point for line in lines for point in line[3].split(", ") if point in points} == {
        point for point in points if any(f"at {point}." in order for order in read)
    }
    text = list(pipeline.zeros_text(found))
    assert text[0] == f"{DOCUMENT} revision 1, machine PU-03, record {revision.record_id}"
    assert "read: 1 zero" in text
    assert text[-1].split()[0] == str(event)
    assert "TP1" in text[-1]


def test_no_zero_is_told_of_sheets_that_aren_t_current(works: Works) -> None:
    (revision,) = works.revisions()
    pipeline.withdraw(
        revision.record_id, register_at=works.register, reason="sold", by=BRAM, when=revision.reserved_at
    )
    with pytest.raises(InputError, match="No revision of it is current"):
        pipeline.zeros(works.register, DOCUMENT)


def test_what_changed_from_one_to_the_next_and_who_judged_it(works: Works, job: Matter) -> None:
    works.issue(job, reason="the plate says so")
    lines = pipeline.history(DOCUMENT, register_at=works.register, changes=True)
    (at,) = [place for place, line in enumerate(lines) if "the plate says so; judged by" in line]
    assert lines[at].strip() == f"the plate says so; judged by {BRAM}"
    assert lines[at + 1].strip() == "machine name: Kiln-car pusher power unit → Kiln-car pusher, power unit"


def test_what_the_paper_says_is_current_or_not(works: Works, job: Matter) -> None:
    first, second = works.revisions()[0], works.issue(job)
    assert pipeline.current(works.register, first.record_id).status == 1
    assert pipeline.current(works.register, second.record_id).status == 0
    assert pipeline.current(works.register, second.digest).status == 0
