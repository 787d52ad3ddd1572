"""Questions about a pack that was really issued: where each zero is shown, what changed and who judged it."""

from __future__ import annotations

import pytest
from works import BRAM, DOCUMENT, LATER, Works

from sheets import pipeline
from sheets.errors import InputError, RefusedError
from sheets.pages.compose.matter import Matter
from sheets.register.acts import ZeroRead
from sheets.register.opening import open_register
from sheets.register.saying import tell

EDDA = "Edda Fenn"


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


def test_from_a_recorded_job_to_an_inspection_that_somebody_else_makes(works: Works) -> None:
    """Whoever took a reading by these sheets doesn't inspect them; what is found is closed by number."""
    (revision,) = works.revisions()
    day = LATER.date()
    told = {"register_at": works.register, "by": EDDA, "when": LATER}
    for name in (BRAM, EDDA):
        pipeline.authorise(
            works.register, name=name, what="lockout", since=day, until=None, by="Gita Stoll", when=LATER
        )
    pipeline.list_gauge(
        works.register,
        serial="BT-4471",
        number="17",
        what="digital gauge",
        range_text="400 bar",
        accuracy_class="",
        error_text="0.2 bar",
        certificate="C-2209",
        due=day,
        by=EDDA,
        when=LATER,
    )
    issue = revision.issue
    assert issue is not None
    assert issue.kept is not None
    row = issue.kept.rows[0]
    made = pipeline.record_answers(
        {
            "format": "1",
            "record": revision.record_id,
            "why": "yearly setting",
            "day": day.isoformat(),
            "people": [BRAM],
            "from paper": "no",
            "readings": [
                {"row": "1", "as found": f"{row.target} {row.unit}", "gauge": "17", "seal": "whole"},
            ],
        },
        **told,
    )
    (reading,) = [one.reading for one in made.readings]

    def inspected(inspector: str, *employees: str) -> list[int]:
        _, left = pipeline.inspect(
            works.register,
            document="PU-03",
            record_id=None,
            inspector=inspector,
            employees=employees,
            on=day,
            deviations=("tag of Q1 unreadable",),
            corrections=(),
            by=inspector,
            today=day,
            when=LATER,
        )
        return left

    with pytest.raises(
        RefusedError, match=rf"They used the procedure themselves: events {made.job}, {reading}\."
    ):
        inspected(BRAM, "Cleo Harnett")
    (deviation,) = inspected(EDDA, BRAM)
    assert pipeline.deviations(works.register, given="PU-03").status == 1
    pipeline.settle(deviation, accepted="", done="new tag put on", on=day, **told)
    shown = pipeline.deviations(works.register, number=deviation)
    assert shown.status == 0
    text = "; ".join(pipeline.deviations_text(shown))
    assert f"corrected on {day} by {EDDA}: new tag put on" in text

    (gauge,) = pipeline.instruments(works.register, on=day, given="17").gauges
    assert [one.event for one in gauge.hanging] == [reading]
    used = pipeline.used(works.register, "PU-03", on=day)
    assert [(one.revision.number, [use.event for use in one.uses]) for one in used.used] == [
        (1, [made.job, reading])
    ]
    pipeline.audit(works.register, works.folder / "audit.pdf", day=day)
