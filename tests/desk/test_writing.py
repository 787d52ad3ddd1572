"""Recording from the page: in its window, outside it, accepted by name; and nothing unsigned that writes."""

from __future__ import annotations

import re
from collections.abc import Iterator
from datetime import date

import httpx2
import pytest
from desk_bench import PASSWORD, Bench, code_of, events, form_in, kept, list_gauge, sign_in, word
from starlette.testclient import TestClient

from sheets import pipeline
from sheets.register.revisions import Revision

WRITTEN = ("job opened", "read", "deviation noted", "deviation accepted", "deviation corrected")
ROW = {"why": "yearly check", "found": "207", "left": "205", "gauge": "17", "oil": "48", "seal": "whole",
       "people": "Tom Ness", "on": "2031-03-04", "at": "12:30"}  # fmt: skip
ACCEPTED = {
    "accept_name": "Ada Quarrow",
    "accept_password": PASSWORD,
    "accept_why": "mould is worn",
}


@pytest.fixture
def issued(bench: Bench) -> Revision:
    for name, role in (("Rita Sorn", "reader"), ("Tom Ness", "technician"), ("Ada Quarrow", "approver")):
        pipeline.set_user(bench.users, name=name, role=role, password=PASSWORD)
    list_gauge(bench.register)
    return bench.issue(kept=kept())


@pytest.fixture
def site(bench: Bench, issued: Revision) -> Iterator[TestClient]:
    assert issued.issue is not None
    with bench.client(users=bench.users) as client:
        yield client


def sent(client: TestClient, issued: Revision, row: int = 1, **changed: str) -> httpx2.Response:
    """The form of a row, as shown, filled in and sent."""
    path = f"/r/{issued.record_id}/row/{row}"
    return client.post(path, data={**ROW, "form": form_in(client.get(path)), **changed})


def test_targets_faces_and_windows_are_the_record_s(site: TestClient, issued: Revision) -> None:
    text = site.get(code_of(issued)).text
    for said in ("205 bar", "200 to 210 bar", "250 bar", "gauge G1 at TP1", "2973 psi"):
        assert said in text
    assert text.count('<svg class="face"') == 1
    assert "G1 at TP1: target 205 bar, accept 200 to 210 bar, never exceed 250 bar" in text


def test_no_targets_on_any_other_paper(bench: Bench, site: TestClient, issued: Revision) -> None:
    assert "205 bar" not in site.get(f"/r/{issued.record_id}?d=00000000&v=1").text
    bench.issue(kept=kept())
    assert "205 bar" not in site.get(code_of(issued)).text


def test_a_reading_stands_under_the_name_that_signed_in(
    bench: Bench, site: TestClient, issued: Revision
) -> None:
    sign_in(site)
    done = sent(site, issued)
    assert (done.status_code, done.headers["location"]) == (303, f"/r/{issued.record_id}")
    told = events(bench, *WRITTEN)
    assert [(kind, who) for kind, who, _ in told] == [
        ("job opened", "Tom Ness"), ("read", "Tom Ness"), ("read", "Tom Ness"),
    ]  # fmt: skip
    expected = {"phase": "as left", "value": "205", "unit": "bar", "instrument": "4711", "oil_c": "48"}
    expected |= {"seal": "whole", "people": ["Tom Ness"]}
    assert {name: told[2][2][name] for name in expected} == expected
    text = site.get(code_of(issued)).text
    assert "as left</span> <strong>205 bar</strong>" in text
    assert "2031-03-04, Tom Ness, gauge 4711" in text


def test_the_open_job_is_offered_for_the_next_row(bench: Bench, site: TestClient, issued: Revision) -> None:
    sign_in(site)
    sent(site, issued)
    (job,) = pipeline.look_at_record(
        pipeline.ReadingRoom(bench.settings()), pipeline.Paper(record_id=issued.record_id), now=bench.clock()
    ).jobs
    assert sent(site, issued, row=2, job=str(job.number)).status_code == 303
    assert len(events(bench, "job opened")) == 1
    assert [data["job"] for _, _, data in events(bench, "read")] == [job.number] * 4


def test_outside_its_window_nothing_is_written_until_an_approver_accepts(
    bench: Bench, site: TestClient, issued: Revision
) -> None:
    sign_in(site)
    refused = sent(site, issued, left="215")
    assert refused.status_code == 409
    assert "215 bar is outside its window: accepted are 200 to 210." in refused.text
    assert "Acceptance by name" in refused.text
    assert 'value="215"' in refused.text  # nothing has to be typed again
    assert events(bench, *WRITTEN) == []
    path = f"/r/{issued.record_id}/row/1"
    done = site.post(path, data={**ROW, **ACCEPTED, "left": "215", "form": form_in(refused)})
    assert done.status_code == 303
    (accepted,) = events(bench, "deviation accepted")
    assert accepted[1] == "Ada Quarrow"
    assert accepted[2]["why"] == "mould is worn"
    shown = site.get(code_of(issued)).text
    assert re.search(r"outside its window</strong>, deviation [0-9]+, accepted by Ada Quarrow", shown)


@pytest.mark.parametrize(
    ("changed", "status", "told"),
    [
        ({"accept_password": "wrong password"}, 422, "those of an approver"),
        ({"accept_name": "Tom Ness"}, 422, "those of an approver"),
        ({"accept_name": "Nobody"}, 422, "those of an approver"),
        ({"accept_why": ""}, 422, "Nothing says why"),
        ({"people": "Tom Ness, Ada Quarrow"}, 409, "Who read it, noted it"),
        ({"left": "235"}, 409, "outside the order of limits"),
        ({"left": "251"}, 409, "never be exceeded"),
    ],
)
def test_what_an_acceptance_can_not_do(
    bench: Bench, site: TestClient, issued: Revision, changed: dict[str, str], status: int, told: str
) -> None:
    sign_in(site)
    answer = sent(site, issued, **{"left": "215", **ACCEPTED, **changed})
    assert answer.status_code == status
    assert told in answer.text
    assert PASSWORD not in answer.text
    assert events(bench, *WRITTEN) == []


def test_an_approver_at_the_form_does_not_accept_what_they_record(
    bench: Bench, site: TestClient, issued: Revision
) -> None:
    """Signed in as an approver, naming another as who read: that other may not exist at all."""
    sign_in(site, "Ada Quarrow")
    answer = sent(site, issued, left="215", people="Zeno Fell", **ACCEPTED)
    assert answer.status_code == 409
    assert "told the register of it" in answer.text
    assert events(bench, *WRITTEN) == []


@pytest.mark.parametrize("left", ["235", "251"])
def test_beyond_the_order_or_a_rating_no_acceptance_is_offered(
    bench: Bench, site: TestClient, issued: Revision, left: str
) -> None:
    sign_in(site)
    answer = sent(site, issued, left=left)
    assert answer.status_code == 409
    assert "Nobody can accept that." in answer.text
    assert "accept_password" not in answer.text
    assert events(bench, *WRITTEN) == []


@pytest.mark.parametrize(
    "changed",
    [
        {"left": "two hundred"}, {"left": "205,0"}, {"left": "-1e9"}, {"left": "205 psi"}, {"found": ""},
        {"gauge": "9999"}, {"seal": ""}, {"seal": "glued"}, {"people": ""}, {"people": " , "}, {"why": ""},
        {"on": "4.3.2031"}, {"on": "2041-01-01"}, {"at": "25:00"}, {"oil": "hot"}, {"job": "1"},
        {"job": "999999999"}, {"job": "x"}, {"why": "x" * 5000}, {"people": "a\nb"},
        {"found": "", "left": ""},
    ],
    ids=lambda changed: next(iter(changed)),
)  # fmt: skip
def test_wrong_figures_come_back_with_the_form(
    bench: Bench, site: TestClient, issued: Revision, changed: dict[str, str]
) -> None:
    sign_in(site)
    answer = sent(site, issued, **changed)
    assert answer.status_code in (409, 422)
    assert 'role="alert"' in answer.text
    assert "Record as Tom Ness" in answer.text
    assert events(bench, *WRITTEN) == []


def test_an_overdue_gauge_is_refused(bench: Bench, site: TestClient, issued: Revision) -> None:
    list_gauge(bench.register, serial="12", number="18", due=date(2031, 3, 3))
    sign_in(site)
    answer = sent(site, issued, gauge="12")
    assert answer.status_code == 409
    assert "due on 2031-03-03" in answer.text


def test_nobody_unsigned_writes_or_sees_a_form(bench: Bench, site: TestClient, issued: Revision) -> None:
    paths = [f"/r/{issued.record_id}/{part}" for part in ("row/1", "deviation/9", "tag")]
    for path in paths:
        assert site.get(path).status_code == 303
        assert site.post(path, data=ROW).status_code == 401
    assert site.get(f"/r/{issued.record_id}/tags.pdf").status_code == 303
    sign_in(site, "Rita Sorn")
    for path in paths:
        assert site.get(path).status_code == 403
        assert site.post(path, data=ROW).status_code == 403
    assert "Record row" not in site.get(code_of(issued)).text
    assert events(bench, *WRITTEN) == []


def test_forged_and_replayed_forms_write_nothing(bench: Bench, site: TestClient, issued: Revision) -> None:
    sign_in(site)
    path = f"/r/{issued.record_id}/row/1"
    for forged in ({}, {"form": ""}, {"form": "made-up"}, {"form": site.cookies["jamnut"]}):
        assert site.post(path, data={**ROW, **forged}).status_code == 403
    form = form_in(site.get(path))
    assert site.post(path, data={**ROW, "form": form}).status_code == 303
    written = events(bench, *WRITTEN)
    assert site.post(path, data={**ROW, "form": form}).status_code == 403
    assert events(bench, *WRITTEN) == written
    twice = f"form={form_in(site.get(path))}&left=205&left=215"
    kind = {"content-type": "application/x-www-form-urlencoded"}
    assert site.post(path, content=twice, headers=kind).status_code == 422
    assert events(bench, *WRITTEN) == written


def test_a_form_that_was_used_comes_back_with_what_was_filled_in(
    bench: Bench, site: TestClient, issued: Revision
) -> None:
    sign_in(site)
    path = f"/r/{issued.record_id}/row/1"
    form = form_in(site.get(path))
    again = site.post(path, data={**ROW, "form": form[:-1], "why": "after the storm"})
    assert again.status_code == 403
    assert "sent before, or is too old" in again.text
    assert 'value="after the storm"' in again.text
    assert 'value="207"' in again.text
    assert events(bench, *WRITTEN) == []
    fresh = site.post(path, data={**ROW, "form": form_in(again)})
    assert fresh.status_code == 303
    used = form_in(again)
    assert site.post(f"/r/{issued.record_id}/deviation/1", data={"form": used}).status_code == 404
    tag = site.post(f"/r/{issued.record_id}/tag", data={"form": used, "where": "on the valve"})
    assert (tag.status_code, 'value="on the valve"' in tag.text) == (403, True)


def test_too_many_forms_a_minute_have_to_wait(bench: Bench, site: TestClient, issued: Revision) -> None:
    sign_in(site)
    answers = [sent(site, issued, left="x").status_code for _ in range(42)]
    assert answers == [422] * 40 + [429] * 2
    bench.clock.move(minutes=1)
    assert sent(site, issued).status_code == 303


def test_a_form_of_a_revision_that_was_superseded_meanwhile(
    bench: Bench, site: TestClient, issued: Revision
) -> None:
    sign_in(site)
    path = f"/r/{issued.record_id}/row/1"
    form = form_in(site.get(path))
    bench.issue(kept=kept())
    assert site.post(path, data={**ROW, "form": form}).status_code == 409
    assert site.get(path).status_code == 404
    assert events(bench, *WRITTEN) == []


def test_a_deviation_is_accepted_by_an_approver(bench: Bench, site: TestClient, issued: Revision) -> None:
    answers = {
        "format": "1", "record": issued.record_id, "why": "yearly check", "day": "2031-03-04",
        "people": ["Tom Ness"], "from paper": "no",
        "readings": [
            {"row": "1", "as found": "207 bar", "as left": "215 bar", "gauge": "17", "seal": "none"}
        ],
    }  # fmt: skip
    left = pipeline.record_answers(answers, register_at=bench.register, by="Tom Ness", when=bench.clock())
    ((number, _, _),) = left.open_deviations
    path = f"/r/{issued.record_id}/deviation/{number}"
    sign_in(site)
    shown = site.get(path)
    assert "Accepted by" not in shown.text
    refused = site.post(path, data={"form": form_in(shown), "accepted": "it will do"})
    assert refused.status_code == 403
    refused = site.post(path, data={"form": form_in(refused), "done": "wiped"})
    assert refused.status_code == 409
    assert "Only a reading shows" in refused.text
    sign_in(site, "Ada Quarrow")
    assert path in site.get(code_of(issued)).text
    done = site.post(path, data={"form": form_in(site.get(path)), "accepted": "till the mould is changed"})
    assert done.status_code == 303
    assert events(bench, "deviation accepted")[0][1] == "Ada Quarrow"
    assert site.get(path).status_code == 404


def test_a_script_in_every_field_of_a_form_stays_text(
    bench: Bench, site: TestClient, issued: Revision
) -> None:
    sign_in(site)
    script = "<script>alert('x')</script>\"'"
    fields = ["job", "why", "found", "left", "gauge", "oil", "seal_number", "at", "people", "on"]
    answer = sent(site, issued, **dict.fromkeys(fields, script))
    assert answer.status_code == 422
    assert "<script" not in answer.text
    assert answer.text.count("&lt;script&gt;") >= len(fields) - 1  # a job is chosen, never shown as typed
    answer = sent(site, issued, left="215", accept_name=script, accept_why=script, accept_password="x")
    assert "<script" not in answer.text
    assert answer.text.count("&lt;script&gt;") == 2
    assert sent(site, issued, why=script).status_code == 303
    text = site.get(f"/r/{issued.record_id}/row/1").text
    assert "<script" not in text
    assert "&lt;script&gt;" in text
    other = bench.issue("WI-205", "KP-3", kept=kept(called=script))
    text = site.get(code_of(other)).text
    assert word(site.get(code_of(other))) == "current"
    assert "<script" not in text
